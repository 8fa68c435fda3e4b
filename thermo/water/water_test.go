package water

import (
	"math"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

func TestConformance(t *testing.T) {
	t.Run("liquid", func(t *testing.T) { fluidtest.Run(t, Liquid()) })
	t.Run("steam", func(t *testing.T) { fluidtest.Run(t, Steam()) })
}

// same tells whether got agrees with a value printed to nine significant digits.
func same(got, want float64) bool { return math.Abs(got/want-1) <= 5e-9 }

// Values as printed in the computer-program verification tables of
// IAPWS R7-97(2012): table 5 for region 1, table 15 for region 2.
func TestVerificationTables(t *testing.T) {
	for _, tt := range []struct {
		table             string
		fluid             thermo.Fluid
		gibbs             func(T, p float64) gibbs
		T, p              float64 // K, MPa
		v, h, u, s, cp, w float64 // m³/kg, kJ/kg, kJ/(kg K), m/s
	}{
		{"5", Liquid(), region1, 300, 3, 0.00100215168, 115.331273, 112.324818, 0.392294792, 4.17301218, 1507.73921},
		{"5", Liquid(), region1, 300, 80, 0.000971180894, 184.142828, 106.448356, 0.368563852, 4.01008987, 1634.69054},
		{"5", Liquid(), region1, 500, 3, 0.00120241800, 975.542239, 971.934985, 2.58041912, 4.65580682, 1240.71337},
		{"15", Steam(), region2, 300, 0.0035, 39.4913866, 2549.91145, 2411.69160, 8.52238967, 1.91300162, 427.920172},
		{"15", Steam(), region2, 700, 0.0035, 92.3015898, 3335.68375, 3012.62819, 10.1749996, 2.08141274, 644.289068},
		{"15", Steam(), region2, 700, 30, 0.00542946619, 2631.49474, 2468.61076, 5.17540298, 10.3505092, 480.386523},
	} {
		p, err := tt.fluid.At(tt.T, tt.p*1e6)
		if err != nil {
			t.Errorf("table %s, %g K, %g MPa: %v", tt.table, tt.T, tt.p, err)
			continue
		}
		g := tt.gibbs(tt.T, tt.p*1e6)
		for _, c := range []struct {
			name      string
			got, want float64
		}{
			{"v", 1 / p.Density, tt.v},
			{"h", p.Enthalpy / 1e3, tt.h},
			{"u", p.InternalEnergy / 1e3, tt.u},
			{"s", gasConstant * (g.t - g.g) / 1e3, tt.s},
			{"cp", p.Cp / 1e3, tt.cp},
			{"w", speedOfSound(g, tt.T), tt.w},
		} {
			if !same(c.got, c.want) {
				t.Errorf("table %s, %g K, %g MPa: %s = %.9g, want %.9g", tt.table, tt.T, tt.p, c.name, c.got, c.want)
			}
		}
	}
}

// speedOfSound ties cv and every second derivative to the printed tables:
// w² = γπ² RT / ((γπ − τγπτ)²/(τ²γττ) − γππ), R7-97(2012), table 3.
func speedOfSound(g gibbs, T float64) float64 {
	d := g.p - g.pt
	return math.Sqrt(gasConstant * T * g.p * g.p / (d*d/g.tt - g.pp))
}

// cv has no column in the tables: it must satisfy w² = −(cp/cv) v² (∂p/∂v)T,
// with (∂v/∂p)T from the same equation by central difference.
func TestCvAgreesWithSpeedOfSound(t *testing.T) {
	for _, tt := range []struct {
		gibbs func(T, p float64) gibbs
		T, p  float64
	}{{region1, 300, 3e6}, {region1, 500, 50e6}, {region2, 700, 20e6}, {region2, 400, 1e5}} {
		at := func(p float64) thermo.Properties { return tt.gibbs(tt.T, p).properties(tt.T, p) }
		d := tt.p * 1e-4
		dvdp := (1/at(tt.p+d).Density - 1/at(tt.p-d).Density) / (2 * d)
		m := at(tt.p)
		got := math.Sqrt(-m.Cp / m.Cv / (m.Density * m.Density * dvdp))
		want := speedOfSound(tt.gibbs(tt.T, tt.p), tt.T)
		if math.Abs(got/want-1) > 1e-6 {
			t.Errorf("%g K, %g Pa: w by cp/cv = %.9g, by γ = %.9g m/s", tt.T, tt.p, got, want)
		}
	}
}

func TestSaturationTables(t *testing.T) {
	for _, tt := range []struct{ T, p float64 }{ // K, MPa; IAPWS R7-97(2012), table 35
		{300, 0.00353658941}, {500, 2.63889776}, {600, 12.3443146},
	} {
		got, err := SaturationPressure(tt.T)
		if err != nil || !same(got/1e6, tt.p) {
			t.Errorf("SaturationPressure(%g K) = %.9g Pa, %v; want %.9g MPa", tt.T, got, err, tt.p)
		}
	}
	for _, tt := range []struct{ p, T float64 }{ // MPa, K; table 36
		{0.1, 372.755919}, {1, 453.035632}, {10, 584.149488},
	} {
		got, err := SaturationTemperature(tt.p * 1e6)
		if err != nil || !same(got, tt.T) {
			t.Errorf("SaturationTemperature(%g MPa) = %.9g K, %v; want %.9g", tt.p, got, err, tt.T)
		}
	}
}

// The release's check of the auxiliary equation, with equations 5 and 6.
func TestBoundary23(t *testing.T) {
	if p := boundary23Pressure(623.15); !same(p/1e6, 16.5291643) {
		t.Errorf("pressure at 623.15 K = %.9g Pa, want 16.5291643 MPa", p)
	}
	if T := boundary23Temperature(16.5291643e6); !same(T, 623.15) {
		t.Errorf("temperature at 16.5291643 MPa = %.9g K, want 623.15", T)
	}
}

// The one-pass form against the printed form. Terms of opposite sign cancel in
// the sums, so the difference is measured against the larger of the value and
// 1 (γ and its derivatives are of that order).
func TestOnePassEqualsPrintedForm(t *testing.T) {
	var worst float64
	check := func(got, want gibbs, T, p float64) {
		t.Helper()
		g := [...]float64{got.g, got.p, got.t, got.pp, got.tt, got.pt}
		w := [...]float64{want.g, want.p, want.t, want.pp, want.tt, want.pt}
		for k := range g {
			d := math.Abs(g[k]-w[k]) / max(math.Abs(w[k]), 1)
			worst = max(worst, d)
			if d > 1e-12 {
				t.Errorf("%g K, %g Pa: derivative %d is %.17g, printed form %.17g", T, p, k, g[k], w[k])
			}
		}
	}
	for T := 273.15; T <= 623.15; T += 12.5 {
		for _, p := range []float64{17e6, 25e6, 50e6, 100e6, saturationPressure(T)} {
			check(region1(T, p), naive{T, p}.region1(), T, p)
		}
	}
	for T := 273.15; T <= 1073.15; T += 12.5 {
		limit, _ := steamLimit(T)
		for _, x := range []float64{1e-9, 1e-3, 0.1, 0.5, 1} {
			check(region2(T, x*limit), naive{T, x * limit}.region2(), T, x*limit)
		}
	}
	t.Logf("largest difference: %.1e", worst)
}
