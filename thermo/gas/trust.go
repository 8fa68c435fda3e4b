package gas

import (
	"math"

	"heatreeve/thermo"
)

// Deviations of the ideal gas that are accepted, and the limits of pressure in
// Pa that they may lead to.
const (
	maxCpDeviation      = 0.015
	maxDensityDeviation = 0.02
	leastMaxP           = 120e3
	mostMaxP            = 3e6
)

// trust says how far the ideal gas goes for a real one: the relative deviations
// of cp and density per Pa from the reference equation of state, at 300 K and 1
// bar. They grow in proportion to pressure and fall steeply as the gas gets
// hotter.
type trust struct{ cp, density float64 } // 1/Pa

// The deviations of N2 to C3H8 and of NH3 are those of testdata/real-gas.csv,
// where each equation is named. H2O: IAPWS-95 at 400 K, 1 bar, since it is no gas
// at 300 K and 1 bar. All others: second virial coefficient in corresponding
// states, see [criticalPoint.virial].
var trusts = map[string]trust{
	"N2":    {0.00155e-5, 0.00018e-5},
	"O2":    {0.00169e-5, 0.00062e-5},
	"Ar":    {0.00228e-5, 0.00061e-5},
	"CO2":   {0.00785e-5, 0.00488e-5},
	"CO":    {0.00173e-5, 0.00034e-5},
	"H2O":   {0.0528e-5, 0.0108e-5},
	"H2":    {0.00020e-5, 0.00058e-5},
	"He":    {0.00005e-5, 0.0005e-5},
	"CH4":   {0.00254e-5, 0.00169e-5},
	"C2H6":  {0.00661e-5, 0.00736e-5},
	"C3H8":  {0.0123e-5, 0.0157e-5},
	"C4H10": {0.0198e-5, 0.0289e-5},
	"C5H12": {0.0314e-5, 0.0479e-5},
	"C2H4":  {0.0067e-5, 0.0056e-5},
	"NH3":   {0.0336e-5, 0.0101e-5},
	"SO2":   {0.029e-5, 0.0152e-5},
	"H2S":   {0.0115e-5, 0.0075e-5},
	"NO":    {0.0027e-5, 0.0003e-5},
	"NO2":   {0.0565e-5, 0.0174e-5},
	"N2O":   {0.0078e-5, 0.0053e-5},
	"HCl":   {0.0099e-5, 0.0053e-5},
	"Cl2":   {0.0179e-5, 0.0122e-5},
}

// fit is the relative standard uncertainty of the ideal cp: up to 600 K, and at
// 1500 K, with a straight line between them and beyond.
type fit struct{ cool, hot float64 }

// fits are the worst deviations from the tables in testdata/ideal-gas.csv over
// √3, but not below 0.1 %.
var fits = map[string]fit{
	"N2":    {0.001, 0.001},
	"O2":    {0.001, 0.001},
	"Ar":    {0.001, 0.001},
	"CO2":   {0.001, 0.001},
	"CO":    {0.001, 0.001},
	"H2O":   {0.001, 0.0028},
	"H2":    {0.001, 0.001},
	"He":    {0.001, 0.001},
	"CH4":   {0.0051, 0.0288},
	"C2H6":  {0.0017, 0.0017},
	"C3H8":  {0.0028, 0.0028},
	"C4H10": {0.0027, 0.0027},
	"C5H12": {0.001, 0.001},
	"C2H4":  {0.001, 0.001},
	"NH3":   {0.0024, 0.0053},
	"SO2":   {0.0013, 0.0028},
	"H2S":   {0.002, 0.0041},
	"NO":    {0.001, 0.001},
	"NO2":   {0.0068, 0.0124},
	"N2O":   {0.001, 0.0075},
	"HCl":   {0.001, 0.001},
	"Cl2":   {0.001, 0.001},
}

func (f fit) at(T float64) float64 {
	return f.cool + (f.hot-f.cool)*max(T-600, 0)/900
}

// fitOf joins the uncertainties of the parts as if all were off to the same side,
// each by its part of the heat capacity.
func fitOf(parts []component) fit {
	var sum fit
	var whole float64
	for _, c := range parts {
		cp, _ := c.low.at(600)
		weight := c.share * cp
		whole += weight
		sum.cool += weight * fits[c.formula].cool
		sum.hot += weight * fits[c.formula].hot
	}
	return fit{sum.cool / whole, sum.hot / whole}
}

// trustOf weighs the deviations of the parts by mole fraction.
func trustOf(parts []component) trust {
	var t trust
	for _, c := range parts {
		k := trusts[c.formula]
		t.cp += c.share * k.cp
		t.density += c.share * k.density
	}
	return t
}

// maxP is the highest pressure in Pa at which the ideal gas is let pass.
func (t trust) maxP() float64 {
	p := min(maxCpDeviation/t.cp, maxDensityDeviation/t.density)
	return min(max(p, leastMaxP), mostMaxP)
}

// at returns the standard uncertainties of taking a gas for ideal. The heat
// capacity comes nearer to ideal with the square of the temperature at the
// least, and leaves it below 300 K with the fourth power at the most. The density of a hot
// gas is off the other way, by the volume that the molecules fill, covolume in m³/mol.
// Deviations that may lie anywhere up to their largest value have that value
// over √3.
func (t trust) at(T, p, covolume float64) (cp, density float64) {
	cool := 300 / T
	steep := cool * cool
	if T < 300 {
		steep *= steep
	}
	cp = t.cp * p * steep
	density = t.density*p*steep + covolume*p/(thermo.R*T)
	return cp / math.Sqrt(3), density / math.Sqrt(3)
}
