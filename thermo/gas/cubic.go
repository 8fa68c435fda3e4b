package gas

import (
	"math"

	"heatreeve/thermo"
)

// Constants of Peng and Robinson, in the digits of their paper (Ind. Eng. Chem.
// Fundam. 15 (1976) 59).
const (
	omegaA = 0.45724
	omegaB = 0.07780
)

// bend is the part of √a at the critical temperature at which the straight line of a component
// ends.
const bend = 0.3

// fluid1 is the one fluid that stands for a mixture in the equation of state of
// Peng and Robinson,
//
//	p = RT/(v − b) − a(T)/(v² + 2bv − b²)
//
// With kij = 0 the mixing rule of van der Waals makes √a the sum of x·√a of the
// components, and each of those is a straight line in √T: so is the sum,
// √a = root − fall·√T.
//
// The line of a component would pass zero when it is hot, and a rise again: nitric oxide at 610 K,
// nitrogen at 1388 K. So it ends at 0.3 of its value at the critical temperature (455 K, 867 K), and
// goes on as
//
//	√a = y·exp(−u − u²/2),   u = fall·(√T − √T₀)/y
//
// from the end T₀, y of the line, which leaves a, da/dT and d²a/dT² without a step: a falls to zero and
// never turns. This is our own; the extrapolation of Boston and Mathias (1980) begins at
// the critical temperature, and would change the equation where it is good.
type fluid1 struct {
	line
	parts    []line
	straight float64 // √T up to which all parts are straight, √K
	b        float64 // m³/mol
	T, p     float64 // K, Pa: the critical point that a and b make
}

// line is √a of a component, straight up to end.
type line struct {
	root, fall float64
	end        float64 // √T₀, √K
}

func oneFluid(parts []component) fluid1 {
	var f fluid1
	for _, c := range parts {
		f.add(critical[c.formula], c.share)
	}
	f.setCritical()
	return f
}

// add mixes in a share of a component. κ is that of the paper, but not below 0, which would
// make the attraction of helium rise with temperature.
func (f *fluid1) add(c criticalPoint, share float64) {
	kappa := max(0, 0.37464+c.omega*(1.54226-c.omega*0.26992))
	a := share * thermo.R * c.T * math.Sqrt(omegaA/c.p)
	l := line{root: a * (1 + kappa), fall: a * kappa / math.Sqrt(c.T), end: math.Inf(1)}
	if kappa > 0 {
		l.end = (l.root - bend*a) / l.fall
	}
	if len(f.parts) == 0 || l.end < f.straight {
		f.straight = l.end
	}
	f.parts = append(f.parts, l)
	f.root += l.root
	f.fall += l.fall
	f.b += share * c.covolume()
}

// at returns √a at s = √T, and its derivatives by s.
func (l *line) at(s float64) (y, dy, ddy float64) {
	y, dy = l.root-l.fall*s, -l.fall
	if s <= l.end {
		return y, dy, 0
	}
	y = l.root - l.fall*l.end
	u := l.fall * (s - l.end) / y
	e := math.Exp(-u - u*u/2)
	return y * e, -l.fall * (1 + u) * e, l.fall * l.fall * u * (2 + u) * e / y
}

// attraction returns √a at s = √T, and its derivatives by s.
func (f *fluid1) attraction(s float64) (y, dy, ddy float64) {
	if s <= f.straight {
		return f.root - f.fall*s, -f.fall, 0
	}
	for k := range f.parts {
		a, da, dda := f.parts[k].at(s)
		y, dy, ddy = y+a, dy+da, ddy+dda
	}
	return y, dy, ddy
}

// setCritical finds where a = (Ωa/Ωb)·bRT, which is the critical temperature of a pure
// substance.
func (f *fluid1) setCritical() {
	s := f.root / (f.fall + math.Sqrt(omegaA/omegaB*f.b*thermo.R))
	f.T = s * s
	f.p = omegaB * thermo.R * f.T / f.b
}

// residual of the gas: Z, and what is added to the ideal h/(RT), cv/R and cp/R.
type residual struct{ z, h, cv, cp float64 }

// at works the residual at T in K and p in Pa, on the gas side.
func (f *fluid1) at(T, p float64) residual {
	rt, s := thermo.R*T, math.Sqrt(T)
	root, fall, bent := f.attraction(s)
	a := root * root
	slope := root * fall * s                      // T·da/dT
	curve := (fall*(fall-root/s) + root*bent) / 2 // T·d²a/dT²
	A, B := a*p/(rt*rt), f.b*p/rt                 //
	z := gasRoot(A, B)                            //
	log := math.Log1p(2*math.Sqrt2*B/(z+(1-math.Sqrt2)*B)) / (2 * math.Sqrt2 * f.b)
	d := z*z + 2*B*z - B*B
	dpdT := 1/(z-B) - slope*p/(rt*rt*d)       // ·T/p
	dpdv := 1/((z-B)*(z-B)) - 2*A*(z+B)/(d*d) // ·(−RT/p²)
	cv := curve * log / thermo.R
	return residual{z: z, h: z - 1 + (slope-a)*log/rt, cv: cv, cp: cv - 1 + dpdT*dpdT/dpdv}
}

// gasRoot is the largest root of Z³ − (1−B)Z² + (A−3B²−2B)Z − (AB−B²−B³), by Newton
// from 1 + B, which lies above it: the steps fall one way to the root.
func gasRoot(A, B float64) float64 {
	c2, c1, c0 := B-1, A-B*(3*B+2), B*(B*(1+B)-A)
	z := 1 + B
	for range 60 {
		next := z - (((z+c2)*z+c1)*z+c0)/((3*z+2*c2)*z+c1)
		if !(next < z) {
			break
		}
		z = next
	}
	return z
}
