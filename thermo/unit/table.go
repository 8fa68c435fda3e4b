package unit

import "heatreeve/thermo"

// Exact definitions that the factors are built from.
const (
	inch     = 0.0254     // m, NIST SP 811
	foot     = 12 * inch  // m
	pound    = 0.45359237 // kg, NIST SP 811
	gn       = 9.80665    // m/s², standard gravity, CGPM 1901
	atm      = 101325.0   // Pa, CGPM 1954
	galUS    = 231 * inch * inch * inch
	galUK    = 4.54609e-3    // m³, NIST SP 811
	btu      = 1055.05585262 // J, International Table
	calIT    = 4.1868        // J, International Table
	rankine  = 1 / 1.8       // K
	fOffset  = 459.67 / 1.8  // K at 0 °F
	minute   = 60.0          // s
	hour     = 3600.0        // s
	day      = 86400.0       // s
	psi      = pound * gn / (inch * inch)
	mercury  = 13595.1 * gn   // Pa per metre of mercury, conventional
	mercuryI = mercury * inch // Pa per inch
)

// Moles in a cubic metre of ideal gas at the reference states.
const (
	normal   = atm / (thermo.R * 273.15)              // DIN 1343: 0 °C, 101.325 kPa
	standard = atm / (thermo.R * 288.15)              // ISO 13443: 15 °C, 101.325 kPa
	scf60    = atm / (thermo.R * (60 + 459.67) / 1.8) // 60 °F, 14.696 psia, which is 1 atm rounded
	scf68    = atm / (thermo.R * 293.15)              // 68 °F, 14.696 psia, which is 1 atm rounded
	cubicFt  = foot * foot * foot                     // m³
)

const (
	nist    = "NIST SP 811 (2008), appendix B"
	si      = "SI"
	din     = "DIN 1343: 0 °C, 101.325 kPa; ideal gas, R of CODATA 2018"
	iso     = "ISO 13443: 15 °C, 101.325 kPa; ideal gas, R of CODATA 2018"
	absNote = "absolute; for a gauge pressure write the g, as in barg"
	gNote   = "gauge: the barometric pressure is added to get the absolute pressure"
	inSize  = "IEC 80000-13"
)

// row is one unit and the other names under which it is found.
type row struct {
	Unit
	also []string
}

func (r row) names() []string { return append([]string{r.Symbol}, r.also...) }

func rows(d Dimension, rs ...row) []row {
	for i := range rs {
		rs[i].Dimension = d
	}
	return rs
}

func is(symbol string, factor float64, source string, also ...string) row {
	return row{Unit{Symbol: symbol, Factor: factor, Source: source}, also}
}

func (r row) from(offset float64) row { r.Offset = offset; return r }
func (r row) gauge() row              { r.Gauge = true; r.Note = gNote; return r }
func (r row) noting(text string) row  { r.Note = text; return r }
