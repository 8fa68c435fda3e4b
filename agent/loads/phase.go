package loads

import (
	"fmt"

	"heatreeve/thermo"
)

// Remark is what to bear in mind with a duty.
type Remark struct {
	Latent bool   // vapour condenses, or may: the duty is the sensible part only
	Note   string // the remark in words; empty where there is none
}

// nearFreezing, K, is how far above its freezing point a liquid is remarked upon, where
// the stream's margin is not less. It is the least of the 3 K to 5 K that are customary
// (common practice, no source), because chilled circuits are built to run 5 K above,
// and is no reason to refuse: what stands above its freezing point is still a liquid.
const nearFreezing = 3

const dewPoint = "the dew point"

// end is one end of the stream, or a surface in it, with what bounds its phase there.
type end struct {
	name         string
	T, p, lo, hi float64
}

func (m *medium) end(name string, T, p float64) end {
	lo, hi := m.Span(p)
	return end{name, T, p, lo, hi}
}

// above says that the end is above the upper limit of its phase, or how near to it.
func (e *end) above(limit string, margin float64) string {
	return e.place(e.T > e.hi, "above", limit, e.hi, margin)
}

// below says that the end is below the lower limit of its phase, or how near to it.
func (e *end) below(limit string, margin float64) string {
	return e.place(e.T < e.lo, "below", limit, e.lo, margin)
}

func (e *end) place(beyond bool, side, limit string, T, margin float64) string {
	if !beyond {
		side = fmt.Sprintf("within %g K of", margin)
	}
	return fmt.Sprintf("%s at %.2f °C is %s %s at %.2f °C (%.1f kPa absolute)", e.name, e.T-273.15, side, limit, T-273.15, e.p/1e3)
}

// phase tells how near the state is to a change of phase. Refused says why there is no
// duty, because the heat may be latent: a liquid near boiling, or a gas near its dew
// point. The remark stands beside a duty that is worked all the same: a liquid near
// freezing, or a wet gas near its dew point.
func (q *equation) phase(m *medium, x *State) (refused string, r Remark) {
	ends := [...]end{m.end("inlet", x.Inlet, x.Pressure), m.end("outlet", x.Outlet, x.OutletPressure)}
	if m.wet != nil {
		return "", q.condensing(m, x, ends)
	}
	liquid, gas := m.Phase() == thermo.Liquid, m.Phase() == thermo.Gas
	frost := min(q.Margin, nearFreezing)
	for _, e := range ends {
		switch {
		case liquid && e.T > e.hi-q.Margin:
			return e.above("boiling", q.Margin) + ": heat may be latent", Remark{}
		case gas && e.T < e.lo+q.Margin:
			return e.below(dewPoint, q.Margin) + ": heat may be latent", Remark{}
		case liquid && e.T < e.lo+frost && r.Note == "":
			r.Note = "near freezing: " + e.below("freezing", frost) + ", and ice is not in the duty"
		}
	}
	return "", r
}

// condensing remarks on a wet gas whose outlet, or the coil, is below the dew point, or
// colder than the inlet and within the margin of it: what condenses there gives heat
// up that is not in the duty. A heater dries the air, however humid it comes in. An
// inlet below the dew point carries fog; where the humidity is measured it is never
// below.
func (q *equation) condensing(m *medium, x *State, ends [2]end) Remark {
	in, coldest := ends[0], ends[1]
	if q.HasCoil {
		if coil := m.end("coil", x.Coil, x.Pressure); coil.T-coil.lo < coldest.T-coldest.lo {
			coldest = coil
		}
	}
	const part = "sensible part only: "
	switch {
	case q.humid == nil && in.T < in.lo:
		return Remark{true, part + in.below(dewPoint, q.Margin) + " and carries fog"}
	case coldest.T < coldest.lo:
		return Remark{true, part + coldest.below(dewPoint, q.Margin) + ", and what condenses is not in the duty"}
	case coldest.T < coldest.lo+q.Margin && coldest.T < in.T:
		return Remark{true, part + coldest.below(dewPoint, q.Margin) + ", and what may condense is not in the duty"}
	}
	return Remark{}
}
