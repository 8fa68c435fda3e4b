package gas

import (
	"math"

	"heatreeve/thermo"
)

// criticalPoint of a species: temperature in K, pressure in Pa, acentric factor.
type criticalPoint struct{ T, p, omega float64 }

// critical points by the reference equation of state of each gas: Span et al. (2000) for N2;
// Schmidt and Wagner (1985) O2; Tegeler et al. (1999) Ar; Span and Wagner (1996) CO2;
// Lemmon and Span (2006) CO, H2S, N2O; Wagner and Pruß (2002) H2O; Leachman et al. (2009) H2;
// Ortiz-Vega et al. (2023) He; Setzmann and Wagner (1991) CH4; Bücker and Wagner (2006) C2H6,
// C4H10; Lemmon et al. (2009) C3H8; Thol et al. (2019) C5H12; Smukala et al. (2000) C2H4;
// Gao et al. (2023) NH3; Gao et al. (2016) SO2; Thol et al. (2018) HCl; Thol et al. (2021) Cl2;
// Gmehling et al., PSRK revision 4, for NO and NO2.
var critical = map[string]criticalPoint{
	"N2":    {126.192, 3395800, 0.0372},
	"O2":    {154.581, 5043000, 0.0222},
	"Ar":    {150.687, 4863000, -0.00219},
	"CO2":   {304.1282, 7377300, 0.22394},
	"CO":    {132.86, 3494000, 0.0497},
	"H2O":   {647.096, 22.064e6, 0.34429},
	"H2":    {33.145, 1296400, -0.219},
	"He":    {5.1953, 228326.1, -0.38354},
	"CH4":   {190.564, 4599200, 0.01142},
	"C2H6":  {305.322, 4872200, 0.099},
	"C3H8":  {369.89, 4251200, 0.1521},
	"C4H10": {425.125, 3796000, 0.20081},
	"C5H12": {469.7, 3367519, 0.25103},
	"C2H4":  {282.35, 5041800, 0.0866},
	"NH3":   {405.56, 11363390, 0.25569},
	"SO2":   {430.64, 7886588, 0.25613},
	"H2S":   {373.1, 9000000, 0.1005},
	"NO":    {180, 6479997, 0.588},
	"NO2":   {431, 10132500, 0.8555},
	"N2O":   {309.52, 7245000, 0.1613},
	"HCl":   {324.55, 8291521, 0.12965},
	"Cl2":   {416.8654, 7642388, 0.07},
}

// vapourTemperature in K at the pressure p in Pa draws log p over 1/T as the straight line
// through the critical point and the point that defines the acentric factor, Tr =
// 0.7: within 1.5 K at atmospheric pressure. Above the critical pressure it runs on,
// between the gas and the dense fluid, as far as twice the critical temperature.
func (c criticalPoint) vapourTemperature(p float64) float64 {
	x := math.Log10(p/c.p) / (7.0 / 3 * (1 + c.omega))
	return c.T / (1 - min(x, 0.5))
}

// vapourLine is ln(x/ps) of a component as a straight line in y = 1/T, see
// [criticalPoint.vapourTemperature]: start + slope·y.
type vapourLine struct{ start, slope float64 }

func (c criticalPoint) line(share float64) vapourLine {
	k := 7.0 / 3 * (1 + c.omega) * math.Ln10
	return vapourLine{math.Log(share/c.p) - k, k * c.T}
}

// ratio is x·p/ps.
func (l vapourLine) ratio(logP, y float64) float64 { return math.Exp(logP + l.start + l.slope*y) }

// covolume b of Peng and Robinson in m³/mol.
func (c criticalPoint) covolume() float64 { return omegaB * thermo.R * c.T / c.p }
