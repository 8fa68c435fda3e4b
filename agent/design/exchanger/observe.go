package exchanger

import "math"

// mostGain is how many per cent a conductance may be off for one of effectiveness and still
// be told: in counterflow with C = 0.5 that is an effectiveness of 0.9. Common practice, no
// source.
const mostGain = 5

// Observed is what the readings of a state say of the exchanger.
type Observed struct {
	Duty                 float64 // W, of both sides by their weights
	Effectiveness, Limit float64
	C, NTU               float64
	Conductance          float64 // UA, W/K
	Clean                float64 // UA of the clean exchanger at these flows, W/K
	Fouling              float64 // 1/UA − 1/UA_clean, K/W
	Approach             float64 // least difference of temperature at an end, K
	Pinch                float64 // least anywhere: in parallel flow that at the outlets, else Approach
	// Gain is by how many per cent the conductance is off for one of effectiveness; where it
	// is beyond 5 the exchanger is so near its limit that it tells next to nothing, and
	// IllConditioned.
	Gain           float64
	IllConditioned bool
}

// Ratio is ln(UA/UA_clean).
func (o *Observed) Ratio() float64 { return math.Log(o.Conductance / o.Clean) }

// Observe tells what a state says of an exchanger that loses loss, W, where the duty of the
// hot side has the given weight, 0 to 1, and that of the cold side the rest. The error is
// [ErrNoDrive] or a *[LimitError].
func (m *Model) Observe(s *State, weight, loss float64) (Observed, error) {
	if !s.driven() {
		return Observed{}, ErrNoDrive
	}
	least, ratio, hotIsMin := s.rates()
	o := Observed{C: ratio, Limit: m.Limit(ratio, hotIsMin), Clean: m.Clean(s)}
	o.Duty = weight*(s.Gives()-loss) + (1-weight)*s.Takes()
	o.Effectiveness = o.Duty / least / (s.Hot.Inlet - s.Cold.Inlet)
	ends := [2]float64{s.Hot.Inlet - s.Cold.Outlet, s.Hot.Outlet - s.Cold.Inlet}
	if m.Kind == Parallel {
		ends = [2]float64{s.Hot.Inlet - s.Cold.Inlet, s.Hot.Outlet - s.Cold.Outlet}
	}
	o.Approach = min(ends[0], ends[1])
	o.Pinch = o.Approach
	var err error
	if o.NTU, err = m.NTU(o.Effectiveness, ratio, hotIsMin); err != nil {
		return o, err
	}
	o.Conductance = o.NTU * least
	o.Fouling = 1/o.Conductance - 1/o.Clean
	const step = 1e-4
	slope := (m.Effectiveness(o.NTU*(1+step), ratio, hotIsMin) - m.Effectiveness(o.NTU*(1-step), ratio, hotIsMin)) / (2 * step)
	o.Gain = o.Effectiveness / slope
	o.IllConditioned = !(o.Gain <= mostGain)
	return o, nil
}

// Gives is the duty of the hot side, W.
func (s *State) Gives() float64 { return s.Hot.Capacity() * (s.Hot.Inlet - s.Hot.Outlet) }

// Takes is that of the cold side.
func (s *State) Takes() float64 { return s.Cold.Capacity() * (s.Cold.Outlet - s.Cold.Inlet) }

// Reading is one of what a state is made of.
type Reading uint8

// The readings; a specific heat counts as a fraction of itself.
const (
	HotFlow Reading = iota
	HotInlet
	HotOutlet
	ColdFlow
	ColdInlet
	ColdOutlet
	HotCp
	ColdCp
	Readings
)

// at points to a reading of a state and to its standard uncertainty.
func (s *State) at(r Reading) (value *float64, u float64) {
	switch r {
	case HotFlow:
		return &s.Hot.Flow, s.Hot.FlowError
	case HotInlet:
		return &s.Hot.Inlet, s.Hot.InletError
	case HotOutlet:
		return &s.Hot.Outlet, s.Hot.OutletError
	case ColdFlow:
		return &s.Cold.Flow, s.Cold.FlowError
	case ColdInlet:
		return &s.Cold.Inlet, s.Cold.InletError
	case ColdOutlet:
		return &s.Cold.Outlet, s.Cold.OutletError
	case HotCp:
		return &s.Hot.Cp, s.Hot.CpError * s.Hot.Cp
	}
	return &s.Cold.Cp, s.Cold.CpError * s.Cold.Cp
}

