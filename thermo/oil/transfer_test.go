package oil

import (
	"errors"
	"math"
	"strings"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
	"heatreeve/thermo/table"
)

func TestTransferConformance(t *testing.T) {
	for _, name := range HeatTransferLiquids() {
		t.Run(name, func(t *testing.T) { fluidtest.Run(t, fluidtest.Must(HeatTransfer(name))(t)) })
	}
}

// Every row of the sheets is met, and so is every vapour pressure by the boiling point.
func TestTransferRows(t *testing.T) {
	all := rows(t, "transfer.csv")
	if len(all) != 160 {
		t.Errorf("%d rows, want 160", len(all))
	}
	pressures := 0
	for _, r := range all {
		f := fluidtest.Must(HeatTransfer(r.Text("liquid")))(t)
		T := r.Number("T_K")
		s, err := f.At(T, 2e6)
		if err != nil || !(math.Abs(s.Cp/r.Number("cp_J_per_kgK")-1) <= 1e-14) || !(math.Abs(s.Density/r.Number("rho_kg_per_m3")-1) <= 1e-14) {
			t.Errorf("%s at %g K: %+v, %v; want cp %s, density %s", f.Name(), T, s, err, r.Text("cp_J_per_kgK"), r.Text("rho_kg_per_m3"))
		}
		if !r.Has("psat_Pa") {
			continue
		}
		pressures++
		if _, hi := f.Span(r.Number("psat_Pa")); !(math.Abs(hi/T-1) <= 1e-12) {
			t.Errorf("%s at %s Pa boils at %.12g K, want %g", f.Name(), r.Text("psat_Pa"), hi, T)
		}
	}
	if pressures != 118 {
		t.Errorf("%d vapour pressures, want 118", pressures)
	}
}

// Leave every other row out: what straight lines and cubics through the rest miss of it.
// Lines miss up to 0.29 %, and cubics up to 0.37 %, both of mineral oil B, whose cp is
// printed to 10 J/(kg K), 0.3 % of it, which a cubic follows a little more than a line.
// Where cp is printed more finely both miss 0.04 %.
func TestInterpolation(t *testing.T) {
	var worstLine float64
	for _, l := range transferLiquids {
		var kept []table.Point
		for k := 0; k < len(l.rows); k += 2 {
			r := l.rows[k]
			kept = append(kept, table.Point{T: r[0], Cp: r[1], Density: r[2]})
		}
		f := fluidtest.Must(table.New(l.name, l.source, kept, table.Options{}))(t)
		var line, cubic float64
		for k := 1; k+1 < len(l.rows); k += 2 {
			a, r, b := l.rows[k-1], l.rows[k], l.rows[k+1]
			straight := a[1] + (b[1]-a[1])*(r[0]-a[0])/(b[0]-a[0])
			s, err := f.At(r[0], atm)
			if err != nil {
				t.Fatal(err)
			}
			line, cubic = max(line, math.Abs(straight/r[1]-1)), max(cubic, math.Abs(s.Cp/r[1]-1))
		}
		t.Logf("%s: straight lines miss %.3f %% of cp, cubics %.3f %%", l.name, 100*line, 100*cubic)
		worstLine = max(worstLine, line)
		limit := 0.00045
		if l.gravity > 0 { // mineral oils
			limit = 0.0037
		}
		if !(cubic <= limit) {
			t.Errorf("%s: cubics miss %.3g of cp, lines %.3g, want %g", l.name, cubic, line, limit)
		}
	}
	if !(worstLine <= 0.00295) {
		t.Errorf("straight lines miss %.3g of cp, want 0.0029", worstLine)
	}
}

// Duties as worked outside of this project with straight lines between the rows, 0.2 %.
func TestTransferHeat(t *testing.T) {
	for _, tt := range []struct {
		liquid             string
		mass, T1, T2, heat float64
	}{
		{"diphenyl oxide/biphenyl eutectic", 10, 663.15, 563.15, -2428830},
		{"mineral oil A", 11.72, 523.15, 473.15, -1541180},
		{"modified terphenyl", 25, 593.15, 553.15, -2569375},
	} {
		q, err := thermo.StreamHeat(fluidtest.Must(HeatTransfer(tt.liquid))(t), tt.mass, tt.T1, 1e6, tt.T2, 1e6)
		t.Logf("%s: %.7g W, by straight lines %.7g", tt.liquid, q, tt.heat)
		if err != nil || !(math.Abs(q/tt.heat-1) <= 2e-4) {
			t.Errorf("%s: %.9g W, %v; want %g", tt.liquid, q, err, tt.heat)
		}
	}
}

