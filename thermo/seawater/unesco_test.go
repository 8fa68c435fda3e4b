package seawater

import (
	"math"
	"testing"

	"heatreeve/thermo/fluidtest"
)

// unesco is cp at one atmosphere in J/(kg K), from practical salinity and T in K: F. J.
// Millero, G. Perron and J. E. Desnoyers (1973) as in UNESCO Technical Papers in Marine Science
// 44 (1983), 0 °C to 40 °C and salinity to 40.
func unesco(practical, T float64) float64 {
	t := scale1968 * (T - zero)
	return 4217.4 + t*(-3.720283+t*(0.1412855+t*(-2.654387e-3+t*2.093236e-5))) +
		practical*(-7.643575+t*(0.1072763-t*1.38385e-3)) +
		math.Pow(practical, 1.5)*(0.1770383+t*(-4.07718e-3+t*5.148e-5))
}

// Values as published beside that formula: UNESCO 44 for salinity 40; Pond and Pickard,
// Introductory Dynamical Oceanography, 2nd edition (1986), for the others. Our cp is another
// correlation and stands within 0.20 % of them.
func TestPublishedValuesOfUNESCO(t *testing.T) {
	got := fluidtest.Deviations{}
	for _, tt := range []struct{ practical, t68, cp float64 }{
		{25, 0, 4048.44}, {25, 10, 4041.83}, {25, 20, 4044.84}, {25, 30, 4049.1}, {25, 40, 4051.22},
		{35, 0, 3986.53}, {35, 10, 3986.34}, {35, 20, 3993.85}, {35, 30, 4000.68}, {35, 40, 4003.46}, {40, 40, 3980.051},
	} {
		T := zero + tt.t68/scale1968
		got.Check(t, tt, "formula of UNESCO in J/(kg K)", unesco(tt.practical, T)-tt.cp, 0.005)
		f := mustNew(t, tt.practical*35.16504/35e3)
		got.Check(t, tt, "cp", mustAt(t, f, T, atmosphere).Cp/tt.cp-1, 2.0e-3)
	}
	t.Logf("worst deviations, relative where no unit stands: %s", got)
}
