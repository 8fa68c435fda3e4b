package aqueous

import (
	"math"
	"strings"
	"testing"
)

// Mass fractions by volume: ASHRAE Handbook Fundamentals 2001, chapter 21, within
// 0.3 % of mass, since the densities differ by up to 0.5 % and the tables round; ethanol by
// OIML R 22 (from memory), within 0.1 %.
func TestVolumeAgainstTables(t *testing.T) {
	for _, tt := range []struct {
		solute            string
		volume, mass, tol float64
	}{
		{"ethylene glycol", 0.10, 0.1117, 0.003}, {"ethylene glycol", 0.20, 0.2189, 0.003}, {"ethylene glycol", 0.30, 0.3240, 0.0035},
		{"ethylene glycol", 0.40, 0.4250, 0.003}, {"ethylene glycol", 0.50, 0.5240, 0.003},
		{"propylene glycol", 0.10, 0.1041, 0.003}, {"propylene glycol", 0.20, 0.2060, 0.003}, {"propylene glycol", 0.30, 0.3060, 0.003},
		{"propylene glycol", 0.40, 0.4040, 0.003}, {"propylene glycol", 0.50, 0.5010, 0.003},
		{"ethanol", 0.10, 0.0801, 0.001}, {"ethanol", 0.20, 0.1621, 0.001}, {"ethanol", 0.40, 0.3330, 0.001}, {"ethanol", 0.60, 0.5209, 0.001},
	} {
		s, err := lookup(tt.solute)
		if err != nil {
			t.Fatal(err)
		}
		x := s.massFraction(tt.volume)
		t.Logf("%s %g vol %%: %.4f by mass, table %.4f", tt.solute, 100*tt.volume, x, tt.mass)
		if !(math.Abs(x-tt.mass) <= tt.tol) {
			t.Errorf("%s %g vol %%: %.4f by mass, want %.4f", tt.solute, 100*tt.volume, x, tt.mass)
		}
	}
}

func TestVolumeAndMassAgree(t *testing.T) {
	for k := range liquids {
		s := &liquids[k]
		for _, x := range []float64{0, 0.1, 0.3, s.max} {
			phi := s.volumeFraction(x)
			f, err := NewByVolume(s.name, phi, 0.01)
			if err != nil {
				t.Fatal(err)
			}
			slope := (s.volumeFraction(x+1e-6) - s.volumeFraction(x-1e-6)) / 2e-6
			g := mustNew(t, s.name, x, 0.01/slope)
			a, err1 := f.At(290, pressure)
			b, err2 := g.At(290, pressure)
			if err1 != nil || err2 != nil || !(math.Abs(a.Cp/b.Cp-1) <= 1e-12) || !(math.Abs(a.Density/b.Density-1) <= 1e-12) {
				t.Errorf("%s: %+v %v, by mass %+v %v", f.Name(), a, err1, b, err2)
			}
			ua, va := f.Uncertainty(290, pressure)
			ub, vb := g.Uncertainty(290, pressure)
			if !(math.Abs(ua/ub-1) <= 1e-7) || !(math.Abs(va/vb-1) <= 1e-7) {
				t.Errorf("%s: uncertainties %g and %g, by mass %g and %g", f.Name(), ua, va, ub, vb)
			}
		}
	}
}

// What the definition by the volumes of the parts before mixing would make of it:
// the largest difference is what NewByVolume's comment says.
func TestVolumeBeforeMixing(t *testing.T) {
	const waterDensity = 998.2 // kg/m³ at 20 °C
	for k := range liquids {
		s := &liquids[k]
		for x := 0.0; x <= s.max; x += 0.01 {
			parts := x / s.density20 / (x/s.density20 + (1-x)/waterDensity)
			if d := s.volumeFraction(x) - parts; !(d > -0.001 && d < 0.025) {
				t.Errorf("%s %.2f by mass: %.4f of the mixture, %.4f of the parts", s.name, x, s.volumeFraction(x), parts)
			}
		}
	}
}

func TestNewByVolume(t *testing.T) {
	f, err := NewByVolume("Propylene-glycol", 0.3, 0)
	if err != nil || f.Name() != "propylene glycol 30 vol %" {
		t.Errorf("%v, %v", f, err)
	}
	for _, tt := range []struct {
		solute string
		phi, u float64
		want   string
	}{
		{"NaCl", 0.1, 0, "sodium chloride by volume: only solutes that are liquid at 20 °C"},
		{"ammonia", 0.1, 0, "ammonia by volume"},
		{"brine", 0.1, 0, `unknown solute "brine"`},
		{"ethanol", 0.8, 0, "ethanol of volume fraction 0.8; the polynomials hold from 0 to 0.67"},
		{"ethanol", 40, 0, "volume fraction 40"},
		{"ethanol", -0.1, 0, "volume fraction -0.1"},
		{"ethanol", math.NaN(), 0, "volume fraction NaN"},
		{"ethanol", 0.3, 0.2, "uncertainty of the volume fraction is 0.2"},
		{"ethanol", 0.3, math.NaN(), "uncertainty of the volume fraction is NaN"},
	} {
		if f, err := NewByVolume(tt.solute, tt.phi, tt.u); err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("NewByVolume(%q, %g, %g) = %v, %v; want an error with %q", tt.solute, tt.phi, tt.u, f, err, tt.want)
		}
	}
}