// Statistics are what a state is judged by. All but the two duties are near 0 in a clean
// exchanger with true readings.
type Statistics struct {
	Closure      float64 // gives − takes − loss, W
	Ratio        float64 // ln(UA/UA_clean); NaN where it cannot be told
	HotBeyond    float64 // gives − what the clean exchanger would, W
	ColdBeyond   float64 // takes − what the clean exchanger would, W
	Gives, Takes float64
}

func (a Statistics) less(b Statistics, by float64) Statistics {
	return Statistics{
		(a.Closure - b.Closure) / by, (a.Ratio - b.Ratio) / by, (a.HotBeyond - b.HotBeyond) / by,
		(a.ColdBeyond - b.ColdBeyond) / by, (a.Gives - b.Gives) / by, (a.Takes - b.Takes) / by,
	}
}

// Tell returns the statistics of a state.
func (m *Model) Tell(s *State, weight, loss float64) Statistics {
	t := Statistics{Gives: s.Gives(), Takes: s.Takes(), Ratio: math.NaN(), HotBeyond: math.NaN(), ColdBeyond: math.NaN()}
	t.Closure = t.Gives - t.Takes - loss
	if clean, err := m.Duty(s); err == nil {
		t.HotBeyond, t.ColdBeyond = t.Gives-clean-loss, t.Takes-clean
	}
	if o, err := m.Observe(s, weight, loss); err == nil {
		t.Ratio = o.Ratio()
	}
	return t
}

// Slopes are by how much the statistics change for a unit of each reading: the sensitivities
// that an error of a reading works by, since a reading serves what is measured and what is
// expected alike. They are central differences over a tenth of the reading's uncertainty, or
// of a thousandth of a flow, of cp, or of 10 mK where it has none.
func (m *Model) Slopes(s *State, weight, loss float64) (slopes [Readings]Statistics) {
	return s.slopes(func(x *State) Statistics { return m.Tell(x, weight, loss) })
}

// BeyondErrors are the standard uncertainties by the readings of what each side's duty is
// beyond that of the clean exchanger, W: those of [Model.Slopes] and [State.Errors], without
// the conductance, at a third of the time.
func (m *Model) BeyondErrors(s *State) (hot, cold float64) {
	at := m.Clean(s)
	follows := m.Hot.PerKelvin != 0 || m.Cold.PerKelvin != 0
	slopes := s.slopes(func(x *State) (t Statistics) {
		conductance := at
		if follows || x.Hot.Flow != s.Hot.Flow || x.Cold.Flow != s.Cold.Flow {
			conductance = m.Clean(x)
		}
		clean, err := m.passed(x, conductance)
		if err != nil {
			clean = math.NaN()
		}
		t.HotBeyond, t.ColdBeyond = x.Gives()-clean, x.Takes()-clean
		return t
	})
	errors := s.Errors(&slopes)
	return errors.HotBeyond, errors.ColdBeyond
}

func (s *State) slopes(tell func(*State) Statistics) (slopes [Readings]Statistics) {
	for r := range Readings {
		x := *s
		value, u := x.at(r)
		was, step := *value, u/10
		if !(step > 0) {
			step = 0.01
			if r == HotFlow || r == ColdFlow || r == HotCp || r == ColdCp {
				step = 1e-3 * was
			}
		}
		if !(step > 0) { // a reading of 0 without an uncertainty, which tells nothing
			continue
		}
		*value = was + step
		above := tell(&x)
		*value = was - step
		slopes[r] = above.less(tell(&x), 2*step)
	}
	return slopes
}

// Errors are the standard uncertainties of the statistics by the readings.
func (s *State) Errors(slopes *[Readings]Statistics) Statistics {
	var sum Statistics
	for r := range Readings {
		_, u := s.at(r)
		square := func(to *float64, by float64) { *to += by * by * u * u }
		d := &slopes[r]
		square(&sum.Closure, d.Closure)
		square(&sum.Ratio, d.Ratio)
		square(&sum.HotBeyond, d.HotBeyond)
		square(&sum.ColdBeyond, d.ColdBeyond)
		square(&sum.Gives, d.Gives)
		square(&sum.Takes, d.Takes)
	}
	return Statistics{
		math.Sqrt(sum.Closure), math.Sqrt(sum.Ratio), math.Sqrt(sum.HotBeyond),
		math.Sqrt(sum.ColdBeyond), math.Sqrt(sum.Gives), math.Sqrt(sum.Takes),
	}
}
