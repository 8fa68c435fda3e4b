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
	Parts // how many there are
)

// String is the part's name in reports and in the working of a figure.
func (p Part) String() string {
	names := [Parts]string{"flow", "inlet", "outlet", "pressure", "outlet pressure", "humidity", "pump", "content", "matched pair", "heat capacity", "density"}
	if p < Parts {
		return names[p]
	}
	return fmt.Sprintf("Part(%d)", uint8(p))
}

// spread fills the figure's uncertainty: each input is moved by its standard
// uncertainty up and down and half the change of duty is its contribution
// (JCGM 100:2008, 5.1.3, note 2); contributions of independent inputs add as
// root of the sum of squares. The error is that of the heat equation where an
// input can be moved neither way inside the fluid's range.
func (q *equation) spread(f *Figure, m *medium, x *State, u *[PartCp]float64, centre *Result) error {
	for part, ui := range u {
		if ui == 0 {
			continue
		}
		half, err := q.swing(m, x, Part(part), ui, centre)
		if err != nil {
			return err
		}
		f.Share[part] = half
	}
	cpIn, densityIn := m.Uncertainty(x.Inlet, x.Pressure)
	cpOut, densityOut := m.Uncertainty(x.Outlet, x.OutletPressure)
	f.Share[PartCp] = centre.Duty * max(cpIn, cpOut)
	if q.FlowKind == VolumeFlow {
		density := densityIn
		if q.MeterAtOutlet {
			density = densityOut
		}
		f.Share[PartDensity] = centre.Duty * density
	}
	var sum float64
	for _, share := range f.Share {
		sum += share * share
	}
	f.Uncertainty = math.Sqrt(sum)
	return nil
}

// swing returns half the change of duty as one input goes from u below to u
// above; at the edge of the fluid's range, the change on the side that is left.
func (q *equation) swing(m *medium, x *State, part Part, u float64, centre *Result) (float64, error) {
	up, errUp := q.beside(m, x, q.moved(*x, part, u), centre)
	down, errDown := q.beside(m, x, q.moved(*x, part, -u), centre)
	switch {
	case errUp == nil && errDown == nil:
		return (up - down) / 2, nil
	case errUp == nil:
		return up - centre.Duty, nil
	case errDown == nil:
		return centre.Duty - down, nil
	}
	return 0, errUp
}

// beside returns the duty in the state y, near the state x with the result centre. An
// end that has not moved is not worked again; what a measured humidity amounts to
// moves with the inlet.
func (q *equation) beside(m *medium, x *State, y State, centre *Result) (float64, error) {
	in, out := centre.Inlet, centre.Outlet
	inletMoved := y.Inlet != x.Inlet || y.Pressure != x.Pressure
	outletMoved := y.Outlet != x.Outlet || y.OutletPressure != x.OutletPressure
	if q.humid != nil && (inletMoved || y.Humidity != x.Humidity) {
		other, err := q.medium(&y)
		if err != nil {
			return 0, err
		}
		m, inletMoved, outletMoved = &other, true, true
	}
	var err error
	if inletMoved {
		if in, err = m.inlet(&y); err != nil {
			return 0, err
		}
	}
	if outletMoved {
		if out, err = m.outlet(&y); err != nil {
			return 0, err
		}
	}
	_, _, duty := q.heat(m, &y, &in, &out)
	return duty, nil
}

func (q *equation) moved(x State, part Part, by float64) State {
	switch part {
	case PartFlow:
		x.Flow += by
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
	}
	return x
}
