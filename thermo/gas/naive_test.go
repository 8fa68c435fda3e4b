package gas

import (
	"math"
	"testing"

	"heatreeve/thermo"
)

// naive is the same gas as the equations are printed: every power by math.Pow, every
// component by itself in every state, every pair of components in the mixing rule.
type naive struct {
	parts []component
	real  bool // with the residual of Peng and Robinson
}

func (n naive) at(T, p float64) (h, cp, cv, rho float64) {
	var M float64
	for _, c := range n.parts {
		e := c.low
		if T > seam {
			e = c.high
		}
		M += c.share * c.molarMass
		cp += c.share * n.sum(e.a, T, [7]float64{1, 1, 1, 1, 1, 1, 1}) * thermo.R
		h += c.share * thermo.R * (T*n.sum(e.a, T, [7]float64{-1, math.Log(T), 1, 1. / 2, 1. / 3, 1. / 4, 1. / 5}) + e.b)
		h -= c.share * thermo.R * (zero*n.sum(c.low.a, zero, [7]float64{-1, math.Log(zero), 1, 1. / 2, 1. / 3, 1. / 4, 1. / 5}) + c.low.b)
	}
	cv, rho = cp-thermo.R, p*M/(thermo.R*T)
	if n.real {
		res := n.residual(T, p)
		h, cp, cv, rho = h+res.h*thermo.R*T, cp+res.cp*thermo.R, cv+res.cv*thermo.R, rho/res.z
	}
	return h / M, cp / M, cv / M, rho
}

func (naive) sum(a [7]float64, T float64, weight [7]float64) (sum float64) {
	for k := range a {
		sum += a[k] * weight[k] * math.Pow(T, float64(k-2))
	}
	return sum
}

func (n naive) residual(T, p float64) residual {
	var a, da, dda, b float64
	for _, i := range n.parts {
		ai, dai, ddai := attraction(critical[i.formula], T)
		b += i.share * critical[i.formula].covolume()
		for _, j := range n.parts {
			aj, daj, ddaj := attraction(critical[j.formula], T)
			x := i.share * j.share
			a += x * ai * aj
			da += x * (dai*aj + ai*daj)
			dda += x * (ddai*aj + 2*dai*daj + ai*ddaj)
		}
	}
	rt := thermo.R * T
	A, B := a*p/math.Pow(rt, 2), b*p/rt
	z := n.root(A, B)
	v := z * rt / p
	log := math.Log((v+(1+math.Sqrt2)*b)/(v+(1-math.Sqrt2)*b)) / (2 * math.Sqrt2 * b)
	den := v*v + 2*b*v - b*b
	dpdT := thermo.R/(v-b) - da/den
	dpdv := -rt/math.Pow(v-b, 2) + 2*a*(v+b)/math.Pow(den, 2)
	cv := T * dda * log / thermo.R
	return residual{z, z - 1 + (T*da-a)*log/rt, cv, cv - 1 - T*dpdT*dpdT/dpdv/thermo.R}
}

// attraction is √a of a component and its derivatives by T: the printed line, and the bell that takes its
// place below 0.3 of the value at the critical temperature.
func attraction(c criticalPoint, T float64) (s, ds, dds float64) {
	k := 0.37464 + 1.54226*c.omega - 0.26992*math.Pow(c.omega, 2)
	s0 := math.Sqrt(0.45724 * math.Pow(thermo.R*c.T, 2) / c.p)
	end := c.T * math.Pow(1+0.7/k, 2)
	if T <= end {
		return s0 * (1 + k*(1-math.Pow(T/c.T, 0.5))), -s0 * k / 2 * math.Pow(T*c.T, -0.5), s0 * k / 4 * math.Pow(c.T, -0.5) * math.Pow(T, -1.5)
	}
	w := 1 + k/0.3*(math.Pow(T/c.T, 0.5)-math.Pow(end/c.T, 0.5))
	dw, ddw := k/0.6*math.Pow(T*c.T, -0.5), -k/1.2*math.Pow(c.T, -0.5)*math.Pow(T, -1.5)
	y := 0.3 * s0 * math.Exp((1-math.Pow(w, 2))/2)
	return y, -w * y * dw, (math.Pow(w, 2)-1)*y*math.Pow(dw, 2) - w*y*ddw
}

// root by Cardano, the largest of three or the only one.
func (naive) root(A, B float64) float64 {
	a2, a1, a0 := B-1, A-3*B*B-2*B, -(A*B - B*B - B*B*B)
	q, r := a1/3-a2*a2/9, (a1*a2-3*a0)/6-a2*a2*a2/27
	if d := math.Pow(q, 3) + math.Pow(r, 2); d >= 0 {
		s := math.Sqrt(d)
		return math.Cbrt(r+s) + math.Cbrt(r-s) - a2/3
	}
	return 2*math.Sqrt(-q)*math.Cos(math.Acos(r/math.Sqrt(-math.Pow(q, 3)))/3) - a2/3
}

// The short forms against the printed ones, over many mixtures and states.
func TestAgainstNaive(t *testing.T) {
	worst := 0.0
	for name, fractions := range everyGas() {
		if fractions["He"] > 0 {
			continue // its κ is set to 0, not printed
		}
		for _, model := range []Model{Ideal, PengRobinson} {
			c, err := compose(fractions, "mole fraction")
			if err != nil {
				t.Fatal(err)
			}
			f, n := mustNew(t, fractions, model), naive{c.parts, model == PengRobinson}
			for _, p := range []float64{1e3, 1e5, 1e6, 8e6} {
				lo, _ := f.Span(p)
				for T := max(lo, minT) + 1; T < 990 && p <= f.Bounds().MaxP; T += 53 {
					got, err := f.At(T, p)
					if err != nil {
						t.Fatal(err)
					}
					h, cp, cv, rho := n.at(T, p)
					d := max(math.Abs(got.Enthalpy-h)/(got.Cp*T), math.Abs(got.Cp/cp-1), math.Abs(got.Cv/cv-1), math.Abs(got.Density/rho-1))
					if worst = max(worst, d); !(d <= 1e-11) {
						t.Errorf("%s, %v, %g K, %g Pa: %+v; as printed %g %g %g %g", name, model, T, p, got, h, cp, cv, rho)
					}
				}
			}
		}
	}
	t.Logf("worst deviation %.1e", worst)
}
