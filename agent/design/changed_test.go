package design

import (
	"testing"
	"time"
)

// An exchanger goes on where a load is added before its sides, and begins afresh, with the
// loads that it tells, where its other side or its conductance is another.
func TestExchangerOfAChangedSite(t *testing.T) {
	site := func(uncertainty float64, hot int, names ...string) *Plant {
		cfg := Config{Exchangers: []Exchanger{{Name: "plates", Hot: hot, Cold: hot + 1, Model: clean, Uncertainty: uncertainty, Lasting: 10 * time.Minute}}}
		for _, n := range names {
			cfg.Loads = append(cfg.Loads, Target{Name: n, Lasting: time.Minute, ByExchanger: n == "hot"})
		}
		return NewPlant(cfg)
	}
	of := func(p *Plant, load int) [2]uint64 { return [2]uint64{p.judges[load].Of, p.exchanges[0].Of} }
	was := of(site(0.02, 0, "hot", "cold"), 0)
	if is := of(site(0.02, 1, "new", "hot", "cold"), 1); is != was {
		t.Error("a load before the two begins the exchanger afresh")
	}
	if is := of(site(0.02, 0, "hot", "other"), 0); is[0] == was[0] || is[1] == was[1] {
		t.Error("with another cold side the exchanger goes on")
	}
	if is := of(site(0.03, 0, "hot", "cold"), 0); is[0] == was[0] || is[1] == was[1] {
		t.Error("with another conductance what is expected goes on")
	}
}

// A load whose exchanger there is not is judged, as of which nothing is known.
func TestByAnExchangerThatThereIsNot(t *testing.T) {
	p := NewPlant(Config{Loads: []Target{{Name: "hot", Lasting: time.Minute, ByExchanger: true}}})
	p.Observe(0, Minute{Whole: true, Duty: 1}, 0)
	if g := p.Grounds(0); g.Ground != NotExpected {
		t.Errorf("ground %d, want %d", g.Ground, NotExpected)
	}
}
