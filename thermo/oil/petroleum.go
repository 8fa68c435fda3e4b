package oil

import (
	"fmt"
	"math"

	"heatreeve/thermo"
)

const (
	minWatson, maxWatson = 10.0, 13.0
	minPetroleumT        = 255.15 // K
	maxPetroleumT        = 423.15 // K
	cpHalfWidth          = 0.05   // fraction: correlations agree by chance
)

type petroleum struct {
	name, source string
	cp           quadratic
	others       []quadratic // the correlations that cp is held against
	density15    float64
	alpha        float64   // 1/K
	alphas       []float64 // of the other groups that it may belong to
	maxT         float64
	ends         string   // what maxT is
	boiling      *boiling // nil where it is not known
	minP         float64  // Pa; below it boils at minPetroleumT
	boilsBelow   float64  // Pa; from there on it boils beyond maxT
	stiff        thermo.Incompressible
}

// Petroleum returns the petroleum liquid of a density in kg/m³ at 15 °C, which must lie
// within the range of its group.
//
// watson is its Watson factor, 10 to 13, for the cp of Kesler and Lee up to a reduced
// temperature of 0.85, and for the vapour pressure: it ends 30 K before a substance of its
// mean boiling point boils, and its light ends may boil earlier still. With 0 it is not
// known. Then cp is Cragoe's for specific gravities from 0.75 to 0.96; beyond, from 0.70 to
// 1.05, it is that of Kesler and Lee at a Watson factor usual in the group, and what it
// would be from 10 to 12.7 goes into the uncertainty. When it boils is not known either.
//
// groupName is the product group of ASTM D1250 (see [Groups] and [Group]). With "" it is
// that one of the distillates into which the density falls, and what it would be by the
// other groups goes into the uncertainty of density.
func Petroleum(density15, watson float64, groupName string) (thermo.Fluid, error) {
	g, err := groupFor(density15, groupName)
	if err != nil {
		return nil, fmt.Errorf("petroleum: %w", err)
	}
	f := &petroleum{
		name: fmt.Sprintf("petroleum %.6g kg/m³", density15), density15: density15, alpha: g.alpha(density15),
		maxT: maxPetroleumT, ends: "range of ASTM D1250-80",
	}
	if groupName == "" {
		f.alphas = otherAlphas(density15, g)
	} else {
		f.name = fmt.Sprintf("%s %.6g kg/m³", g.name, density15)
	}
	if err := f.setHeat(g, g.specificGravity(density15), watson); err != nil {
		return nil, fmt.Errorf("%s: %w", f.name, err)
	}
	f.source += ", density by ASTM D1250-80 within the limits of API MPMS 11.1 (2004) for " + g.name
	if f.boiling == nil {
		f.source += ", boiling not known"
	} else {
		f.source += ", boiling by Lee and Kesler, AIChE Journal 21 (1975)"
	}
	_, hi := f.Span(maxPressure)
	hi = min(hi, f.maxT)
	f.stiff = thermo.NewIncompressible((minPetroleumT+hi)/2, minPetroleumT, hi, f.density)
	return f, nil
}

func otherAlphas(rho15 float64, chosen *group) (alphas []float64) {
	for k := range groups {
		g := &groups[k]
		if r := g.rho60(rho15); g != chosen && r >= g.minRho60 && r <= g.maxRho60 {
			alphas = append(alphas, g.alpha(rho15))
		}
	}
	return alphas
}

// density is ρ in kg/m³ at T in K, and dρ/dT: with ρ = ρ15 exp(−x (1 + 0.8 x)), x = α (T −
// 15 °C), that is −ρ α (1 + 1.6 x).
func (f *petroleum) density(T float64) (rho, slope float64) {
	rho = f.density15 * correction(f.alpha, T-fifteenC)
	return rho, -rho * f.alpha * (1 + 1.6*f.alpha*(T-fifteenC))
}

// PressureLaw is that of an incompressible fluid.
func (f *petroleum) PressureLaw() thermo.PressureLaw { return f.stiff.PressureLaw() }

func (f *petroleum) Name() string        { return f.name }
func (f *petroleum) Source() string      { return f.source }
func (f *petroleum) Phase() thermo.Phase { return thermo.Liquid }

// MolarMass is 0: it is not known.
func (f *petroleum) MolarMass() float64 { return 0 }

func (f *petroleum) Bounds() thermo.Bounds {
	return thermo.Bounds{MinT: minPetroleumT, MaxT: f.maxT, MinP: f.minP, MaxP: maxPressure}
}

// Span ends 30 K before a substance of the cut's mean boiling point boils, where the Watson
// factor is known and that lies within the range; it begins nowhere, as no pour point is
// modelled.
func (f *petroleum) Span(p float64) (lo, hi float64) {
	switch {
	case f.boiling == nil || p >= f.boilsBelow:
		return 0, math.Inf(1)
	case !(p >= f.minP):
		return 0, minPetroleumT
	}
	return 0, f.boiling.temperature(p) - boilingMargin
}

func (f *petroleum) At(T, p float64) (thermo.Properties, error) {
	if err := f.Bounds().Check(f.name, T, p, f.why(T, p)); err != nil {
		return thermo.Properties{}, err
	}
	if p < f.boilsBelow && f.boiling.pressure(T+boilingMargin) > p {
		return thermo.Properties{}, f.boils(T, p)
	}
	h := f.cp.integral(T) - f.cp.integral(fifteenC)
	return f.stiff.Properties(p, h, f.cp.at(T), f.density15*correction(f.alpha, T-fifteenC)), nil
}

func (f *petroleum) boils(T, p float64) error {
	_, bound := f.Span(p)
	return &thermo.RangeError{
		Fluid: f.name, Quantity: "temperature", Value: T, Bound: bound,
		Why: "boiling point of a substance like it at this pressure, less 30 K for its light ends",
	}
}

func (f *petroleum) why(T, p float64) string {
	switch {
	case T > f.maxT:
		return f.ends
	case T >= minPetroleumT && p < f.minP:
		return "it boils at any temperature of its range"
	}
	return "range of ASTM D1250-80"
}

// Uncertainty of cp takes the widest of the other three correlations' deviations at T, but
// at least 5 %, for the half-width of a rectangle, u = half-width/√3. Where the Watson
// factor is not known, they are worked for 11 and for 12.7.
//
// That of density is the root sum of squares of three: the precision of the volume
// correction, at 95 % 0.05 % up to 38 °C and 0.1 % more for every 28 K above (ASTM
// D1250-80, from memory), halved; as rectangles the widest deviation of the other groups
// where none was named; and the compression from 1 atm that is left out (see
// compressibility). The density at 15 °C is taken for exact.
func (f *petroleum) Uncertainty(T, p float64) (cp, density float64) {
	half, at := cpHalfWidth, f.cp.at(T)
	for k := range f.others {
		half = max(half, math.Abs(f.others[k].at(T)/at-1))
	}
	var other float64
	for _, a := range f.alphas {
		other = max(other, math.Abs(correction(a, T-fifteenC)/correction(f.alpha, T-fifteenC)-1))
	}
	const hundredF, fiftyF = 310.93, 27.78 // K
	precision := (0.0005 + 0.001*max(0, T-hundredF)/fiftyF) / 2
	compressed := compressibility(f.density15, T) * math.Abs(p-thermo.Atmosphere)
	half += f.stiff.CpChange(p) / at
	return half / math.Sqrt(3), math.Sqrt(precision*precision + (other*other+compressed*compressed)/3)
}
