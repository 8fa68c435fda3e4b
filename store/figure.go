package store

import "math"

// scale is a way from a float64 to a whole number, near numbers for near floats.
type scale byte

const (
	scaleFull   scale = iota // the float's bits, any float
	scaleSingle              // those of a float32
	scalePart                // a part of an uncertainty, as its minute tells it; 0 is 0
	scaleRoot                // the same of the square root
)

// number is that of x, or one near it where x has none.
func (s scale) number(x float64) int64 {
	switch s {
	case scaleSingle:
		b := math.Float32bits(float32(x))
		if b>>31 != 0 {
			return int64(^b)
		}
		return int64(b | 1<<31)
	case scalePart:
		code, ok := partCode(x)
		if !ok {
			return 0
		}
		return int64(code&^(1<<15)) + 1 | int64(code>>15)<<16
	case scaleRoot:
		return scalePart.number(math.Sqrt(x))
	}
	return int64(ordered(math.Float64bits(x)))
}

// float is the inverse of number.
func (s scale) float(n int64) float64 {
	switch s {
	case scaleSingle:
		b := uint32(n)
		if b>>31 == 0 {
			return float64(math.Float32frombits(^b))
		}
		return float64(math.Float32frombits(b &^ (1 << 31)))
	case scalePart:
		if n&(1<<16-1) == 0 {
			return 0
		}
		return partValue(uint16(n&(1<<16-1)-1)&^(1<<15) | uint16(n>>16&1)<<15)
	case scaleRoot:
		root := scalePart.float(n)
		return root * root
	}
	return math.Float64frombits(unordered(uint64(n)))
}

// likeness is the number on a scale of what a float may resemble.
func (s scale) likeness(x float64) int64 {
	switch s {
	case scaleRoot, scalePart:
		return scalePart.number(math.Abs(x))
	}
	return s.number(x)
}

// figure is one float of a minute, the scale on which it is told where that tells all of
// them, and what of the figures before it, it may resemble.
type figure struct {
	of    func(m *Minute) *float64
	scale scale
	likes []func(m *Minute) float64
}

// figures lists all floats of a minute, in the order in which they are sealed. That never
// changes, and new ones come last.
var figures = func() []figure {
	measured := func(m *Minute) float64 { return m.Measured }
	foretold := func(m *Minute) float64 { return foretoldDuty(m.Given, m.Taken, m.Measured) }
	duty := func(m *Minute) float64 { return m.Duty }
	flow := func(m *Minute) float64 { return m.Flow }
	inlet := func(m *Minute) float64 { return m.Inlet }
	expected := func(m *Minute) float64 { return m.Expected }
	given := func(m *Minute) float64 { return m.Given }
	heat := func(m *Minute) float64 { return m.Given - m.Taken }
	likes := func(all ...func(*Minute) float64) []func(*Minute) float64 { return all }
	all := []figure{
		{func(m *Minute) *float64 { return &m.Measured }, scaleFull, nil},
		{func(m *Minute) *float64 { return &m.Missing }, scaleFull, nil},
		{func(m *Minute) *float64 { return &m.Given }, scaleFull, nil},
		{func(m *Minute) *float64 { return &m.Taken }, scaleFull, nil},
		{func(m *Minute) *float64 { return &m.Duty }, scaleSingle, likes(foretold)},
		{func(m *Minute) *float64 { return &m.DutyMin }, scaleSingle, likes(duty)},
		{func(m *Minute) *float64 { return &m.DutyMax }, scaleSingle, likes(duty)},
		{func(m *Minute) *float64 { return &m.DutyUncertainty }, scaleSingle, likes(duty)},
		{func(m *Minute) *float64 { return &m.Flow }, scaleSingle, likes(duty)},
		{func(m *Minute) *float64 { return &m.Inlet }, scaleSingle, nil},
		{func(m *Minute) *float64 { return &m.Outlet }, scaleSingle, likes(inlet)},
		{func(m *Minute) *float64 { return &m.Pressure }, scaleSingle, nil},
		{func(m *Minute) *float64 { return &m.Bridged }, scaleFull, nil},
		{func(m *Minute) *float64 { return &m.BridgedGiven }, scaleFull, likes(given)},
		{func(m *Minute) *float64 { return &m.BridgedTaken }, scaleFull, nil},
		{func(m *Minute) *float64 { return &m.Latent }, scaleFull, nil},
		{func(m *Minute) *float64 { return &m.Compared }, scaleFull, likes(given)},
		{func(m *Minute) *float64 { return &m.Witness }, scaleFull, likes(func(m *Minute) float64 { return m.Compared })},
		{func(m *Minute) *float64 { return &m.Content }, scaleSingle, likes(inlet)},
		{func(m *Minute) *float64 { return &m.Random }, scaleRoot, likes(heat, flow)},
		{func(m *Minute) *float64 { return &m.Systematic[0] }, scalePart, likes(heat, flow)},
	}
	for i := 1; i < Shares; i++ {
		before := func(m *Minute) float64 { return m.Systematic[i-1] }
		all = append(all, figure{func(m *Minute) *float64 { return &m.Systematic[i] }, scalePart, likes(heat, flow, before)})
	}
	return append(all,
		figure{func(m *Minute) *float64 { return &m.Uncertain }, scaleFull, likes(measured)},
		figure{func(m *Minute) *float64 { return &m.Expected }, scaleSingle, likes(duty)},
		figure{func(m *Minute) *float64 { return &m.ExpectedError }, scaleSingle, likes(expected)})
}()
