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

// fluid1 is the one fluid that stands for a mixture in the equation of state of
// Peng and Robinson,
//
//	p = RT/(v − b) − a(T)/(v² + 2bv − b²)
//
// With kij = 0 the mixing rule of van der Waals makes √a the sum of x·√a of the
// components, and each of those is a straight line in √T: so is the sum,
// √a = root − fall·√T.
type fluid1 struct {
	root, fall float64
	b          float64 // m³/mol
	T, p       float64 // K, Pa: the critical point that a and b make
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
	f.root += a * (1 + kappa)
	f.fall += a * kappa / math.Sqrt(c.T)
	f.b += share * c.covolume()
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
	root := f.root - f.fall*s
	a := root * root
	slope := -root * f.fall * s             // T·da/dT
	curve := f.fall * (f.fall + root/s) / 2 // T·d²a/dT²
	A, B := a*p/(rt*rt), f.b*p/rt           //
	z := gasRoot(A, B)                      //
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
