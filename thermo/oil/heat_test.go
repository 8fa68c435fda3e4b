package oil

import (
	"math"
	"testing"
)

// Every figure of the table within 3e-6, to which the gravities and Watson factors of the
// table are printed.
func TestCorrelations(t *testing.T) {
	const tolerance = 3e-6
	all := rows(t, "petroleum-cp.csv")
	if len(all) != 20 {
		t.Errorf("%d rows, want 20", len(all))
	}
	var worst, spread float64
	for _, r := range all {
		sg, kw, T := r.Number("SG"), r.Number("Kw"), r.Number("T_K")
		if api := 141.5/sg - 131.5; !(math.Abs(api-r.Number("API")) <= 6e-5) {
			t.Errorf("SG %g is %g API, want %s", sg, api, r.Text("API"))
		}
		lo, hi := math.Inf(1), 0.0
		for column, c := range map[string]quadratic{
			"cragoe_J_per_kgK": cragoe(sg), "fallon_watson_J_per_kgK": fallonWatson(sg, kw),
			"kesler_lee_J_per_kgK": keslerLee(sg, kw), "api_7D22_J_per_kgK": api7D22(sg, kw),
		} {
			want := r.Number(column)
			lo, hi = min(lo, want), max(hi, want)
			d := math.Abs(c.at(T)/want - 1)
			worst = max(worst, d)
			if !(d <= tolerance) {
				t.Errorf("%s at SG %g, K %g, %g K: %.8g, want %.8g", column, sg, kw, T, c.at(T), want)
			}
		}
		spread = max(spread, hi/lo-1)
	}
	t.Logf("worst deviation %.2g; the four differ by up to %.2f %%", worst, 100*spread)
	if !(math.Abs(spread-0.064) <= 0.0005) {
		t.Errorf("spread %.3g, want the 6.4 %% that the package comment tells", spread)
	}
}

// A literature value of Cragoe's correlation: 24 API, 80 °F, 0.444480624 Btu/(lb °F), in
// which the gravity is 0.90997.
func TestCragoe(t *testing.T) {
	c := cragoe(141.5 / (24 + 131.5))
	got := c.at((80+459.67)/1.8) / 4186.8
	if !(math.Abs(got/0.444480624-1) <= 1e-9) {
		t.Errorf("%.10g Btu/(lb °F), want 0.444480624", got)
	}
}

// n-Hexane (SG 0.6640, boils at 341.9 K) has its critical point at 507.6 K, n-decane (SG
// 0.7342, 447.3 K) at 617.7 K, by the handbooks (from memory).
func TestCriticalTemperature(t *testing.T) {
	for _, tt := range []struct{ sg, tb, tc float64 }{{0.6640, 341.9, 507.6}, {0.7342, 447.3, 617.7}} {
		got := criticalTemperature(tt.sg, math.Cbrt(1.8*tt.tb)/tt.sg)
		if !(math.Abs(got/tt.tc-1) <= 0.005) {
			t.Errorf("SG %g, boils at %g K: critical at %g K, want %g", tt.sg, tt.tb, got, tt.tc)
		}
	}
}

// The integral has cp for its derivative.
func TestIntegral(t *testing.T) {
	c := api7D22(0.85, 11.8)
	for T := 260.0; T < 420; T += 20 {
		if got := (c.integral(T+1) - c.integral(T-1)) / 2; !(math.Abs(got/c.at(T)-1) <= 1e-5) {
			t.Errorf("%g K: %g, want %g", T, got, c.at(T))
		}
	}
}
