package seawater

import (
	"math"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

// naive works density, cp and enthalpy for one state as the papers print them, the enthalpy by
// Simpson's rule over cp.
func naive(salinity float64) func(T, p float64) (thermo.Properties, error) {
	return func(T, p float64) (thermo.Properties, error) {
		const steps = 8
		sum, width := 0.0, (T-zero-base)/steps
		for k := range steps + 1 {
			weight := []float64{2, 4}[k%2]
			if k == 0 || k == steps {
				weight = 1
			}
			sum += weight * naiveCp(salinity, zero+base+float64(k)*width, p)
		}
		return thermo.Properties{
			Enthalpy: sum*width/3 + (p-atmosphere)*naivePressureTerm(salinity),
			Cp:       naiveCp(salinity, T, p), Density: naiveDensity(salinity, T, p),
		}, nil
	}
}

func naiveCp(salinity, T, p float64) float64 {
	g, t, mega := 1e3*salinity, T-zero, (p-atmosphere)/1e6
	var cp float64
	for i, c := range jamieson {
		cp += 1e3 * (c[0] + c[1]*g + c[2]*math.Pow(g, 2)) * math.Pow(scale1968*T, float64(i))
	}
	for i, c := range nayarCp {
		cp += mega * (c[0] + c[1]*g) * math.Pow(t, float64(i))
	}
	return cp
}

func naiveDensity(salinity, T, p float64) float64 {
	g, t, mega, one := 1e3*salinity, T-zero, p/1e6, atmosphere/1e6
	rho := saltier * math.Pow(salinity, 2) * math.Pow(t, 2)
	for i := range fresh {
		rho += (fresh[i] + salinity*salt[i]) * math.Pow(t, float64(i))
	}
	var squeeze float64
	for i, c := range nayarSqueeze {
		squeeze += c * math.Pow(t, float64(i))
	}
	for i, c := range nayarSalt {
		squeeze += g * c * math.Pow(t, float64(i))
	}
	relief := nayarSaltRelief * g
	for i, c := range nayarRelief {
		relief += c * math.Pow(t, float64(i))
	}
	return rho * math.Exp(squeeze*(mega-one)+relief*(math.Pow(mega, 2)-math.Pow(one, 2))/2)
}

// naivePressureTerm is v − T dv/dT at the base, by a central difference.
func naivePressureTerm(salinity float64) float64 {
	const T, d = zero + base, 0.1
	v := func(T float64) float64 { return 1 / naiveDensity(salinity, T, atmosphere) }
	return v(T) - T*(v(T+d)-v(T-d))/(2*d)
}

// The printed form holds the one that is worked out per salinity, over the whole range.
func TestAgainstPrintedForm(t *testing.T) {
	got := fluidtest.Deviations{}
	for _, salinity := range []float64{0, 0.01, 0.035, 0.12} {
		f, printed := mustNew(t, salinity), naive(salinity)
		for T := zero; T <= maxT; T += 8 {
			for _, p := range []float64{250e3, 2e6, maxP} {
				a := mustAt(t, f, T, p)
				b, _ := printed(T, p)
				at := []float64{salinity, T, p}
				got.Check(t, at, "cp", a.Cp/b.Cp-1, 1e-12)
				got.Check(t, at, "density", a.Density/b.Density-1, 1e-12)
				got.Check(t, at, "h in J/kg", a.Enthalpy-b.Enthalpy, 1e-3) // the difference of 0.1 K in the pressure term
			}
		}
	}
	t.Logf("worst deviations: %s", got)
}
