package water

import (
	"math"

	"heatreeve/thermo"
)

// Basic equation of region 3: R7-97(2012), equation 28 and table 30.
//
//	f/(RT) = φ(δ, τ) = n₁ ln δ + Σ n δ^I τ^J,  δ = ρ/322 kg/m³, τ = 647.096 K/T
//
// Range 623.15 K to the boundary with region 2, up to 100 MPa; it covers both
// sides of the saturation line above 623.15 K and the critical point. Checked
// against every value of table 33 and, at other states, against IAPWS-95.
const (
	criticalDensity = 322.0 // kg/m³
	region3Log      = 1.0658070028513
)

// region3Terms are the lines of table 30 after the first.
var region3Terms = [...]term{
	{-15.732845290239, 0, 0},
	{20.944396974307, 0, 1},
	{-7.6867707878716, 0, 2},
	{2.6185947787954, 0, 7},
	{-2.808078114862, 0, 10},
	{1.2053369696517, 0, 12},
	{-0.0084566812812502, 0, 23},
	{-1.2654315477714, 1, 2},
	{-1.1524407806681, 1, 6},
	{0.88521043984318, 1, 15},
	{-0.64207765181607, 1, 17},
	{0.38493460186671, 2, 0},
	{-0.85214708824206, 2, 2},
	{4.8972281541877, 2, 6},
	{-3.0502617256965, 2, 7},
	{0.039420536879154, 2, 22},
	{0.12558408424308, 2, 26},
	{-0.2799932969871, 3, 0},
	{1.389979956946, 3, 2},
	{-2.018991502357, 3, 4},
	{-0.0082147637173963, 3, 16},
	{-0.47596035734923, 3, 26},
	{0.0439840744735, 4, 0},
	{-0.44476435428739, 4, 2},
	{0.90572070719733, 4, 4},
	{0.70522450087967, 4, 26},
	{0.10770512626332, 5, 1},
	{-0.32913623258954, 5, 3},
	{-0.50871062041158, 5, 26},
	{-0.022175400873096, 6, 0},
	{0.094260751665092, 6, 2},
	{0.16436278447961, 6, 26},
	{-0.013503372241348, 7, 2},
	{-0.014834345352472, 8, 26},
	{0.00057922953628084, 9, 2},
	{0.0032308904703711, 9, 26},
	{8.0964802996215e-05, 10, 0},
	{-0.00016557679795037, 10, 1},
	{-4.4923899061815e-05, 11, 26},
}

// isotherm is the basic equation at one temperature: a polynomial of δ, whose
// factors for δ^I are those of φ, of τφτ and of τ²φττ. The logarithm stands apart.
type isotherm struct{ f, t, tt [12]float64 }

func newIsotherm(tau float64) (s isotherm) {
	var y [27]float64
	y[0], y[1] = 1, tau
	for k := 2; k < len(y); k++ {
		y[k] = y[k/2] * y[k-k/2]
	}
	for k := range region3Terms {
		e := &region3Terms[k]
		v, j := e.n*y[e.j], float64(e.j)
		s.f[e.i] += v
		s.t[e.i] += j * v
		s.tt[e.i] += j * (j - 1) * v
	}
	return s
}

// pressure returns p/(322 kg/m³ RT) = δ²φδ and its slope by δ.
func (s *isotherm) pressure(d float64) (p, slope float64) {
	for i := len(s.f) - 1; i > 0; i-- {
		v := float64(i) * s.f[i]
		slope = slope*d + float64(i+1)*v
		p = p*d + v
	}
	return d * (region3Log + d*p), region3Log + d*slope
}

// Reduced densities on the far side of anything in region 3, and between the
// spinodals of every isotherm below the critical temperature.
const (
	thinnest = 0.25
	middle   = 1.0
	densest  = 2.5
)

// density solves δ²φδ = p by Newton's method from the far end of the phase's
// side, where the isotherm is bent so that the steps do not pass the root;
// a bracket, halved when a step leaves it, guards against rounding. Above the
// critical temperature there is one root, and the side is that of the pressure.
func (s *isotherm) density(p float64, dense bool) float64 {
	lo, hi, d := thinnest, middle, thinnest
	if dense {
		lo, hi, d = middle, densest, densest
	}
	for range 100 {
		v, slope := s.pressure(d)
		if v < p {
			lo = d
		} else {
			hi = d
		}
		next := d - (v-p)/slope
		if !(next >= lo && next <= hi) {
			next = (lo + hi) / 2
		}
		if math.Abs(v-p) <= 2e-15*p || next == d {
			return next
		}
		d = next
	}
	return d
}

// flattest is the least slope ∂(δ²φδ)/∂δ that still gives a cp: it is met within
// some µK of the critical point, where cp is infinite, and not below it.
const flattest = 1e-8

// region3 returns the properties on the side of the phase that is asked for:
// R7-97(2012), table 31. It is false at the critical point itself.
func region3(T, p float64, phase thermo.Phase) (thermo.Properties, bool) {
	tau := criticalTemperature / T
	rt := gasConstant * T
	s := newIsotherm(tau)
	target := p / (criticalDensity * rt)
	dense := phase == thermo.Liquid
	if T >= criticalTemperature {
		v, _ := s.pressure(middle)
		dense = target > v
	}
	d := s.density(target, dense)
	_, slope := s.pressure(d)
	if !(slope > flattest) {
		return thermo.Properties{}, false
	}
	return s.properties(T, p, d, slope), true
}

func (s *isotherm) properties(T, p, d, slope float64) thermo.Properties {
	var t, tt, mixed float64 // τφτ, τ²φττ, δτφδτ
	for i := len(s.t) - 1; i >= 0; i-- {
		t = t*d + s.t[i]
		tt = tt*d + s.tt[i]
		mixed = mixed*d + float64(i)*s.t[i]
	}
	u := gasConstant * T * t
	pv := p / (criticalDensity * d)
	e := pv/(gasConstant*T) - mixed
	return thermo.Properties{
		Enthalpy:       u + pv,
		InternalEnergy: u,
		Cp:             gasConstant * (e*e/slope - tt),
		Cv:             -gasConstant * tt,
		Density:        criticalDensity * d,
	}
}
