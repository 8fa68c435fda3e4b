package expect

import "fmt"

// Scale is how people write a driver: its tag, and x in SI as (x − Offset)/Factor of Unit. A
// Factor of 0 is 1.
type Scale struct {
	Tag            string
	Unit           string
	Factor, Offset float64
}

func (s *Scale) shown(x float64) float64 {
	if s.Factor == 0 {
		return x - s.Offset
	}
	return (x - s.Offset) / s.Factor
}

// Show writes a value in the unit of the tag.
func (s *Scale) Show(x float64) string { return fmt.Sprintf("%.4g %s", s.shown(x), s.Unit) }

// value is the driver with the given index; why says that there is none.
func (s *Scale) value(c *Conditions, driver int) (x float64, why string) {
	if driver < len(c.Drivers) {
		x = c.Drivers[driver]
	}
	if driver >= len(c.Drivers) || x != x {
		return x, fmt.Sprintf("tag %q, by which the duty is expected, has no value", s.Tag)
	}
	return x, ""
}

// outside says that x is none between low and high.
func (s *Scale) outside(x, low, high float64) string {
	return fmt.Sprintf("tag %q is at %s, and what is expected is known from %s to %s", s.Tag, s.Show(x), s.Show(low), s.Show(high))
}
