package loads

import (
	"fmt"
	"math"
)

// Part names one contribution to the uncertainty of a duty.
type Part uint8

const (
	PartFlow Part = iota
	PartInlet
	PartOutlet
	PartPressure
	PartOutletPressure
	PartHumidity
	PartPump
	PartContent
	PartPair // what the errors of inlet and outlet thermometer have in common
	PartCp   // the first of those that are not an input's
	PartDensity
	PartStrength // of a mixture: cp and density, which one error of it moves together
	Parts        // how many there are
)

// String is the part's name in reports and in the working of a figure.
func (p Part) String() string {
	names := [Parts]string{"flow", "inlet", "outlet", "pressure", "outlet pressure", "humidity", "pump", "content", "matched pair", "heat capacity", "density", "strength"}
	if p < Parts {
		return names[p]
	}
	return fmt.Sprintf("Part(%d)", uint8(p))
}

// spread fills the figure's uncertainty: each input is moved by its standard
// uncertainty up and down and half the change of duty is its contribution
// (JCGM 100:2008, 5.1.3, note 2), and in proportion that of what else may be wrong with
// it. What the errors of a matched pair have in common is a contribution of its own, so
// that those that are left are independent of each other and add as root of the sum of
// squares. The error is that of the heat equation where an input can be moved neither way
// inside the fluid's range.
func (q *equation) spread(f *Figure, m *medium, s *steps) error {
	x, centre := &s.x, &s.r
	var random float64
	for part := range s.d {
		d := &s.d[part]
		if *d == (doubt{}) {
			continue
		}
		u := d.step()
		half, err := q.swing(m, x, Part(part), u, centre)
		if err != nil {
			return err
		}
		c := half / u
		s.c[part] = c
		if q.Pair > 0 && (Part(part) == PartInlet || Part(part) == PartOutlet) {
			f.Share[part] = c * d.lasting(q.Pair)
			f.Share[PartPair] += c * d.accuracy * math.Sqrt(q.Pair)
		} else {
			f.Share[part] = c * d.lasting(0)
		}
		random += c * c * d.scatter
		f.Variance += c * c * d.rate
	}
	q.property(f, m, x, centre.Duty-q.correction(x))
	f.Random = math.Sqrt(random)
	f.Uncertainty = math.Sqrt(sumOfSquares(f.Share[:]) + random)
	return nil
}

// sumOfSquares is the variance by contributions that are independent of each other.
func sumOfSquares(contributions []float64) float64 {
	var sum float64
	for _, c := range contributions {
		sum += c * c
	}
	return sum
}

// swing is the contribution of one input that is off by u. What the stream brings goes
// with the flow.
func (q *equation) swing(m *medium, x *State, part Part, u float64, centre *Result) (float64, error) {
	if part == PartFlow {
		return (centre.Duty - q.correction(x)) / x.Flow * u, nil
	}
	above, below := *x, *x
	q.move(&above, part, u)
	q.move(&below, part, -u)
	up, errUp := q.beside(m, x, &above, centre)
	down, errDown := q.beside(m, x, &below, centre)
	return contribution(centre.Duty, up, down, errUp, errDown)
}

// contribution returns half the change of a result as one of its causes goes from one
// standard uncertainty below to one above; at the edge of the fluid's range, the change on
// the side that is left.
func contribution(centre, up, down float64, errUp, errDown error) (float64, error) {
	switch {
	case errUp == nil && errDown == nil:
		return (up - down) / 2, nil
	case errUp == nil:
		return up - centre, nil
	case errDown == nil:
		return centre - down, nil
	}
	return 0, errUp
}

// beside returns the duty in the state y, near the state x with the result centre. An
// end that has not moved is not worked again; what a measured humidity amounts to
// moves with the inlet.
func (q *equation) beside(m *medium, x, y *State, centre *Result) (float64, error) {
	in, out := centre.Inlet, centre.Outlet
	inletMoved := y.Inlet != x.Inlet || y.Pressure != x.Pressure
	outletMoved := y.Outlet != x.Outlet || y.OutletPressure != x.OutletPressure
	if q.humid != nil && (inletMoved || y.Humidity != x.Humidity) {
		other, err := q.medium(y)
		if err != nil {
			return 0, err
		}
		m, inletMoved, outletMoved = &other, true, true
	}
	var err error
	if inletMoved {
		if in, err = m.inlet(y); err != nil {
			return 0, err
		}
	}
	if outletMoved {
		if out, err = m.outlet(y); err != nil {
			return 0, err
		}
	}
	_, _, duty := q.heat(m, y, &in, &out)
	return duty, nil
}

// move moves one input of x.
func (q *equation) move(x *State, part Part, by float64) {
	switch part {
	case PartInlet:
		x.Inlet += by
	case PartOutlet:
		x.Outlet += by
	case PartPressure:
		x.Pressure += by
		if q.OutletPressure == q.Pressure {
			x.OutletPressure += by
		}
	case PartOutletPressure:
		x.OutletPressure += by
	case PartHumidity:
		x.Humidity += by
	case PartPump:
		x.Pump += by
	}
}
