package gas

import (
	"errors"
	"math"
	"testing"

	"heatreeve/thermo"
)

func TestDewPoint(t *testing.T) {
	for _, tt := range []struct {
		name      string
		fractions map[string]float64
		p, want   float64 // Pa, K
		tolerance float64 // K
		source    string
	}{
		{"water", map[string]float64{"H2O": 1}, 1e5, 372.755919, 1e-6, "R7-97(2012), table 36"},
		{"a tenth of water", map[string]float64{"N2": 0.9, "H2O": 0.1}, 1e6, 372.755919, 1e-6, "R7-97(2012), table 36, at the partial pressure"},
		{"ice", map[string]float64{"N2": 0.998, "H2O": 0.002}, 8.94735 / 0.002, 230, 0.03, "IAPWS R14-08, check value at 230 K: 8.94735 Pa"},
		{"propane", map[string]float64{"C3H8": 1}, 101325, 231.04, 1.5, "normal boiling point (from memory)"},
		{"ammonia", map[string]float64{"NH3": 1}, 101325, 239.82, 1.5, "normal boiling point (from memory)"},
		{"sulfur dioxide", map[string]float64{"SO2": 1}, 101325, 263.1, 1.5, "normal boiling point (from memory)"},
		{"n-butane", map[string]float64{"C4H10": 1}, 101325, 272.66, 1.5, "normal boiling point (from memory)"},
		{"n-pentane", map[string]float64{"C5H12": 1}, 101325, 309.21, 1.5, "normal boiling point (from memory)"},
		{"hydrogen sulfide", map[string]float64{"H2S": 1}, 101325, 212.85, 1.5, "normal boiling point (from memory)"},
		{"chlorine", map[string]float64{"Cl2": 1}, 101325, 239.2, 1.5, "normal boiling point (from memory)"},
		{"liquid carbon dioxide", map[string]float64{"CO2": 0.5, "N2": 0.5}, 4e6, 253.65, 1.5, "saturation at 2 MPa, Span and Wagner 1996 (from memory)"},
		{"carbon dioxide", map[string]float64{"CO2": 1}, 101325, 194.69, 0.1, "sublimation point (from memory)"},
	} {
		f := mustNew(t, tt.fractions, Ideal)
		lo, hi := f.Span(tt.p)
		if !(math.Abs(lo-tt.want) <= tt.tolerance) || !math.IsInf(hi, 1) {
			t.Errorf("%s at %g Pa: span %.3f to %g K, want %.3f ± %g (%s)", tt.name, tt.p, lo, hi, tt.want, tt.tolerance, tt.source)
		}
	}
	if lo, _ := mustAir(t, Ideal).Span(5e5); lo != 0 {
		t.Errorf("dry air: dew point %g K, want none", lo)
	}
}

func TestWetIsRefused(t *testing.T) {
	_, err := mustNew(t, flue, Ideal).At(320, 101325)
	e := new(thermo.RangeError)
	if !errors.As(err, &e) || e.Why != "dew or frost point of H2O" || !e.Below {
		t.Errorf("flue gas at 320 K: %v, want its dew point", err)
	}
}

// N2O4 ⇌ 2 NO2 has Kp = 0.15 bar at 25 °C (physical chemistry textbooks, from memory); where the gas is let
// pass, the dimers add 0.04 R to cp.
func TestPairing(t *testing.T) {
	K := func(T float64) float64 { return math.Exp(pairEntropy - pairHeat/T) } // bar
	if k := K(298.15); !(math.Abs(k-0.15) <= 0.005) {
		t.Errorf("Kp = %.4f bar at 25 °C, want 0.15", k)
	}
	for _, tt := range []struct{ x, p float64 }{{1, 1e5}, {1, 1e3}, {0.1, 1e6}, {0.03, 1e5}} {
		T := pairing(tt.x * tt.x * tt.p)
		dimers := tt.x * tt.x * tt.p / 1e5 / K(T)
		if d := dimers * (pairHeat / T) * (pairHeat / T); !(math.Abs(d-0.04) <= 1e-6) {
			t.Errorf("NO2 of %g at %g Pa and %g K: dimers add %g R, want 0.04", tt.x, tt.p, T, d)
		}
	}
	if T := pairing(1e-6 * 1e-6 * 1e5); T > minT {
		t.Errorf("1 ppm pairs at %g K", T)
	}
}

// What is passed as clear of every dew point is so, and dry is what lies above it.
func TestClear(t *testing.T) {
	met := 0
	for name, fractions := range everyGas() {
		vs := &mustNew(t, fractions, PengRobinson).(*cubic).vapours
		for p := 1e2; p <= 10e6; p *= 1.37 {
			dew, formula := vs.dewPoint(p)
			if dew == 0 {
				continue
			}
			met++
			for _, T := range []float64{dew - 1, dew - 1e-6, dew * 0.9} {
				if vs.dry(T, p) || !vs.dry(2*dew-T, p) {
					t.Errorf("%s: %g K is dry %v at %g Pa, %g K dry %v, the dew point of %s is %g K", name, T, vs.dry(T, p), p, 2*dew-T, vs.dry(2*dew-T, p), formula, dew)
				}
				if vs.clear(T, p) {
					t.Errorf("%s: %g K is clear at %g Pa, the dew point of %s is %g K", name, T, p, formula, dew)
				}
			}
		}
	}
	if met < 500 {
		t.Errorf("%d states of gases that condense, want 500 or more", met)
	}
}

// A gas begins at 1 Pa, by every model, and is refused below, down to the smallest number there is.
func TestThinnestGas(t *testing.T) {
	for name, fractions := range everyGas() {
		for _, model := range []Model{Best, Ideal, PengRobinson, Reference} {
			f, err := New(fractions, model)
			if err != nil {
				continue // no reference equation: TestReferenceRefuses
			}
			for _, T := range []float64{300, 450, 1990} {
				if hot := f.Bounds().MaxT; T > hot {
					continue
				}
				if at, err := f.At(T, minP); err != nil || !(at.Density > 0) {
					t.Errorf("%s %v, %g K at 1 Pa: %+v, %v", name, model, T, at, err)
				}
				for _, p := range []float64{0.999, 1e-100, 1e-316, math.SmallestNonzeroFloat64} {
					at, err := f.At(T, p)
					e := new(thermo.RangeError)
					if !errors.As(err, &e) || e.Quantity != "pressure" || e.Bound != minP || e.Fluid != f.Name() || at != (thermo.Properties{}) {
						t.Errorf("%s %v, %g K at %g Pa: %+v, %v", name, model, T, p, at, err)
					}
				}
			}
		}
	}
	v := pure(t, "H2O", Best).(thermo.Balancer)
	if b, err := v.Balance(400, 1e-316); err == nil {
		t.Errorf("balance of water vapour at 1e-316 Pa: %+v", b)
	}
}
