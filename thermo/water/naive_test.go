package water

import (
	"math"

	"heatreeve/thermo"
)

// The equations as the release prints them, each derivative in a sum of its own
// with math.Pow: the yardstick for the fast form, for its figures and its speed.

// gibbs holds γ = g/(RT) and its derivatives, made dimensionless.
type gibbs struct {
	g, p, t, pp, tt, pt float64 // γ, πγπ, τγτ, π²γππ, τ²γττ, πτγπτ
}

// properties by R7-97(2012), tables 3, 12 and 39.
func (g gibbs) properties(T, p float64) thermo.Properties {
	rt := gasConstant * T
	d := g.p - g.pt
	return thermo.Properties{
		Enthalpy:       rt * g.t,
		InternalEnergy: rt * (g.t - g.p),
		Cp:             -gasConstant * g.tt,
		Cv:             gasConstant * (d*d/g.pp - g.tt),
		Density:        p / (rt * g.p),
	}
}

func (g gibbs) entropy() float64 { return gasConstant * (g.t - g.g) }

func (g gibbs) speedOfSound(T float64) float64 {
	d := g.p - g.pt
	return math.Sqrt(gasConstant * T * g.p * g.p / (d*d/g.tt - g.pp))
}

func sumOf(terms []term, f func(n, i, j float64) float64) float64 {
	var total float64
	for _, t := range terms {
		total += f(t.n, float64(t.i), float64(t.j))
	}
	return total
}

func pow(x, y float64) float64 { return math.Pow(x, y) }

// naive1 is region 1, equation 7.
type naive1 struct{ T, p float64 }

func (s naive1) xy() (x, y float64) { return 7.1 - s.p/16.53e6, 1386/s.T - 1.222 }

func (s naive1) gammaPi() (sum float64) {
	x, y := s.xy()
	for _, t := range region1Terms {
		i, j := float64(t.i), float64(t.j)
		sum -= t.n * i * math.Pow(x, i-1) * math.Pow(y, j)
	}
	return sum
}

func (s naive1) gammaTau() (sum float64) {
	x, y := s.xy()
	for _, t := range region1Terms {
		i, j := float64(t.i), float64(t.j)
		sum += t.n * math.Pow(x, i) * j * math.Pow(y, j-1)
	}
	return sum
}

func (s naive1) gammaTauTau() (sum float64) {
	x, y := s.xy()
	for _, t := range region1Terms {
		i, j := float64(t.i), float64(t.j)
		sum += t.n * math.Pow(x, i) * j * (j - 1) * math.Pow(y, j-2)
	}
	return sum
}

func (s naive1) gibbs() gibbs {
	pi, tau := s.p/16.53e6, 1386/s.T
	x, y := s.xy()
	terms := region1Terms[:]
	return gibbs{
		g:  sumOf(terms, func(n, i, j float64) float64 { return n * pow(x, i) * pow(y, j) }),
		p:  pi * s.gammaPi(),
		t:  tau * s.gammaTau(),
		pp: pi * pi * sumOf(terms, func(n, i, j float64) float64 { return n * i * (i - 1) * pow(x, i-2) * pow(y, j) }),
		tt: tau * tau * s.gammaTauTau(),
		pt: pi * tau * sumOf(terms, func(n, i, j float64) float64 { return -n * i * j * pow(x, i-1) * pow(y, j-1) }),
	}
}

// balance takes the three sums that h, cp and density need, and no more.
func (s naive1) balance() thermo.Balance {
	rt, tau := gasConstant*s.T, 1386/s.T
	return thermo.Balance{
		Enthalpy: rt * tau * s.gammaTau(),
		Cp:       -gasConstant * tau * tau * s.gammaTauTau(),
		Density:  16.53e6 / (rt * s.gammaPi()),
	}
}

// naiveGas is region 2 or 5, equations 15 to 17 or 32 to 34.
type naiveGas struct {
	T, p, pi, tau, y float64
	ideal            []idealTerm
	residual         []term
}

func naive2(T, p float64) naiveGas {
	return naiveGas{T, p, p / 1e6, 540 / T, 540/T - 0.5, region2Ideal[:], region2Residual[:]}
}

func naive5(T, p float64) naiveGas {
	return naiveGas{T, p, p / 1e6, 1000 / T, 1000 / T, region5Ideal[:], region5Residual[:]}
}

func (s naiveGas) gammaPi() float64 {
	sum := 1 / s.pi
	for _, t := range s.residual {
		i, j := float64(t.i), float64(t.j)
		sum += t.n * i * math.Pow(s.pi, i-1) * math.Pow(s.y, j)
	}
	return sum
}

