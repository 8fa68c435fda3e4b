package water

import (
	"fmt"
	"math"
	"os"
	"strconv"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

// printed is how far a value worked from the printed coefficients may lie from a
// printed value of nine digits; 3.2e-9 was found over all the tables.
const printed = 3.2e-9

func same(got, want float64) bool { return math.Abs(got/want-1) <= printed }

// row is one line of testdata/if97.csv; a figure that is not printed is NaN.
type row struct {
	table, region                    string
	T, p, density, v, h, u, s, cp, w float64 // K, MPa, kg/m³, m³/kg, kJ/kg, kJ/(kg K), m/s
}

func release(t *testing.T) (rows []row) {
	t.Helper()
	for _, r := range fluidtest.Rows(t, os.DirFS("testdata"), "if97.csv") {
		rows = append(rows, row{
			table: r.Text("table"), region: r.Text("region"), T: r.Printed("T_K"), p: r.Printed("p_MPa"), density: r.Printed("rho_kg_per_m3"), v: r.Printed("v_m3_per_kg"),
			h: r.Printed("h_kJ_per_kg"), u: r.Printed("u_kJ_per_kg"), s: r.Printed("s_kJ_per_kgK"), cp: r.Printed("cp_kJ_per_kgK"), w: r.Printed("w_m_per_s"),
		})
	}
	return rows
}

// Every value that IAPWS R7-97(2012) prints for checking programs. Entropy and
// speed of sound, which a fluid does not give, come from the printed form; they
// tie its derivatives to the release, and TestFastEqualsPrinted ties ours to it.
func TestReleaseTables(t *testing.T) {
	seen := map[string]int{}
	var worst float64
	for _, r := range release(t) {
		seen[r.table]++
		got, want := worked(t, r)
		for _, c := range []struct {
			name      string
			got, want float64
		}{
			{"T", got.T, want.T}, {"p", got.p, want.p}, {"v", got.v, want.v}, {"h", got.h, want.h},
			{"u", got.u, want.u}, {"s", got.s, want.s}, {"cp", got.cp, want.cp}, {"w", got.w, want.w},
		} {
			if math.IsNaN(c.want) {
				continue
			}
			worst = max(worst, math.Abs(c.got/c.want-1))
			if !same(c.got, c.want) {
				t.Errorf("table %s, %+v: %s = %.9g, want %.9g", r.table, r, c.name, c.got, c.want)
			}
		}
	}
	t.Logf("largest deviation from a printed value: %.1e", worst)
	for table, n := range map[string]int{"5": 3, "15": 3, "33": 3, "42": 3, "35": 3, "36": 3, "B23": 1} {
		if seen[table] != n {
			t.Errorf("table %s: %d rows, want %d", table, seen[table], n)
		}
	}
}

// Every state of the release lies in the region whose table it is in; those of tables 35
// and 36 on the line of saturation, and that of B23 between the two it parts, next to the
// corner where the three meet.
func TestReleaseRegions(t *testing.T) {
	for _, r := range release(t) {
		p := r.p * 1e6
		got := strconv.Itoa(region(r.T, p))
		switch r.table {
		case "35", "36":
			got = strconv.Itoa(region(r.T, saturationPressure(r.T)))
		case "B23":
			T := math.Nextafter(r.T, math.Inf(1))
			got = fmt.Sprintf("%d/%d", region(T, p*(1-printed)), region(T, p*(1+printed)))
		}
		if got != r.region {
			t.Errorf("table %s, %g K, %g Pa: region %s, want %s", r.table, r.T, p, got, r.region)
		}
	}
}

// worked returns what we make of a row, and the row without the figures that it was made from.
func worked(t *testing.T, r row) (got, want row) {
	t.Helper()
	want = r
	switch r.table {
	case "35":
		got.p, want.T = inMPa(t, r.T), math.NaN()
	case "36":
		T, err := SaturationTemperature(r.p * 1e6)
		if err != nil {
			t.Fatal(err)
		}
		got.T, want.p = T, math.NaN()
	case "B23":
		got.p, got.T = boundary23Pressure(r.T)/1e6, boundary23Temperature(r.p*1e6)
	case "33":
		got = row33(t, r)
		want.T, want.density = math.NaN(), math.NaN()
	default:
		got = rowGibbs(t, r)
		want.T, want.p = math.NaN(), math.NaN()
	}
	return got, want
}

func inMPa(t *testing.T, T float64) float64 {
	t.Helper()
	p, err := SaturationPressure(T)
	if err != nil {
		t.Fatal(err)
	}
	return p / 1e6
}

func rowGibbs(t *testing.T, r row) row {
	t.Helper()
	p := r.p * 1e6
	var f thermo.Fluid = Steam()
	var g gibbs
	switch r.table {
	case "5":
		f, g = Liquid(), naive1{r.T, p}.gibbs()
	case "15":
		g = naive2(r.T, p).gibbs()
	case "42":
		g = naive5(r.T, p).gibbs()
	}
	s, err := f.At(r.T, p)
	if err != nil {
		t.Fatalf("table %s: %v", r.table, err)
	}
	return row{v: 1 / s.Density, h: s.Enthalpy / 1e3, u: s.InternalEnergy / 1e3, cp: s.Cp / 1e3, s: g.entropy() / 1e3, w: g.speedOfSound(r.T)}
}

// row33 starts from the density, as the release does, and returns from the
// pressure: that the density comes back is part of the check.
func row33(t *testing.T, r row) row {
	t.Helper()
	h := naive3{r.T, r.density}.helmholtz()
	p := h.pressure(r.T, r.density)
	s, err := Steam().At(r.T, p)
	if err != nil {
		t.Fatalf("table 33: %v", err)
	}
	if !(math.Abs(s.Density/r.density-1) <= 1e-12) {
		t.Errorf("table 33, %g K: density %.15g, want %g kg/m³", r.T, s.Density, r.density)
	}
	return row{p: p / 1e6, h: s.Enthalpy / 1e3, u: s.InternalEnergy / 1e3, cp: s.Cp / 1e3, s: h.entropy() / 1e3, w: h.speedOfSound(r.T)}
}

// spread returns n states of each fluid, evenly over temperature and over the
// logarithm of pressure, all within its range.
func spread(f thermo.Fluid, n int, visit func(T, p float64, s thermo.Properties)) {
	b := f.Bounds()
	lowest := max(b.MinP, 1)
	for i := range n {
		T := b.MinT + (b.MaxT-b.MinT)*float64(i)/float64(n-1)
		for k := range n {
			p := lowest * math.Pow(b.MaxP/lowest, float64(k)/float64(n-1))
			if s, err := f.At(T, p); err == nil {
				visit(T, p, s)
			}
		}
	}
}

// deviations are the largest relative ones of two states: of h, u, cp and
// density, and of cv. h and u pass through zero and count as 1 kJ/kg at least.
func deviations(got, want thermo.Properties) (main, cv float64) {
	scale := max(math.Abs(want.Enthalpy), 1e3)
	main = max(math.Abs(got.Enthalpy-want.Enthalpy)/scale, math.Abs(got.InternalEnergy-want.InternalEnergy)/scale,
		math.Abs(got.Cp/want.Cp-1), math.Abs(got.Density/want.Density-1))
	return main, math.Abs(got.Cv/want.Cv - 1)
}

// The fast form against the printed one, worked in exact arithmetic, in every
// region. cv has a wider tolerance: of what makes it, the terms of region 1 cancel
// to a part in 10⁵ near 620 K, where the printed form in float64 is off by 9e-12.
func TestFastEqualsPrinted(t *testing.T) {
	type found struct {
		main, cv float64
		states   int
	}
	seen := map[int]found{}
	for _, f := range []thermo.Fluid{Liquid(), Steam()} {
		balance := thermo.BalanceOf(f)
		spread(f, 80, func(T, p float64, s thermo.Properties) {
			r := region(T, p)
			if r == 4 {
				r = beside(T, f.Phase())
			}
			d, cv := deviations(s, exactState(r, T, p, s.Density))
			was := seen[r]
			seen[r] = found{max(was.main, d), max(was.cv, cv), was.states + 1}
			if !(d <= 1e-12 && cv <= 5e-12) {
				t.Errorf("region %d, %g K, %g Pa: %+v is off by %.1e, in cv by %.1e", r, T, p, s, d, cv)
			}
			b, err := balance(T, p)
			if want := (thermo.Balance{Enthalpy: s.Enthalpy, Cp: s.Cp, Density: s.Density}); err != nil || b != want {
				t.Errorf("region %d, %g K, %g Pa: balance %+v, %v; want that of At, %+v", r, T, p, b, err, want)
			}
		})
	}
	for _, r := range []int{1, 2, 3, 5} {
		t.Logf("region %d: largest deviation %.1e, of cv %.1e, at %d states", r, seen[r].main, seen[r].cv, seen[r].states)
		if seen[r].states < 100 {
			t.Errorf("region %d: %d states, want 100", r, seen[r].states)
		}
	}
}

// exactState returns the properties by the printed equation. In region 3 its
// density is one step of Newton's from the one given.
func exactState(r int, T, p, density float64) thermo.Properties {
	switch r {
	case 1:
		return exact1(T, p).properties(T, p)
	case 2:
		return exact2(T, p).properties(T, p)
	case 5:
		return exact5(T, p).properties(T, p)
	}
	h := exact3(T, density)
	density *= 1 - (h.pressure(T, density)/p-1)*h.d/(2*h.d+h.dd)
	return exact3(T, density).properties(T, density)
}
