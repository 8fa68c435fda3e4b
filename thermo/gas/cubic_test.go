package gas

import (
	"math"
	"testing"

	"heatreeve/thermo"
)

// The attraction falls with temperature and its slope flattens, from 100 K far beyond the range;
// at the end of the straight line neither it nor its two derivatives have a step.
func TestAttraction(t *testing.T) {
	for name, fractions := range everyGas() {
		c, err := compose(fractions, "mole fraction")
		if err != nil {
			t.Fatal(err)
		}
		f := oneFluid(c.parts)
		last := math.Inf(1)
		for T := 100.0; T < 5000; T *= 1.01 {
			s := math.Sqrt(T)
			y, dy, ddy := f.attraction(s)
			if !(y > 0 && y <= last && dy <= 0 && dy*dy+y*(ddy-dy/s) >= 0) {
				t.Errorf("%s %g K: √a %g, slope %g, second %g; above %g", name, T, y, dy, ddy, last)
			}
			last = y
		}
		for _, p := range f.parts {
			if math.IsInf(p.end, 1) {
				continue
			}
			y1, dy1, ddy1 := f.attraction(p.end)
			y2, dy2, ddy2 := f.attraction(p.end * (1 + 1e-12))
			if !(math.Abs(y2/y1-1) <= 1e-10) || !(math.Abs(dy2/dy1-1) <= 1e-10) || !(math.Abs(ddy2-ddy1) <= 1e-10*dy1*dy1/y1) {
				t.Errorf("%s: √a %g, %g, %g and %g, %g, %g on the two sides of %g K", name, y1, dy1, ddy1, y2, dy2, ddy2, p.end*p.end)
			}
		}
	}
}

// Beyond the Boyle temperature the second virial coefficient b − a/(RT) stays above zero and below
// the covolume. By corresponding states (Abbott's coefficients, from memory) B crosses zero at the same
// temperature within 15 %.
func TestBeyondBoyle(t *testing.T) {
	for _, s := range table {
		c := critical[s.formula]
		if c.T < 100 {
			continue // hydrogen and helium are quantum gases
		}
		f := oneFluid([]component{{&s, 1}})
		boyle := 0.0
		for T := c.T; T < maxT; T++ {
			y, _, _ := f.attraction(math.Sqrt(T))
			B := f.b - y*y/(thermo.R*T)
			if boyle == 0 && B > 0 {
				boyle = T
			}
			if boyle > 0 && !(B > 0 && B <= f.b) {
				t.Fatalf("%s: B = %g m³/mol at %g K, above zero from %g K on", s.formula, B, T, boyle)
			}
		}
		other := c.T
		for B := -1.0; B < 0; other++ {
			B, _ = c.virial(other)
		}
		if other < maxT && !(math.Abs(boyle/other-1) <= 0.15) {
			t.Errorf("%s: Boyle temperature %g K, by corresponding states %g K", s.formula, boyle, other)
		}
	}
}
