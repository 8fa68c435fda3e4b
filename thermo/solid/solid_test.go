package solid

import (
	"errors"
	"math"
	"os"
	"slices"
	"strings"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

const atm = 101325.0

func mustNew(t testing.TB, name string) thermo.Fluid {
	t.Helper()
	return fluidtest.Must(New(name))(t)
}

func TestConformance(t *testing.T) {
	for _, name := range Names() {
		t.Run(name, func(t *testing.T) {
			f := mustNew(t, name)
			if f.Name() != name || f.Phase() != thermo.Solid {
				t.Errorf("%q calls itself %q, a %v", name, f.Name(), f.Phase())
			}
			fluidtest.Run(t, f)
		})
	}
}

// row of testdata/solids.csv.
type row struct {
	solid          string
	T, cp, density float64
	h              float64 // J/kg above that at 298.15 K; NaN where none is given
}

func rows(t *testing.T) []row {
	t.Helper()
	var out []row
	for _, r := range fluidtest.Rows(t, os.DirFS("testdata"), "solids.csv") {
		out = append(out, row{r.Text("solid"), r.Number("T_K"), r.Number("cp_J_per_kgK"), r.Number("rho_kg_per_m3"), r.Printed("h_minus_h298_J_per_kg")})
	}
	return out
}

// The whole table: cp, density and enthalpy at every row, to the digits that are printed;
// the enthalpies of the Eurocode formulas within 4e-6 beside.
func TestTable(t *testing.T) {
	const printedCp, printedH, formula = 0.005, 0.05, 4e-6 // J/(kg K), J/kg, fraction
	all := rows(t)
	if len(all) != 75 {
		t.Errorf("%d rows, want 75", len(all))
	}
	worst := map[string]float64{}
	refused := 0
	for _, r := range all {
		f := mustNew(t, r.solid)
		got, err := f.At(r.T, atm)
		if r.solid == "quartz" && r.T > 847 {
			refused++
			if e := new(thermo.RangeError); !errors.As(err, &e) {
				t.Errorf("quartz at %g K: %+v, %v; want a refusal, it has turned to β", r.T, got, err)
			}
			continue
		}
		if err != nil || !(math.Abs(got.Cp-r.cp) <= printedCp+1e-9) || got.Density != r.density {
			t.Errorf("%s at %g K: %+v, %v; want cp %g, density %g", r.solid, r.T, got, err, r.cp, r.density)
			continue
		}
		if math.IsNaN(r.h) {
			continue
		}
		h := enthalpyAbove(t, f, r)
		d := math.Abs(h - r.h)
		worst[r.solid] = max(worst[r.solid], d/max(math.Abs(r.h), 1))
		if !(d <= printedH+formula*math.Abs(r.h)) {
			t.Errorf("%s at %g K: h = %.8g J/kg, want %.8g", r.solid, r.T, h, r.h)
		}
	}
	for name, d := range worst {
		t.Logf("%s: enthalpy within %.2g of the table", name, d)
	}
	if refused != 1 {
		t.Errorf("%d rows refused, want the one of quartz at 900 K", refused)
	}
}

// enthalpyAbove is that of the row over 298.15 K.
func enthalpyAbove(t *testing.T, f thermo.Fluid, r row) float64 {
	t.Helper()
	return fluidtest.Must(thermo.StreamHeat(f, 1, 298.15, atm, r.T, atm))(t)
}

// How good are cubics where a source has no enthalpies? Drawn through the cp of the JANAF
// rows alone they miss JANAF's own enthalpies by less than 0.08 % of the distance from
// 298.15 K, but for alumina below that (0.34 %, where rows lie 98 K apart); trapezoids by
// up to 0.9 %.
func TestCubicsAgainstEnthalpies(t *testing.T) {
	for k := range janaf {
		s := &janaf[k]
		d := s.make()
		d.options.Enthalpies = nil
		f, err := d.solid()
		if err != nil {
			t.Fatal(err)
		}
		var cubics, trapezoids, sum float64
		zero := slices.IndexFunc(s.rows, func(r [3]float64) bool { return r[0] == 298.15 })
		for i, r := range s.rows {
			if i > zero {
				last := s.rows[i-1]
				sum += (r[0] - last[0]) * (r[1] + last[1]) / 2
				trapezoids = max(trapezoids, math.Abs(sum/r[2]-1))
			}
			if i != zero {
				h := enthalpyAbove(t, f, row{solid: s.name, T: r[0]})
				cubics = max(cubics, math.Abs(h/r[2]-1))
			}
		}
		t.Logf("%s: cubics within %.2g of the enthalpy, trapezoids above 298.15 K within %.2g", s.name, cubics, trapezoids)
		if !(trapezoids <= 0.009 && trapezoids > 0) {
			t.Errorf("%s: trapezoids off by %.2g", s.name, trapezoids)
		}
		if limit := map[string]float64{"alumina": 0.0034}[s.name]; !(cubics <= max(limit, 0.0008)) {
			t.Errorf("%s: cubics off by %.2g", s.name, cubics)
		}
	}
}

// Heat as worked outside of this project: from the NIST-JANAF enthalpies, and from the
// integral of the formula of EN 1993-1-2 (2 t/h of billets, 20 °C to 600 °C).
func TestWorkedHeat(t *testing.T) {
	for _, tt := range []struct {
		solid              string
		mass, T1, T2, heat float64
	}{
		{"carbon steel", 0.55555556, 293.15, 873.15, 186521.01},
		{"aluminium", 1, 298.15, 500, 192205.5},
		{"copper", 0.25, 298.15, 400, 9988.825},
	} {
		q, err := thermo.StreamHeat(mustNew(t, tt.solid), tt.mass, tt.T1, atm, tt.T2, atm)
		if err != nil || !(math.Abs(q/tt.heat-1) <= 1e-6) {
			t.Errorf("%s: %.9g W, %v; want %.9g", tt.solid, q, err, tt.heat)
		}
	}
}

// A constant cp is less certain away from its temperature; what is organic more so.
func TestUncertainty(t *testing.T) {
	for _, tt := range []struct {
		solid       string
		T           float64
		cp, density float64 // half-widths as fractions
	}{
		{"copper", 600, 0.01, 0.05},
		{"carbon steel", 600, 0.05, 0.05},
		{"lead", 300, 0.05, 0.05},
		{"lead", 350, 0.05 + 50*0.0008, 0.05},
		{"lead", 250, 0.05 + 50*0.0008, 0.05},
		{"oak wood", 300, 0.1, 0.1},
		{"oak wood", 320, 0.1 + 20*0.004, 0.1},
	} {
		cp, density := mustNew(t, tt.solid).Uncertainty(tt.T, atm)
		if root := math.Sqrt(3); !(math.Abs(cp-tt.cp/root) <= 1e-12) || !(math.Abs(density-tt.density/root) <= 1e-12) {
			t.Errorf("%s at %g K: %g, %g; want half-widths %g, %g over √3", tt.solid, tt.T, cp, density, tt.cp, tt.density)
		}
	}
}

func TestNames(t *testing.T) {
	for written, want := range map[string]string{
		"Aluminum": "aluminium", "ALUMINIUM": "aluminium", "carbon-steel": "carbon steel", "Steel": "carbon steel",
		"concrete": "dry concrete", "glass-soda-lime": "soda-lime glass", "ice": "ice", "HDPE": "high-density polyethylene",
	} {
		if f, err := New(written); err != nil || f.Name() != want {
			t.Errorf("New(%q) = %v, %v; want %q", written, f, err, want)
		}
	}
	_, err := New("coper")
	if want := `unknown solid "coper", did you mean "copper"; known: aluminium, copper, iron, `; err == nil || !strings.HasPrefix(err.Error(), want) {
		t.Errorf("New(coper): %v; want %s...", err, want)
	}
	for other, name := range also {
		if !slices.Contains(Names(), name) {
			t.Errorf("%q leads to %q, which is no solid", other, name)
		}
	}
}

// Range, melting point and half-widths of every solid; melting points by ITS-90 (aluminium,
// copper) and handbooks (from memory).
func TestRanges(t *testing.T) {
	inf := math.Inf(1)
	for name, want := range map[string]struct{ minT, maxT, melting, cp, density float64 }{
		"aluminium":                 {200, 900, 933.473, 0.01, 0.05},
		"copper":                    {200, 900, 1357.77, 0.01, 0.05},
		"iron":                      {200, 900, 1811, 0.01, 0.05},
		"quartz":                    {200, 800, inf, 0.01, 0.05},
		"alumina":                   {200, 900, 2327, 0.01, 0.05},
		"carbon steel":              {293.15, 873.15, inf, 0.05, 0.05},
		"dry concrete":              {293.15, 873.15, inf, 0.05, 0.05},
		"stainless steel 304":       {250, 400, inf, 0.05, 0.05},
		"brass 70/30":               {250, 400, inf, 0.05, 0.05},
		"lead":                      {250, 400, 600.61, 0.05, 0.05},
		"soda-lime glass":           {273.15, 373.15, inf, 0.05, 0.05},
		"common brick":              {273.15, 373.15, inf, 0.05, 0.1},
		"dry sand":                  {273.15, 373.15, inf, 0.05, 0.1},
		"bituminous coal":           {273.15, 373.15, inf, 0.1, 0.1},
		"paper":                     {273.15, 373.15, inf, 0.1, 0.1},
		"oak wood":                  {273.15, 373.15, inf, 0.1, 0.1},
		"ice":                       {243.15, 273.15, 273.15, 0.05, 0.05},
		"high-density polyethylene": {273.15, 343.15, 403, 0.1, 0.1},
		"granite":                   {273.15, 373.15, inf, 0.05, 0.05},
	} {
		f := mustNew(t, name)
		maxP, at := 10e6, 300.0
		if name == "ice" {
			maxP, at = 2e5, 273.15
		}
		if b := f.Bounds(); b != (thermo.Bounds{MinT: want.minT, MaxT: want.maxT, MaxP: maxP}) {
			t.Errorf("%s: %+v, want %+v to %g Pa", name, b, want, maxP)
		}
		if lo, hi := f.Span(atm); lo != 0 || hi != want.melting {
			t.Errorf("%s: from %g to %g K, want 0 to %g", name, lo, hi, want.melting)
		}
		cp, density := f.Uncertainty(at, atm)
		if r := math.Sqrt(3); !(math.Abs(cp*r-want.cp) <= 1e-12) || !(math.Abs(density*r-want.density) <= 1e-12) {
			t.Errorf("%s: half-widths %g, %g; want %g, %g", name, cp*r, density*r, want.cp, want.density)
		}
	}
	if n := len(Names()); n != 19 {
		t.Errorf("%d solids, want the 19 above", n)
	}
}