// The two mineral oils against Cragoe's correlation, which knows their density alone.
func TestMineralOilsAgainstCragoe(t *testing.T) {
	for name, limit := range map[string]float64{"mineral oil A": 0.012, "mineral oil B": 0.135} {
		f := fluidtest.Must(HeatTransfer(name))(t)
		b := f.Bounds()
		c := f.(*mineral).other
		var worst float64
		for T := b.MinT; T <= b.MaxT; T += 5 {
			s, err := f.At(T, 1e6)
			if err != nil {
				t.Fatal(err)
			}
			d := math.Abs(c.at(T)/s.Cp - 1)
			worst = max(worst, d)
			if u, _ := f.Uncertainty(T, atm); !(math.Abs(u*math.Sqrt(3)-max(d, mineralCp)) <= 1e-12) {
				t.Errorf("%s at %g K: half-width %g, deviation %g", name, T, u*math.Sqrt(3), d)
			}
		}
		t.Logf("%s: Cragoe within %.2f %%", name, 100*worst)
		if !(worst <= limit) {
			t.Errorf("%s: Cragoe deviates by %.3g, want %g", name, worst, limit)
		}
		// The gravity is that of the table at 60 °F.
		s, err := f.At(sixtyF, 1e6)
		want := s.Density / waterAt60F
		for _, l := range transferLiquids {
			if l.name == name && (err != nil || !(math.Abs(l.gravity-want) <= 6e-4)) {
				t.Errorf("%s: specific gravity %g, by its table %.4f, %v", name, l.gravity, want, err)
			}
		}
	}
}

func TestTransferNames(t *testing.T) {
	for written, want := range map[string]string{
		"Mineral Oil A": "mineral oil A", "mineral-oil-a": "mineral oil A", "MineralOilB": "mineral oil B", "terphenyl": "modified terphenyl",
		"diphenyl-oxide-biphenyl-eutectic": "diphenyl oxide/biphenyl eutectic", "Diphenyl Oxide / Biphenyl": "diphenyl oxide/biphenyl eutectic",
	} {
		if f, err := HeatTransfer(written); err != nil || f.Name() != want {
			t.Errorf("HeatTransfer(%q) = %v, %v; want %q", written, f, err, want)
		}
	}
	_, err := HeatTransfer("mineral oil C")
	if want := `unknown heat-transfer liquid "mineral oil C", did you mean "mineral oil A" or "mineral oil B"; known: diphenyl oxide/biphenyl eutectic, `; err == nil || !strings.HasPrefix(err.Error(), want) {
		t.Errorf("%v; want %s...", err, want)
	}
	for other, name := range alsoTransfer {
		if f, err := HeatTransfer(other); err != nil || f.Name() != name {
			t.Errorf("%q leads to %v, %v; want %q", other, f, err, name)
		}
	}
	f := fluidtest.Must(HeatTransfer("diphenyl oxide/biphenyl eutectic"))(t)
	if lo, hi := f.Span(atm); lo != 285.15 || !(math.Abs(hi-530.15) <= 1) {
		t.Errorf("the eutectic spans %g to %g K at 1 atm, want 285.15 to 530", lo, hi)
	}
	_, err = f.At(600, 2e5)
	if e := new(thermo.RangeError); !errors.As(err, &e) || e.Why != "boiling point at this pressure" {
		t.Errorf("600 K at 2 bar: %v", err)
	}
}

// Half-widths as fractions; nothing printed tells them from Cragoe for oil A at 100 °C.
func TestTransferUncertainty(t *testing.T) {
	for name, want := range map[string][2]float64{
		"diphenyl oxide/biphenyl eutectic": {0.03, 0.015}, "modified terphenyl": {0.03, 0.01}, "mineral oil A": {0.05, 0.01}, "mineral oil B": {0.05, 0.01},
	} {
		f := fluidtest.Must(HeatTransfer(name))(t)
		cp, density := f.Uncertainty(350, atm)
		if r := math.Sqrt(3); !(math.Abs(cp*r-want[0]) <= 1e-12) || !(math.Abs(density*r-want[1]) <= 1e-12) {
			t.Errorf("%s: half-widths %g, %g; want %g", name, cp*r, density*r, want)
		}
		if more, _ := f.Uncertainty(350, 2e6); !(more > cp) {
			t.Errorf("%s: %g at 2 MPa, %g at 1 atm", name, more, cp)
		}
	}
}

// What a pressure term from the middle of the range misses at its ends, in kJ/kg per MPa:
// 1.0 for the eutectic, whose term is 0.49 in the middle and by its own table -0.49 at the hot
// end; less for the others.
func TestSpreadOfPressureTerm(t *testing.T) {
	for name, limit := range map[string]float64{"diphenyl oxide/biphenyl eutectic": 1.05, "modified terphenyl": 0.55, "mineral oil A": 0.9, "mineral oil B": 0.25} {
		f := fluidtest.Must(HeatTransfer(name))(t)
		spread := f.(thermo.Compressed).PressureLaw().Spread * 1e3
		t.Logf("%s: %.2f kJ/kg per MPa", name, spread)
		if !(spread < limit && spread > 0.7*limit) {
			t.Errorf("%s: %.3g kJ/kg per MPa, want at most %g", name, spread, limit)
		}
	}
}
