package helmholtz

import (
	"math"

	"heatreeve/thermo"
)

// zero is where, in K, the enthalpy of the ideal gas is 0.
const zero = 298.15

// fluid is one phase of a substance.
type fluid struct {
	*substance
	name     string
	phase    thermo.Phase
	bounds   thermo.Bounds
	equation *equation
	r        float64 // J/(kg K)
	dense    float64 // ρr, kg/m³
	offset   float64 // J/kg, of the ideal part at zero
}

func newFluid(s *substance) *fluid {
	f := &fluid{
		substance: s,
		name:      s.name,
		equation:  compile(s),
		r:         s.gasConstant / s.molarMass,
		dense:     s.reducingDensity * s.molarMass,
	}
	u, _ := s.ideal.at(s.reducingT / zero)
	f.offset = -f.r * zero * (u + 1)
	return f
}

func (f *fluid) Name() string          { return f.name }
func (f *fluid) Source() string        { return f.source }
func (f *fluid) Phase() thermo.Phase   { return f.phase }
func (f *fluid) Bounds() thermo.Bounds { return f.bounds }
func (f *fluid) MolarMass() float64    { return f.molarMass }

// at returns τφ°_τ and −τ²φ°_ττ: u/(RT) and cv/R of the ideal gas, the former up
// to the zero of the enthalpy.
func (t *idealTerms) at(tau float64) (u, cv float64) {
	u, cv = t.logTau, t.logTau
	if len(t.powers) > 0 {
		lt := math.Log(tau)
		for _, p := range t.powers {
			x := p.n * p.t * math.Exp(p.t*lt)
			u += x
			cv -= (p.t - 1) * x
		}
	}
	for _, o := range t.oscillators {
		x := o.theta * tau
		d := o.d * math.Exp(-x)
		y := -o.n * x * d / (1 + d)
		u += y
		cv += y * x / (1 + d)
	}
	return u, cv
}

// At solves the equation of state for the density and takes the properties from
// its derivatives:
//
//	p = ρRT(1 + δφ_δ)      u = RTτ(φ°_τ + φ_τ)      cv = −Rτ²(φ°_ττ + φ_ττ)
//	cp = cv + R(1 + δφ_δ − δτφ_δτ)²/(1 + 2δφ_δ + δ²φ_δδ)
func (f *fluid) At(T, p float64) (thermo.Properties, error) {
	if err := f.bounds.Check(f.name, T, p, "range of the equation of state"); err != nil {
		return thermo.Properties{}, err
	}
	if err := f.outside(T, p); err != nil {
		return thermo.Properties{}, err
	}
	var iso isotherm
	f.equation.at(f.reducingT/T, &iso)
	q := p / (f.dense * f.r * T)
	delta, ok := f.equation.density(&iso, q, f.bracket(&iso, T, q))
	if !ok {
		return thermo.Properties{}, f.lost(T)
	}
	return f.properties(&iso, T, p, q, delta), nil
}

// properties at a density that is still off by what a Newton step of near leaves.
func (f *fluid) properties(iso *isotherm, T, p, q, delta float64) thermo.Properties {
	res, delta := f.residual(iso, q, delta)
	u, cv := f.ideal.at(iso.tau)
	rt := f.r * T
	rho := delta * f.dense
	internal := rt*(u+res.U) + f.offset
	return thermo.Properties{
		Enthalpy:       internal + p/rho,
		InternalEnergy: internal,
		Cp:             f.r * (cv + 1 + res.Cp),
		Cv:             f.r * (cv + res.Cv),
		Density:        rho,
	}
}

// Residual is what a real gas has over the ideal one at the same T and p: u/(RT), cv/R and cp/R; and
// its compressibility factor Z = p/(ρRT). R is that of the equation, see [Gas.Beyond].
type Residual struct{ U, Cv, Cp, Z float64 }

// residual brings the density to its last digits. The derivatives give what the last step
// leaves of the energy as well, to first order.
func (f *fluid) residual(iso *isotherm, q, delta float64) (r Residual, at float64) {
	var s sums
	var step, slope float64
	for range 4 {
		s = f.equation.sums(iso, delta)
		slope = 1 + 2*s.d + s.dd
		step = (q - delta*(1+s.d)) / slope
		delta += step
		if math.Abs(step) <= converge*delta {
			break
		}
	}
	w := 1 + s.d - s.dt
	return Residual{
		U:  s.t + s.dt*step/delta,
		Cv: -s.tt,
		Cp: w*w/slope - s.tt - 1,
		Z:  q / delta,
	}, delta
}

// Gas is a gas whose residuals are to be had beyond the highest temperature of its equation,
// up to its highest pressure.
type Gas interface {
	thermo.Fluid
	// Beyond returns the residuals at T in K, not below the highest temperature of the equation,
	// and p in Pa, and the gas constant R in J/(kg K) that they go with. The error is that of
	// At where the equation has no density.
	Beyond(T, p float64) (r Residual, R float64, err error)
}

// Beyond is meant for [Gas]. Far above the critical temperature the residuals are small and fade out with
// temperature; the tests hold how.
func (f *fluid) Beyond(T, p float64) (r Residual, R float64, err error) {
	var iso isotherm
	f.equation.at(f.reducingT/T, &iso)
	q := p / (f.dense * f.r * T)
	delta, ok := f.equation.density(&iso, q, f.bracket(&iso, T, q))
	if !ok {
		return Residual{}, f.r, f.lost(T)
	}
	r, _ = f.residual(&iso, q, delta)
	return r, f.r, nil
}