func (s naiveGas) gammaTau() (sum float64) {
	for _, t := range s.ideal {
		j := float64(t.j)
		sum += t.n * j * math.Pow(s.tau, j-1)
	}
	for _, t := range s.residual {
		i, j := float64(t.i), float64(t.j)
		sum += t.n * math.Pow(s.pi, i) * j * math.Pow(s.y, j-1)
	}
	return sum
}

func (s naiveGas) gammaTauTau() (sum float64) {
	for _, t := range s.ideal {
		j := float64(t.j)
		sum += t.n * j * (j - 1) * math.Pow(s.tau, j-2)
	}
	for _, t := range s.residual {
		i, j := float64(t.i), float64(t.j)
		sum += t.n * math.Pow(s.pi, i) * j * (j - 1) * math.Pow(s.y, j-2)
	}
	return sum
}

func (s naiveGas) idealGamma() (sum float64) {
	for _, t := range s.ideal {
		sum += t.n * math.Pow(s.tau, float64(t.j))
	}
	return sum
}

func (s naiveGas) gibbs() gibbs {
	r := s.residual
	return gibbs{
		g: math.Log(s.pi) + s.idealGamma() +
			sumOf(r, func(n, i, j float64) float64 { return n * pow(s.pi, i) * pow(s.y, j) }),
		p: s.pi * s.gammaPi(),
		t: s.tau * s.gammaTau(),
		pp: -1 + s.pi*s.pi*sumOf(r, func(n, i, j float64) float64 {
			return n * i * (i - 1) * pow(s.pi, i-2) * pow(s.y, j)
		}),
		tt: s.tau * s.tau * s.gammaTauTau(),
		pt: s.pi * s.tau * sumOf(r, func(n, i, j float64) float64 {
			return n * i * pow(s.pi, i-1) * j * pow(s.y, j-1)
		}),
	}
}

func (s naiveGas) balance() thermo.Balance {
	rt := gasConstant * s.T
	return thermo.Balance{
		Enthalpy: rt * s.tau * s.gammaTau(),
		Cp:       -gasConstant * s.tau * s.tau * s.gammaTauTau(),
		Density:  1e6 / (rt * s.gammaPi()),
	}
}

// naive3 is region 3, equation 28, at a temperature and a density.
type naive3 struct{ T, density float64 }

// helmholtz holds φ = f/(RT) and its derivatives, made dimensionless.
type helmholtz struct {
	f, d, t, dd, tt, dt float64 // φ, δφδ, τφτ, δ²φδδ, τ²φττ, δτφδτ
}

func (s naive3) helmholtz() helmholtz {
	d, tau, terms := s.density/322, 647.096/s.T, region3Terms[:]
	return helmholtz{
		f:  region3Log*math.Log(d) + sumOf(terms, func(n, i, j float64) float64 { return n * pow(d, i) * pow(tau, j) }),
		d:  region3Log + d*sumOf(terms, func(n, i, j float64) float64 { return n * i * pow(d, i-1) * pow(tau, j) }),
		t:  tau * sumOf(terms, func(n, i, j float64) float64 { return n * j * pow(d, i) * pow(tau, j-1) }),
		dd: -region3Log + d*d*sumOf(terms, func(n, i, j float64) float64 { return n * i * (i - 1) * pow(d, i-2) * pow(tau, j) }),
		tt: tau * tau * sumOf(terms, func(n, i, j float64) float64 { return n * j * (j - 1) * pow(d, i) * pow(tau, j-2) }),
		dt: d * tau * sumOf(terms, func(n, i, j float64) float64 { return n * i * j * pow(d, i-1) * pow(tau, j-1) }),
	}
}

// properties by R7-97(2012), table 31.
func (h helmholtz) properties(T, density float64) thermo.Properties {
	e := h.d - h.dt
	return thermo.Properties{
		Enthalpy:       gasConstant * T * (h.t + h.d),
		InternalEnergy: gasConstant * T * h.t,
		Cp:             gasConstant * (e*e/(2*h.d+h.dd) - h.tt),
		Cv:             -gasConstant * h.tt,
		Density:        density,
	}
}

func (h helmholtz) pressure(T, density float64) float64 { return density * gasConstant * T * h.d }

func (h helmholtz) entropy() float64 { return gasConstant * (h.t - h.f) }

func (h helmholtz) speedOfSound(T float64) float64 {
	e := h.d - h.dt
	return math.Sqrt(gasConstant * T * (2*h.d + h.dd - e*e/h.tt))
}
