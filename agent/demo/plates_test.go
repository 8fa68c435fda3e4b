package demo

import (
	"math"
	"testing"
	"time"
)

// The off-design table of counterflow of water at cp = 4180 J/(kg K): UA = 12 kW/K at 2 and
// 3 kg/s, of films of 1/30 and 1/40 K/kW and the wall, both films to the power of 0.8. Worked
// apart from this code from the formulas of Kays and London, five digits.
func TestPlatesOffDesign(t *testing.T) {
	enthalpy := func(T float64) (float64, error) { return 4180 * T, nil }
	p := plates{conductance: 12e3, films: [2]float64{12. / 30, 12. / 40}, exponent: 0.8, flows: [2]float64{2, 3}}
	for _, tt := range []struct{ hot, cold, hotIn, coldIn, settled, clean, heat float64 }{
		{2, 3, 90, 40, 0, 12, 270.86},
		{1, 3, 90, 40, 0, 9.2561, 174.54},
		{2, 1.5, 90, 40, 0, 9.8173, 206.01},
		{1, 1.5, 80, 40, 0, 7.9011, 121.18},
		{2, 3, 90, 40, 0.02, 12, 244.75},
	} {
		in := [2]incoming{{tt.hot, tt.hotIn, enthalpy}, {tt.cold, tt.coldIn, enthalpy}}
		heat, outlets, err := p.passed(in, tt.settled/1e3)
		if err != nil {
			t.Fatal(err)
		}
		if !(math.Abs(heat/1e3-tt.heat) <= 0.006) {
			t.Errorf("%g and %g kg/s, %g K/kW: %.3f kW, want %.2f", tt.hot, tt.cold, tt.settled, heat/1e3, tt.heat)
		}
		if clean := p.clean([2]float64{tt.hot, tt.cold}); !(math.Abs(clean/1e3-tt.clean) <= 6e-5) {
			t.Errorf("%g and %g kg/s: UA of %.5f kW/K, want %.4f", tt.hot, tt.cold, clean/1e3, tt.clean)
		}
		if given, taken := tt.hot*4180*(tt.hotIn-outlets[0]), tt.cold*4180*(outlets[1]-tt.coldIn); !(math.Abs(given-heat) <= 1e-3) || !(math.Abs(taken-heat) <= 1e-3) {
			t.Errorf("the outlets make %g and %g W of %g", given, taken, heat)
		}
	}
}

// At the design point a clean exchanger has the design duties and outlets; what the hot side
// gives is what the milk takes and the loss at any hour; and the film that is told costs the
// allowance.
func TestTheExchangerKeepsItsDesign(t *testing.T) {
	s := creamery(t)
	p := newPlant(t, s, 7)
	x := p.exchange
	hot, milk := s.Loads[x.sides[hotSide]].Design, s.Loads[x.sides[coldSide]].Design
	hot.Duty, milk.Duty = s.Exchangers[0].Duty, s.Exchangers[0].Duty-s.Exchangers[0].Loss
	heat, outlets, err := x.passed(x.streams(&p.circuits[x.sides[hotSide]], &p.circuits[x.sides[coldSide]], x.flows), 0)
	if err != nil || math.Abs(heat/milk.Duty-1) > 1e-9 || math.Abs(outlets[0]-hot.Outlet) > 1e-6 || math.Abs(outlets[1]-milk.Outlet) > 1e-6 {
		t.Errorf("at the design flows %g W and outlets %v, %v, want %g W, %g and %g K", heat, outlets, err, milk.Duty, hot.Outlet, milk.Outlet)
	}
	if heat, _, err = x.passed(x.streams(&p.circuits[x.sides[hotSide]], &p.circuits[x.sides[coldSide]], x.flows), x.film); err != nil || math.Abs((heat+x.loss)/hot.Duty-(1-hot.Allow)) > 1e-9 {
		t.Errorf("with the film %g W and the loss, %v, want the allowance less than %g W", heat, err, hot.Duty)
	}
	for at := time.Duration(0); at < dayLength; at += 10 * time.Minute {
		if loss := dutyAt(t, p, hotLoad, at) - dutyAt(t, p, coldLoad, at); !(math.Abs(loss-(hot.Duty-milk.Duty)) <= 1) {
			t.Errorf("after %v the hot side gives %g W more than the milk takes, want %g", at, loss, hot.Duty-milk.Duty)
		}
	}
}
