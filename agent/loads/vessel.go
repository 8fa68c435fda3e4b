package loads

import (
	"fmt"
	"math"

	"heatreeve/thermo"
)

// inside is the state of a vessel's content, in SI units.
type inside struct {
	T, Mean  float64 // now, and on the mean over the span of the rate, K
	Pressure float64 // absolute Pa
	Content  float64 // in the unit of its kind
	Rate     float64 // K/s
}

// heated is what the heat equation gives for it.
type heated struct {
	Duty     float64 // W, positive in the vessel's service
	Mass     float64 // kg
	Density  float64 // kg/m³, 0 where the content is by mass
	Capacity float64 // of content and shell, J/K
	// ByContent and ByShell are the two parts of the duty, and ByCp how much of it goes
	// with cp, W.
	ByContent, ByShell, ByCp float64
	Specific                 float64 // the specific heat that was taken, J/(kg K)
}

// work works the duty of a closed content:
//
//	Q = ± (m·c + C_shell)·dT/dt
//
// where c is cp of what keeps its pressure, so that Q is dH/dt, and cv of what keeps its
// volume, so that Q is dU/dt (of an ideal gas cp − cv is R). It is taken at the mean
// temperature over the span of the rate. The error is a [*thermo.RangeError], or says that
// there is no content.
func (v *Vessel) work(x *inside) (heated, error) {
	s, err := v.Fluid.At(x.Mean, x.Pressure)
	if err != nil {
		return heated{}, fmt.Errorf("content: %w", err)
	}
	h := heated{Mass: x.Content}
	if v.ContentKind == ContentVolume {
		now, err := v.Fluid.At(x.T, x.Pressure)
		if err != nil {
			return heated{}, fmt.Errorf("content: %w", err)
		}
		h.Density = now.Density
		h.Mass *= now.Density
	}
	if !(h.Mass >= 0 && h.Mass <= largestMass) {
		return h, fmt.Errorf("content of %.4g kg: it must not be below zero, nor more than any vessel holds", h.Mass)
	}
	c, follows := s.Cp, 1.0
	if v.Rigid {
		c, follows = s.Cv, s.Cp/s.Cv // cp − cv is known much better than either
	}
	rate := x.Rate
	if v.Gives {
		rate = -rate
	}
	h.Specific = c
	h.Capacity = h.Mass*c + v.Shell
	h.Duty = h.Capacity * rate
	h.ByContent, h.ByShell = h.Mass*c*rate, v.Shell*rate
	h.ByCp = h.ByContent * follows
	return h, nil
}

// largestMass, kg, is beyond any vessel.
const largestMass = 1e12

// shellHalf is the half-width, as a fraction, of a heat capacity that was worked out from
// drawings: of a vessel's wall, of a pipe and its content (common practice, no source).
const shellHalf = 0.1

// vessel works the figure of a load that is a vessel at the grid point g; s is left with
// what it was worked from, as far as it came.
func (e *Engine) vessel(load int, g int64, s *vesselSteps) Figure {
	v, l := e.cfg.Loads[load].Vessel, &e.loads[load]
	f := Figure{At: g, Until: math.MaxInt64}
	x, d := &s.x, &s.d
	if !e.read(&f, v.Temperature, &x.T, &d.T) ||
		!e.read(&f, v.Pressure, &x.Pressure, &d.Pressure) ||
		!e.read(&f, v.Content, &x.Content, &d.Content) {
		return f
	}
	tag := &e.cfg.Tags[v.Temperature.Tag]
	f.Until = min(f.Until, l.Trends[ofTemperature].until(g))
	s.line = l.Trends[ofTemperature].fit(g, tag.OnChange)
	if why := s.line.short(v.Over); why != "" {
		return f.fail(Fitting, fmt.Sprintf("tag %q: %s", tag.Name, why))
	}
	if why := l.moving(v, g); why != "" {
		return f.fail(Moving, why)
	}
	f.mark(l.Trends[ofTemperature].mark(g, tag.OnChange), tag.Name)
	x.Mean, x.Rate = s.line.Mean, s.line.Rate
	d.Rate, d.Gain = s.line.uncertainty(tag), math.Abs(tag.Accuracy.Rel)/math.Sqrt(3)
	return v.figure(f, &e.equations[load].declared, s)
}

// moving says by how much the content changed over the span; it is empty where the
// vessel is still.
func (l *loadState) moving(v *Vessel, g int64) string {
	if v.Content.Tag < 0 {
		return ""
	}
	lo, hi := l.Trends[ofContent].extremes(g)
	if hi-lo <= v.Still*math.Abs(hi) {
		return ""
	}
	return fmt.Sprintf("content went between %.4g and %.4g of its SI unit in the last %.3g s, by more than %.3g %%: what comes in or goes out brings heat of its own",
		lo, hi, float64(v.Over)/1e9, v.Still*100)
}

func (v *Vessel) figure(f Figure, m *medium, s *vesselSteps) Figure {
	x, d, h := &s.x, &s.d, &s.h
	why, remark := v.phase(m, x)
	if why != "" {
		return f.fail(Saturation, why)
	}
	var err error
	if *h, err = v.work(x); err != nil {
		return f.fail(OutOfRange, err.Error())
	}
	f.Content, f.Mass, f.Rate, f.Pressure, f.Density = x.T, h.Mass, x.Rate, x.Pressure, h.Density
	f.Random, f.Remark = h.Capacity*d.Rate, remark
	f.Variance = f.Random * f.Random * float64(v.Over) / 1e9
	if math.Abs(h.Duty) <= max(v.IdleBelow, atRest*f.Random) {
		f.Idle, f.Uncertainty = true, f.Random
		return f
	}
	f.Duty = h.Duty
	if err := v.spread(&f, m, s); err != nil {
		return f.fail(OutOfRange, err.Error())
	}
	return f
}

// atRest is within how many standard uncertainties of zero a rate is none.
const atRest = 2

// phase tells how near the content is to a change of phase, as that of a stream does:
// refused says why there is no duty, and the remark stands beside one.
func (v *Vessel) phase(m *medium, x *inside) (refused string, r Remark) {
	e, frost := m.end("content", x.T, x.Pressure), min(v.Margin, nearFreezing)
	switch liquid, gas := m.Phase() == thermo.Liquid, m.Phase() == thermo.Gas; {
	case liquid && e.T > e.hi-v.Margin:
		return e.above("boiling", v.Margin) + ": heat may be latent", r
	case gas && e.T < e.lo+v.Margin:
		return e.below(dewPoint, v.Margin) + ": heat may be latent", r
	case liquid && e.T < e.lo+frost:
		r.Note = "near freezing: " + e.below("freezing", frost) + ", and ice is not in the duty"
	}
	return "", r
}
