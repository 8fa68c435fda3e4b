package gas

import (
	"errors"
	"fmt"
	"math"

	"heatreeve/thermo"
	"heatreeve/thermo/gas/helmholtz"
)

// extended is a reference equation that goes on above its highest temperature: the ideal part is
// that of the polynomials from there on, the residuals are the equation's own. They are small
// there and fade out: from 200 K above their ends the equations stay within 0.3 % of cp (ammonia
// 0.9 %) and 1.1 % of the density from Peng and Robinson's, to 100 bar.
type extended struct {
	helmholtz.Gas
	ideal    polynomials
	fit      fit
	covolume float64 // m³/mol
	top      float64 // K, the highest temperature of the equation
	offset   float64 // J/kg, what the two ideal parts differ by at top
}

func newExtended(g helmholtz.Gas, c composition) extended {
	e := extended{Gas: g, ideal: mix(c.parts), fit: fitOf(c.parts), covolume: oneFluid(c.parts).b, top: g.Bounds().MaxT}
	last, err1 := g.At(e.top, minP)
	first, err2 := e.beyond(e.top, minP)
	if err := errors.Join(err1, err2); err != nil {
		panic(err) // a gas that is none when hot and thin
	}
	e.offset = last.Enthalpy - first.Enthalpy
	return e
}

// Source names both.
func (e extended) Source() string {
	return fmt.Sprintf("%s; above %.6g °C its residuals with %s", e.Gas.Source(), e.top-273.15, nasa)
}

// Bounds are those of the equation, with more on top.
func (e extended) Bounds() thermo.Bounds {
	b := e.Gas.Bounds()
	b.MaxT = maxT
	return b
}

// Span ends at the highest temperature of the equation where the pressure is above 10 MPa.
func (e extended) Span(p float64) (lo, hi float64) {
	lo, hi = e.Gas.Span(p)
	if p > beyondP {
		hi = min(hi, e.top)
	}
	return lo, hi
}

// At has no step in h, u and density where the equation ends; cp and cv have one as large as the two ideal
// parts differ, at the same cp − cv.
func (e extended) At(T, p float64) (thermo.Properties, error) {
	if !(T > e.top) {
		return e.Gas.At(T, p)
	}
	if err := e.check(T, p); err != nil {
		return thermo.Properties{}, err
	}
	return e.beyond(T, p)
}

func (e extended) beyond(T, p float64) (thermo.Properties, error) {
	res, r, err := e.Beyond(T, p)
	if err != nil {
		return thermo.Properties{}, err
	}
	cp, h := e.ideal.at(T)
	rt := r * T
	return thermo.Properties{
		Enthalpy:       rt*(h+res.U+res.Z-1) + e.offset,
		InternalEnergy: rt*(h+res.U-1) + e.offset,
		Cp:             r * (cp + res.Cp),
		Cv:             r * (cp - 1 + res.Cv),
		Density:        p / (res.Z * rt),
	}, nil
}

func (e extended) check(T, p float64) error {
	if err := e.Bounds().Check(e.Name(), T, p, "range of the ideal gas"); err != nil {
		return err
	}
	if p > beyondP {
		return &thermo.RangeError{Fluid: e.Name(), Quantity: "temperature", Value: T, Bound: e.top,
			Why: "range of the reference equation; only up to 10 MPa is it carried on"}
	}
	return nil
}

// Uncertainty is, above the highest temperature of the equation, that of the polynomials joined
// with a tenth of the residual and 0.03 B in cp, B = bp/(RT) the covolume's part; in density what
// it is where the equation ends joined with 0.1 B.
func (e extended) Uncertainty(T, p float64) (cp, density float64) {
	if !(T > e.top) {
		return e.Gas.Uncertainty(T, p)
	}
	res, _, _ := e.Beyond(T, p)
	ideal, _ := e.ideal.at(T)
	B := e.covolume * p / (thermo.R * T)
	_, density = e.Gas.Uncertainty(e.top, p)
	return math.Hypot(e.fit.at(T), 0.1*math.Abs(res.Cp)/(ideal+res.Cp)+0.03*B), math.Hypot(density, 0.1*B)
}
