package site

import (
	"time"

	"heatreeve/thermo/unit"
)

// rates are the dimensions of what can be counted, with those of its rate.
var rates = map[unit.Dimension]unit.Dimension{
	unit.Volume: unit.VolumeFlow, unit.Mass: unit.MassFlow, unit.Amount: unit.MolarFlow, unit.Energy: unit.Power,
}

var countable = []unit.Dimension{unit.Volume, unit.Mass, unit.Amount, unit.Energy}

// usualCounterAge is the max_age of a counter that tells none: many are read once in a
// quarter of an hour (common practice, no source).
const usualCounterAge = 15 * time.Minute

// needNoCounter refuses a unit that only a counter has.
func (v value) needNoCounter(t *Tag) bool {
	switch d := t.Unit.Dimension; d {
	case unit.Count:
		v.fault("%v are counted; say what one is worth, such as counts: {pulse: 10 L}", t.Unit)
		return false
	case unit.Energy, unit.Amount:
		v.fault("%v is a unit of %v, which a load has use for only as a counter; say so with counts: {}", t.Unit, d)
		return false
	}
	return true
}

// counter reads what kind of register the tag is; known says that the tag has a unit. It
// returns false where the unit is none of a counter.
func (r *reader) counter(tag object, v value, t *Tag, known bool) bool {
	o := v.object("tags.*.counts")
	if v, ok := tag.get("range"); ok {
		v.fault("stands beside counts; a counter has rolls_over_at and largest instead")
	}
	t.Counter, t.MaxAge = new(Counter), usualCounterAge
	if !known || !o.unitOfCount(tag, t) {
		return false
	}
	step := t.Scale
	if _, pulses := o.get("pulse"); !pulses {
		step = 1
	}
	o.since(t.Counter)
	if v, ok := o.get("rolls_over_at"); ok {
		if t.Counter.Each {
			v.fault("is of a total; a count since the last message does not roll over")
		}
		if at, ok := v.aboveZero(o.countedIn(t)); ok {
			t.Counter.Modulus, t.Max = at*step, at*step
		}
	}
	if v, ok := o.get("largest"); ok {
		t.Counter.Largest, _ = v.aboveZero(rates[t.Unit.Dimension])
	}
	return true
}

const sinceMessage = "last message"

// since reads from when on a message counts.
func (o object) since(c *Counter) {
	if v, ok := o.get("since"); ok {
		word, _ := v.oneOf("start", sinceMessage)
		c.Each = word == sinceMessage
	}
}

// countedIn is the dimension of the numbers that the counter shows.
func (o object) countedIn(t *Tag) unit.Dimension {
	if _, pulses := o.get("pulse"); pulses {
		return unit.Count
	}
	return t.Unit.Dimension
}

// unitOfCount finds what is counted; of pulses, it is what one of them is worth.
func (o object) unitOfCount(tag object, t *Tag) bool {
	v, given := o.get("pulse")
	u, _ := tag.get("unit")
	_, counts := rates[t.Unit.Dimension]
	switch {
	case t.Unit.Dimension == unit.Count:
		v, given = o.need("pulse", "what one pulse is worth, such as pulse: 10 L")
		if !given {
			return false
		}
	case given:
		v.fault("is of a tag in pulses, and this one is in %v; want unit: pulses, or no pulse", t.Unit)
		return false
	case !counts:
		u.fault("%v is a unit of %v, which does not count up; a counter is in %s, or in pulses", t.Unit, t.Unit.Dimension, dimensions(countable))
		return false
	default:
		return true
	}
	worth, ok := v.aboveZero(countable...)
	if !ok {
		return false
	}
	q, err := unit.ParseAs(v.node.Value, countable...)
	t.Unit, t.Scale, t.Resolution = q.Unit, worth, worth
	t.Min, t.Max = 0, largest[q.Unit.Dimension]
	return err == nil
}

// aboveZero reads a quantity that must be more than nothing, in SI.
func (v value) aboveZero(ds ...unit.Dimension) (float64, bool) {
	q, ok := v.quantity(ds...)
	if !ok {
		return 0, false
	}
	x := unit.Decimal(q.SI())
	if !(x > 0) {
		v.fault("%v is not above zero", q)
		return 0, false
	}
	return x, true
}

// checkCounter refuses a max_age over which the flow of a counter cannot be told.
func (o object) checkCounter(t *Tag, grid time.Duration) {
	c := t.Counter
	if c == nil {
		return
	}
	v, given := o.get("max_age")
	if !given {
		v = o.value
	}
	switch longest := t.MaxAge.Seconds() * c.Largest; {
	case t.MaxAge < 2*grid:
		v.fault("max_age %v leaves no time for two readings of a counter on a grid of %v", t.MaxAge, grid)
	case c.Largest > 0 && longest < t.Resolution:
		v.fault("within max_age %v the counter moves by less than its step even at its largest rate; want %v or more", t.MaxAge, wait(t.Resolution/c.Largest))
	case c.Modulus > 0 && longest > c.Modulus/2:
		v.fault("within max_age %v the counter may come half round at its largest rate, and a roll-over is not told from a reset; want %v or less, or less for largest", t.MaxAge, wait(c.Modulus/2/c.Largest))
	}
}

// wait is a number of seconds to be written.
func wait(s float64) time.Duration {
	d := time.Duration(s * 1e9)
	if d > time.Second {
		return d.Round(time.Second)
	}
	return d
}

// steps reads in what steps a tag tells of its quantity.
func (o object) steps(t *Tag) {
	if v, ok := o.get("resolution"); ok {
		if t.Resolution > 0 {
			v.fault("is that of one pulse by itself; leave it out")
		} else {
			t.Resolution = v.step(t)
		}
	}
	if v, ok := o.get("deadband"); ok {
		if t.Counter != nil {
			v.fault("is not of a counter, whose difference has a resolution")
			return
		}
		t.Deadband = v.step(t)
	}
}

// step reads how far a tag's quantity moves from one number to the next, 0 where there
// is a fault.
func (v value) step(t *Tag) float64 {
	s, ok := v.text()
	if !ok {
		return 0
	}
	q, err := unit.ParseAs(s, distances(t.Unit.Dimension))
	x := unit.Decimal(q.SI())
	switch {
	case err != nil:
		v.fault("%v", err)
	case !(x > 0):
		v.fault("%v is not above zero; leave it out where there is none", q)
	case !sameBasis(q.Unit, t.Unit):
		v.fault("%v and the tag's unit %v are not of the same; want %v", q, t.Unit, t.Unit)
	case x >= t.Max-t.Min:
		v.fault("%v is as wide as all that the tag may read", q)
	default:
		return x
	}
	return 0
}
