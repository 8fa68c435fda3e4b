package solid

import "heatreeve/thermo/table"

// handbookSolid has cp in J/(kg K) and density in kg/m³ at one temperature, of the kind
// that appendix A of Incropera, Fundamentals of Heat and Mass Transfer, gives at 300 K. All
// of them are from memory.
type handbookSolid struct {
	name       string
	kind       *kind
	cp         float64
	density    float64
	at         float64 // K
	minT, maxT float64 // K
	melting    float64 // K; 0 where none is known or it chars first
}

// kind is what solids of a sort have in common: half-widths as fractions, and the drift of
// cp a kelvin.
type kind struct{ cp, drift, density float64 }

var (
	metal   = &kind{cp: 0.05, drift: 0.0008, density: 0.05}
	mineral = &kind{cp: 0.05, drift: 0.002, density: 0.05}
	loose   = &kind{cp: 0.05, drift: 0.002, density: 0.1}
	organic = &kind{cp: 0.1, drift: 0.004, density: 0.1}
	frozen  = &kind{cp: 0.05, drift: 0.004, density: 0.05}
)

const freezing, boiling = 273.15, 373.15 // K, of water: the range of most

// Ice melts 7 mK earlier at 2 bar, and is held below that pressure for it.
const maxPressureOfIce = 2e5 // Pa

var handbook = [...]handbookSolid{
	{"stainless steel 304", metal, 477, 7900, 300, 250, 400, 0},
	{"brass 70/30", metal, 380, 8530, 300, 250, 400, 0},
	{"lead", metal, 129, 11340, 300, 250, 400, 600.61},
	{"soda-lime glass", mineral, 835, 2500, 300, freezing, boiling, 0},
	{"common brick", loose, 835, 1920, 300, freezing, boiling, 0},
	{"dry sand", loose, 800, 1515, 300, freezing, boiling, 0},
	{"bituminous coal", organic, 1260, 1350, 300, freezing, boiling, 0},
	{"paper", organic, 1340, 930, 300, freezing, boiling, 0},
	{"oak wood", organic, 2385, 545, 300, freezing, boiling, 0},
	{"ice", frozen, 2040, 920, freezing, 243.15, freezing, freezing},
	{"high-density polyethylene", organic, 1900, 950, 300, freezing, 343.15, 403},
	{"granite", mineral, 775, 2630, 300, freezing, boiling, 0},
}

func (s *handbookSolid) make() description {
	d := description{
		name: s.name, source: "handbook value near 300 K, taken for constant (from memory)",
		points:  []table.Point{{T: s.at, Cp: s.cp, Density: s.density}},
		options: table.Options{MinT: s.minT, MaxT: s.maxT, Boiling: s.melting},
		cpHalf:  s.kind.cp, drift: s.kind.drift, at: s.at, densityHalf: s.kind.density,
	}
	if s.kind == frozen {
		d.options.MaxP, d.source = maxPressureOfIce, "handbook value at 273 K, taken for constant (from memory)"
	}
	return d
}
