package gas

import "math"

// Deviations of the ideal gas that are accepted, and the limits of pressure in
// Pa that they may lead to.
const (
	maxCpDeviation      = 0.015
	maxDensityDeviation = 0.02
	leastMaxP           = 120e3
	mostMaxP            = 3e6
)

// trust says how far the ideal gas goes for a real one: the relative deviations
// of cp and density per Pa from the reference equation of state at the temperature T. They grow
// in proportion to pressure, and with powers of T over the temperature: cold below T, hot above.
type trust struct {
	cp, density float64 // 1/Pa
	T           float64 // K
	cold, hot   float64
}

// The deviations of N2 to C3H8 and of NH3 are those of testdata/real-gas.csv,
// where each equation is named. H2O: IAPWS-95 at 400 K, 1 bar, since it is no gas
// at 300 K and 1 bar. All others: second virial coefficient in corresponding
// states (Pitzer and Curl, in the tests). The powers of H2O and NH3 are fitted to IAPWS-IF97 and
// to Gao et al. (2023); those of the other polar gases are a guess on the safe side.
var trusts = map[string]trust{
	"N2":    plain(0.00155e-5, 0.00018e-5),
	"O2":    plain(0.00169e-5, 0.00062e-5),
	"Ar":    plain(0.00228e-5, 0.00061e-5),
	"CO2":   plain(0.00785e-5, 0.00488e-5),
	"CO":    plain(0.00173e-5, 0.00034e-5),
	"H2O":   {0.0528e-5, 0.0108e-5, 400, 10, 5},
	"H2":    plain(0.00020e-5, 0.00058e-5),
	"He":    plain(0.00005e-5, 0.0005e-5),
	"CH4":   plain(0.00254e-5, 0.00169e-5),
	"C2H6":  plain(0.00661e-5, 0.00736e-5),
	"C3H8":  plain(0.0123e-5, 0.0157e-5),
	"C4H10": plain(0.0198e-5, 0.0289e-5),
	"C5H12": plain(0.0314e-5, 0.0479e-5),
	"C2H4":  plain(0.0067e-5, 0.0056e-5),
	"NH3":   {0.0336e-5, 0.0101e-5, 300, 7, 5},
	"SO2":   {0.029e-5, 0.0152e-5, 300, 7, 3},
	"H2S":   plain(0.0115e-5, 0.0075e-5),
	"NO":    plain(0.0027e-5, 0.0003e-5),
	"NO2":   {0.0565e-5, 0.0174e-5, 300, 7, 3},
	"N2O":   plain(0.0078e-5, 0.0053e-5),
	"HCl":   {0.0099e-5, 0.0053e-5, 300, 7, 3},
	"Cl2":   plain(0.0179e-5, 0.0122e-5),
}

// plain is a gas without a strong dipole.
func plain(cp, density float64) trust { return trust{cp, density, 300, 4, 2} }

// at returns the deviations per Pa at T in K.
func (t *trust) at(T float64) (cp, density float64) {
	power := t.hot
	if T < t.T {
		power = t.cold
	}
	steep := math.Pow(t.T/T, power)
	return t.cp * steep, t.density * steep
}

// fit is the relative standard uncertainty of the ideal cp: up to 600 K, and at
// 1500 K, with a straight line between them and beyond. At 200 K cold comes to it, and fades out
// up to 250 K.
type fit struct{ cool, hot, cold float64 }

// fits are the worst deviations from the tables in testdata/ideal-gas.csv over
// √3, but not below 0.1 %. Hydrogen here and in JANAF is at the equilibrium of ortho and para; the
// normal hydrogen of a plant has 0.6 % less cp at 200 K (Leachman et al. 2009). For water
// vapour the deviation from region 5 of IAPWS-IF97 counts, 0.46 % at 1500 K and 1.14 % at 2000 K.
var fits = map[string]fit{
	"N2":    {0.001, 0.001, 0},
	"O2":    {0.001, 0.001, 0},
	"Ar":    {0.001, 0.001, 0},
	"CO2":   {0.001, 0.001, 0},
	"CO":    {0.001, 0.001, 0},
	"H2O":   {0.001, 0.0047, 0},
	"H2":    {0.001, 0.001, 0.0035},
	"He":    {0.001, 0.001, 0},
	"CH4":   {0.0051, 0.0288, 0},
	"C2H6":  {0.0017, 0.0017, 0},
	"C3H8":  {0.0028, 0.0028, 0},
	"C4H10": {0.0027, 0.0027, 0},
	"C5H12": {0.001, 0.001, 0},
	"C2H4":  {0.001, 0.001, 0},
	"NH3":   {0.0029, 0.0053, 0.001},
	"SO2":   {0.0013, 0.0028, 0},
	"H2S":   {0.002, 0.0041, 0},
	"NO":    {0.001, 0.001, 0},
	"NO2":   {0.0068, 0.0124, 0},
	"N2O":   {0.001, 0.0075, 0},
	"HCl":   {0.001, 0.001, 0},
	"Cl2":   {0.001, 0.001, 0},
}

func (f fit) at(T float64) float64 {
	return f.cool + (f.hot-f.cool)*max(T-600, 0)/900 + f.cold*max(250-T, 0)/50
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
		sum.cold += weight * fits[c.formula].cold
	}
	return fit{sum.cool / whole, sum.hot / whole, sum.cold / whole}
}

// idealMaxP is the highest pressure in Pa at which the ideal gas is let pass. A mixture
// weighs the deviations of its parts by mole fraction.
func idealMaxP(parts []component) float64 {
	var cp, density float64
	for _, c := range parts {
		cp += c.share * trusts[c.formula].cp
		density += c.share * trusts[c.formula].density
	}
	p := min(maxCpDeviation/cp, maxDensityDeviation/density)
	return min(max(p, leastMaxP), mostMaxP)
}

// part is what the uncertainty of a mixture needs of a component.
type part struct {
	trust
	share     float64
	criticalT float64 // K
}

func partsOf(parts []component) []part {
	var out []part
	for _, c := range parts {
		out = append(out, part{trusts[c.formula], c.share, critical[c.formula].T})
	}
	return out
}
