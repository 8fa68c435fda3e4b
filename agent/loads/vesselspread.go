package loads

import (
	"errors"
	"math"
)

// insideDoubt is what may be wrong with what a vessel's duty is worked from.
type insideDoubt struct {
	T, Pressure, Content doubt
	Rate                 float64 // standard uncertainty by what changes from reading to reading, K/s
	Gain                 float64 // of the thermometer's scale, standard, as a fraction
}

// spread fills the figure's uncertainty. What the thermometer shows too much all of the
// time cancels in a difference of temperatures, so that its uncertainty comes in by two
// ways only: the gain of its scale, by which every difference is off, and the temperature at
// which heat capacity and density are taken. Both are in the share of the content, with
// those of its amount and of the wall: all that is about the vessel and lasts. The error is
// that of the heat equation where an input can be moved neither way.
func (v *Vessel) spread(f *Figure, m *medium, s *vesselSteps) error {
	x, d, h := &s.x, &s.d, &s.h
	state, err1 := v.swing(x, h, d.T.lasting(0), func(y inside, by float64) inside { y.T += by; y.Mean += by; return y })
	pressure, err2 := v.swing(x, h, d.Pressure.lasting(0), func(y inside, by float64) inside { y.Pressure += by; return y })
	if err := errors.Join(err1, err2); err != nil {
		return err
	}
	amount := 0.0
	if x.Content > 0 {
		amount = h.ByContent / x.Content
	}
	s.amount = amount
	s.about = [...]float64{state, amount * d.Content.lasting(0), h.ByShell * shellHalf / math.Sqrt(3), h.Duty * d.Gain}
	f.Share[PartContent] = math.Copysign(math.Sqrt(sumOfSquares(s.about[:])), h.Duty)
	f.Share[PartPressure] = pressure
	u := m.property(x.Mean, x.Pressure)
	f.Share[PartCp] = h.ByCp * u.cp
	f.Share[PartStrength] = h.ByCp * u.cpByStrength
	if v.ContentKind == ContentVolume {
		f.Share[PartDensity] = h.ByContent * u.density
		f.Share[PartStrength] += h.ByContent * u.densityByStrength
	}
	f.Random = math.Hypot(f.Random, amount*math.Sqrt(d.Content.scatter))
	f.Variance += amount * amount * d.Content.rate
	f.Uncertainty = math.Sqrt(sumOfSquares(f.Share[:]) + f.Random*f.Random)
	return nil
}

// swing is the contribution of what move moves, where it is off by u.
func (v *Vessel) swing(x *inside, centre *heated, u float64, move func(y inside, by float64) inside) (float64, error) {
	if u == 0 {
		return 0, nil
	}
	at := func(by float64) (float64, error) {
		y := move(*x, by)
		h, err := v.work(&y)
		return h.Duty, err
	}
	up, errUp := at(u)
	down, errDown := at(-u)
	return contribution(centre.Duty, up, down, errUp, errDown)
}
