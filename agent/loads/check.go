package loads

import (
	"errors"
	"fmt"

	"heatreeve/thermo"
)

// check says everything in the configuration that cannot be computed with.
func (c *Config) check() error {
	var errs []error
	if c.Grid <= 0 || minute%c.Grid != 0 {
		return fmt.Errorf("grid of %g s does not divide a minute", float64(c.Grid)/1e9)
	}
	for i := range c.Tags {
		if err := c.checkTag(i); err != nil {
			errs = append(errs, fmt.Errorf("tag %q: %w", c.Tags[i].Name, err))
		}
	}
	for i := range c.Loads {
		l := &c.Loads[i]
		if err := errors.Join(c.checkLoad(l), l.checkCounters(c.Tags), l.checkDrivers(c.Tags)); err != nil {
			errs = append(errs, fmt.Errorf("load %q: %w", l.Name, err))
		}
	}
	return errors.Join(errs...)
}

func (c *Config) checkTag(i int) error {
	t := &c.Tags[i]
	if n := t.Counter; n != nil && !(positive(n.Modulus) && positive(n.Largest)) {
		return fmt.Errorf("counter that rolls over at %g and counts at most %g a second: both must be finite and not negative", n.Modulus, n.Largest)
	}
	if t.Counter != nil && t.Screen != nil {
		return errors.New("counter whose readings are tested: what it rises by is bounded by its largest rate")
	}
	if t.HasBeside {
		if j := t.Beside; j < 0 || j >= len(c.Tags) || j == i || t.Counter != nil || c.Tags[j].Counter != nil {
			return fmt.Errorf("sensor beside it has index %d: another tag that is no counter is wanted, beside one that is none", j)
		}
	}
	if !t.OnChange {
		return nil
	}
	switch {
	case t.Alive < 0 || t.Alive >= len(c.Tags):
		return fmt.Errorf("reports by exception, and its liveness tag has index %d; there are %d tags", t.Alive, len(c.Tags))
	case c.Tags[t.Alive].OnChange:
		return fmt.Errorf("reports by exception, and so does its liveness tag %q; one that reports at intervals is wanted", c.Tags[t.Alive].Name)
	}
	return nil
}

// checkCounters says where the load has a counter that it cannot have, or has none.
func (l *Load) checkCounters(tags []Tag) error {
	if l.HasWitness && (l.Witness.Tag < 0 || tags[l.Witness.Tag].Counter == nil) {
		return errors.New("witness that is no counter: the register of a heat meter is wanted")
	}
	if l.HasRunning && (l.Running.Tag < 0 || l.Vessel != nil || l.counter(tags) >= 0) {
		return errors.New("running: the tag of a pump is wanted, and a stream whose flow is a rate")
	}
	if l.HasBypass && (l.Bypass.Tag < 0 || l.Vessel != nil || l.Settles < 0) {
		return errors.New("bypass: a tag that tells whether it is open is wanted, a stream, and no negative time to settle")
	}
	if c := &l.Stream.Corrections; l.counter(tags) >= 0 && (c.HasPump || c.Hold > 0 || c.Stored > 0) {
		return errors.New("corrections of a stream whose flow is counted: a flow at every instant is wanted for them")
	}
	return nil
}

// checkDrivers says which driver the load cannot have.
func (l *Load) checkDrivers(tags []Tag) error {
	if n := len(l.Drivers); n > MaxDrivers {
		return fmt.Errorf("%d drivers: at most %d can be", n, MaxDrivers)
	}
	for _, src := range l.Drivers {
		if src.Tag < 0 || src.Tag >= len(tags) || tags[src.Tag].Counter != nil {
			return fmt.Errorf("driver with index %d: a tag that is no counter is wanted", src.Tag)
		}
	}
	return nil
}

func (c *Config) checkLoad(l *Load) error {
	err := l.Stream.check()
	if l.Vessel != nil {
		err = l.Vessel.check()
	}
	if err != nil {
		return err
	}
	if sources, over := l.followed(); len(sources) > 0 && over < leastPoints*c.Grid {
		return fmt.Errorf("a rate is fitted over %g s, in which there are less than %d steps of the grid of %g s", float64(over)/1e9, leastPoints, float64(c.Grid)/1e9)
	}
	return nil
}

// check says which correction of s cannot be worked.
func (s *Stream) check() error {
	switch c := &s.Corrections; {
	case !positive(c.Hold):
		return fmt.Errorf("hold of %g m³: it must be finite and not negative", c.Hold)
	case c.Hold > 0 && s.HumidityKind != 0:
		return errors.New("hold of a stream whose humidity is measured: what the measured humidity is of has left by the time it is compared")
	case !positive(c.Stored):
		return fmt.Errorf("stored heat of %g J/K: it must be finite and not negative", c.Stored)
	case c.Stored > 0 && c.StoredOver <= 0:
		return fmt.Errorf("stored heat is told over %g s: the span must be above zero", float64(c.StoredOver)/1e9)
	case c.Stored > 0 && s.Inlet.Tag < 0 && s.Outlet.Tag < 0:
		return errors.New("stored heat of a stream between two constant temperatures: it never changes")
	case !positive(s.CalibratedAt):
		return fmt.Errorf("calibrated at %g kg/m³: it must be finite and not negative", s.CalibratedAt)
	case !(s.Pair >= 0 && s.Pair <= 1):
		return fmt.Errorf("correlation of the thermometers of %g: it must lie between 0 and 1", s.Pair)
	}
	return nil
}

// check says what about v cannot be worked.
func (v *Vessel) check() error {
	switch {
	case v.Fluid == nil:
		return errors.New("vessel without a fluid")
	case v.Temperature.Tag < 0:
		return errors.New("temperature of a vessel is a constant: a tag is needed to see it change")
	case v.ContentKind != ContentMass && v.ContentKind != ContentVolume:
		return fmt.Errorf("content of kind %d: it must be a mass or a volume", v.ContentKind)
	case v.Content.Tag < 0 && !(positive(v.Content.Value) && v.Content.Value+v.Shell > 0):
		return fmt.Errorf("content of %g: it must be finite and above zero, or zero with a shell", v.Content.Value)
	case v.Rigid && v.Fluid.Phase() != thermo.Gas:
		return fmt.Errorf("rigid vessel of %s, a %s: only a gas is heated at constant volume here", v.Fluid.Name(), v.Fluid.Phase())
	case v.Rigid && v.Pressure.Tag < 0 && v.ContentKind == ContentVolume:
		return errors.New("rigid vessel of a volume at constant pressure: its pressure follows its temperature, and a tag must tell it, or the content by mass")
	case !positive(v.Shell):
		return fmt.Errorf("shell of %g J/K: it must be finite and not negative", v.Shell)
	case v.Over <= 0:
		return fmt.Errorf("rate is fitted over %g s: the span must be above zero", float64(v.Over)/1e9)
	case !(v.Still >= 0):
		return fmt.Errorf("still of %g: it must not be negative", v.Still)
	case !(v.IdleBelow >= 0):
		return fmt.Errorf("idle below %g W: it must not be negative", v.IdleBelow)
	}
	return nil
}

// positive reports whether x is finite and not below zero.
func positive(x float64) bool { return x >= 0 && x-x == 0 }
