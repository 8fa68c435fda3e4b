package loads

import "testing"

// A gap ends when a figure is there again, which takes a hold or a rate a while longer than
// the data: that time is a part of the gap, and a straight line fills it all.
func TestBridgeOverWhatMustBeFoundAgain(t *testing.T) {
	cfg := piped(0.06) // half a minute
	cfg.Bridge = 5 * minute
	e := engine(t, cfg)
	for s := 0.0; s <= 400; s++ {
		if s <= 100 || s > 250 {
			e.Advance(Beat{at(s, 2e-3, 350, 330), through(s)}, nil)
		}
	}
	l := e.Snapshot().Loads[0]
	checkFigure(t, e, NoFault, "")
	// readings hold until 160 s, are back at 251 s and fill the hold by 281 s
	if l.Bridged != 121*second || l.Missing != 30*second {
		t.Errorf("bridged %d s, missing %d s; want 121, and 30 of the start", l.Bridged/second, l.Missing/second)
	}
	near(t, "bridged heat", l.BridgedGiven, 160e3*121, 1e-3)
}
