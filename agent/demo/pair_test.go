package demo

import (
	"math"
	"testing"
	"time"

	"heatreeve/agent/design/exchanger"
)

// model is the plates as the judging code sees them, when they are clean.
func (p *plates) model() exchanger.Model {
	r := 1 / p.conductance
	return exchanger.Model{
		Arrangement: exchanger.Arrangement{Kind: exchanger.Counterflow},
		Hot:         exchanger.Film{Resistance: p.films[hotSide] * r, Flow: p.flows[hotSide], Exponent: p.exponent},
		Cold:        exchanger.Film{Resistance: p.films[coldSide] * r, Flow: p.flows[coldSide], Exponent: p.exponent},
		Wall:        (1 - p.films[hotSide] - p.films[coldSide]) * r,
	}
}

// The plates and the model that they are judged by were written apart; of true readings the
// model finds the conductance that the plates have, clean or fouled, at any hour of the day.
func TestPlatesAgreeWithTheModel(t *testing.T) {
	p := newPlant(t, creamery(t), 7)
	m := p.exchange.model()
	for at := time.Duration(0); at < dayLength; at += 30 * time.Minute {
		states, err := p.exchange.at(p.circuits, at)
		if err != nil {
			t.Fatal(err)
		}
		var streams [2]exchanger.Stream
		var flows [2]float64
		for side, i := range p.exchange.sides {
			c := &p.circuits[i]
			flows[side] = p.exchange.flows[side] * c.share(at)
			T1, T2 := states[side].parts[partInlet], states[side].parts[partOutlet]
			streams[side] = exchanger.Stream{Flow: flows[side], Inlet: T1, Outlet: T2, Cp: states[side].duty / flows[side] / math.Abs(T1-T2)}
		}
		o, err := m.Observe(&exchanger.State{Hot: streams[hotSide], Cold: streams[coldSide]}, 0.5, p.exchange.loss)
		if err != nil {
			t.Fatal(err)
		}
		clean := p.exchange.clean(flows)
		want := 1 / (1/clean + p.exchange.film*fouling(at))
		if !(math.Abs(o.Conductance/want-1) <= 1e-6) || !(math.Abs(o.Clean/clean-1) <= 1e-9) {
			t.Errorf("after %v: UA of %.4f and clean %.4f W/K, the plates have %.4f and %.4f", at, o.Conductance, o.Clean, want, clean)
		}
	}
}

// The site file's exchanger is the one that the plant has.
func TestTheSiteTellsThePlates(t *testing.T) {
	s := creamery(t)
	p := newPlant(t, s, 7)
	if len(s.Exchangers) != 1 {
		t.Fatalf("%d exchangers, want 1", len(s.Exchangers))
	}
	got, want := s.Exchangers[0], p.exchange.model()
	near := func(name string, a, b, within float64) {
		t.Helper()
		if !(math.Abs(a/b-1) <= within) {
			t.Errorf("%s: the site tells %g, the plates have %g", name, a, b)
		}
	}
	near("loss", got.Loss, p.exchange.loss, 1e-9)
	near("hot film", got.Model.Hot.Resistance, want.Hot.Resistance, 0.005)
	near("cold film", got.Model.Cold.Resistance, want.Cold.Resistance, 0.005)
	near("wall", got.Model.Wall, want.Wall, 0.005)
	near("hot flow", got.Model.Hot.Flow, want.Hot.Flow, 0.005)
	near("cold flow", got.Model.Cold.Flow, want.Cold.Flow, 0.005)
	near("hot exponent", got.Model.Hot.Exponent, want.Hot.Exponent, 1e-9)
	near("cold exponent", got.Model.Cold.Exponent, want.Cold.Exponent, 1e-9)
}
