package loads

import (
	"math"
	"testing"
)

// basisOf returns the basis of a load, which must be that of its figure to the last bit.
func basisOf(t *testing.T, e *Engine, load int) Basis {
	t.Helper()
	b := e.Basis(load)
	s := e.Snapshot().Loads[load].Figure
	if b.Figure != s {
		t.Errorf("the basis is of the figure\n%+v\nthe snapshot has\n%+v", b.Figure, s)
	}
	switch f := &b.Figure; {
	case !f.Measured() || f.Idle && b.Vessel == nil:
		if b.Stream != nil || b.Vessel != nil {
			t.Errorf("%v: a basis of the equation", f.Fault)
		}
	case b.Vessel != nil:
		if v := b.Vessel; v.Mass != f.Mass || v.Rate.Slope != f.Rate || !f.Idle && v.Duty != f.Duty {
			t.Errorf("vessel %+v of %+v", v, f)
		}
	default:
		x := b.Stream
		if x.MassFlow != f.MassFlow || math.Abs(x.Duty-f.Duty) > 1e-12*math.Abs(f.Duty) || x.State.Inlet != f.Inlet || x.State.Outlet != f.Outlet {
			t.Errorf("stream %+v of %+v", x, f)
		}
	}
	return b
}

// Whatever a plant does, what a figure is told to be worked from gives the figure; and what
// each input has in the uncertainty is its uncertainty times what a unit of it does.
func TestBasisIsThatOfTheFigure(t *testing.T) {
	seen := make(map[string]int)
	for _, onChange := range []bool{false, true} {
		cfg := kinds(onChange)
		if !onChange { // a counter sends no rate to the tank as well
			counted := cfg.Loads[0]
			counted.Name = "counted"
			counted.Stream.Flow, counted.Stream.FlowKind = FromTag(len(cfg.Tags)), VolumeFlow
			cfg.Tags = append(cfg.Tags, Tag{Name: "FQ", MaxAge: minute, Counter: new(Counter), Resolution: 0.01, Accuracy: Accuracy{Rel: 0.01}})
			cfg.Loads = append(cfg.Loads, counted)
		}
		cfg.Tags[inlet].Accuracy, cfg.Tags[outlet].Accuracy = Accuracy{Abs: 0.2}, Accuracy{Abs: 0.1, Rel: 0.002, Zero: 273.15}
		for i := range cfg.Loads {
			cfg.Loads[i].Stream.Pair = 0.5
		}
		e := engine(t, cfg)
		for s := 0.0; s < 900; s++ {
			var readings []Reading
			if s < 500 || s > 620 {
				swing := 5 * math.Sin(s/40)
				readings = at(s, 2.5+0.001*math.Sin(s), 350+swing, 330-swing/2+0.05*math.Sin(3*s))
				if s > 700 && s < 760 {
					readings[0].Value = 0
				}
				readings = append(readings, Reading{Tag: alive, At: through(s), Value: 1})
			}
			if !onChange && int(s)%20 == 0 {
				readings = append(readings, Reading{Tag: len(cfg.Tags) - 1, At: through(s), Value: 0.002 * math.Floor(s)})
			}
			e.Advance(Beat{readings, through(s)}, nil)
			for i := range cfg.Loads {
				b := basisOf(t, e, i)
				seen[cfg.Loads[i].Name+": "+basisKind(&b)]++
				sharesOf(t, &b)
			}
		}
	}
	for _, want := range []string{"boiler: duty", "boiler: idle", "boiler: stale", "corrected: duty", "corrected: fitting", "tank: duty", "tank: content changing", "counted: duty", "counted: no reading"} {
		if seen[want] == 0 {
			t.Errorf("never seen: %s, of %v", want, seen)
		}
	}
}

func basisKind(b *Basis) string {
	switch {
	case b.Figure.Idle:
		return "idle"
	case b.Figure.Measured():
		return "duty"
	}
	return b.Figure.Fault.String()
}

// sharesOf works the shares of a stream's inputs from the basis.
func sharesOf(t *testing.T, b *Basis) {
	t.Helper()
	if b.Stream == nil {
		return
	}
	for _, in := range b.Inputs {
		if in.Part >= PartCp {
			continue
		}
		variance := in.Accuracy*in.Accuracy + in.Coarse
		if in.Part == PartInlet || in.Part == PartOutlet {
			variance -= b.Stream.Pair * in.Accuracy * in.Accuracy
		}
		want := math.Abs(b.Figure.Share[in.Part])
		if got := math.Abs(in.By) * math.Sqrt(variance); !(math.Abs(got-want) <= 1e-9*b.Figure.Uncertainty) {
			t.Errorf("share of %s: %g W by the basis, %g W in the figure", in.Name, got, want)
		}
	}
}
