package oil

import (
	"math"

	"heatreeve/thermo"
	"heatreeve/thermo/roster"
	"heatreeve/thermo/table"
)

// transferLiquid is a heat-transfer liquid by the table of its maker.
type transferLiquid struct {
	name, source string
	rows         [][4]float64
	freezing     float64 // K; 0 where it lies below the table
	cp, density  float64 // half-widths as fractions
	gravity      float64 // specific gravity of a mineral oil, 0 of others
}

// Half-widths of what a data sheet says, as fractions. Makers call their values typical,
// and state no tolerance: 3 % of cp for a synthetic of known composition, 5 % for a mineral
// oil, 1 % of density (common practice, no source). The eutectic's density has 0.5 % beside
// for its printing to 10 kg/m³.
const (
	syntheticCp, mineralCp    = 0.03, 0.05
	sheetDensity, coarsePrint = 0.01, 0.005
)

var transferLiquids = [...]transferLiquid{
	{
		name:   "diphenyl oxide/biphenyl eutectic",
		source: "Eastman, Therminol Heat Transfer Reference Disk v5.1 (2014), VP-1: 73.5 % diphenyl oxide, 26.5 % biphenyl",
		rows:   eutectic, freezing: 285.15, cp: syntheticCp, density: sheetDensity + coarsePrint,
	},
	{
		name: "modified terphenyl", source: "Eastman, Therminol Heat Transfer Reference Disk v5.1 (2014), 66",
		rows: terphenyl, cp: syntheticCp, density: sheetDensity,
	},
	{
		name: "mineral oil A", source: "Chevron, technical data sheet of Texatherm 22 (2004)",
		rows: mineralOilA, cp: mineralCp, density: sheetDensity, gravity: 0.8633,
	},
	{
		name: "mineral oil B", source: "Paratherm, thermal properties calculator v6.4 (2013), NF, hydrotreated mineral oil",
		rows: mineralOilB, cp: mineralCp, density: sheetDensity, gravity: 0.888,
	},
}

var alsoTransfer = map[string]string{
	"diphenyl oxide biphenyl eutectic": "diphenyl oxide/biphenyl eutectic", "diphenyl oxide/biphenyl": "diphenyl oxide/biphenyl eutectic",
	"biphenyl/diphenyl oxide": "diphenyl oxide/biphenyl eutectic", "biphenyl/diphenyl oxide eutectic": "diphenyl oxide/biphenyl eutectic",
	"terphenyl": "modified terphenyl",
}

// HeatTransferLiquids returns the names that [HeatTransfer] knows.
func HeatTransferLiquids() []string {
	var out []string
	for _, l := range transferLiquids {
		out = append(out, l.name)
	}
	return out
}

// HeatTransfer returns the heat-transfer liquid of that name, in any case, with spaces or
// hyphens. It boils by the vapour pressures of its table; of mineral oil B none are known.
// The error of an unknown name tells the near ones and all of them.
func HeatTransfer(name string) (thermo.Fluid, error) {
	k, err := roster.Find("heat-transfer liquid", name, HeatTransferLiquids(), alsoTransfer)
	if err != nil {
		return nil, err
	}
	l := &transferLiquids[k]
	points := make([]table.Point, len(l.rows))
	for k, r := range l.rows {
		points[k] = table.Point{T: r[0], Cp: r[1], Density: r[2], VapourPressure: r[3]}
	}
	f, err := table.New(l.name, l.source, points, table.Options{Freezing: l.freezing, MaxP: maxPressure})
	if err != nil {
		return nil, err
	}
	out := &transfer{Fluid: f, cp: l.cp, density: l.density / math.Sqrt(3)}
	if l.gravity > 0 {
		out.other = cragoe(l.gravity)
	}
	return out, nil
}

// transfer is a table with an uncertainty of its own.
type transfer struct {
	thermo.Fluid
	cp      float64   // half-width
	density float64   // standard uncertainty
	other   quadratic // cp of a mineral oil by Cragoe
}

// Uncertainty of cp takes 3 % for a synthetic liquid, 5 % for a mineral oil or, where that
// is more, its deviation from Cragoe's correlation at T; of density 1 %, 1.5 % for the
// eutectic: half-widths of rectangles, u = half-width/√3.
func (f *transfer) Uncertainty(T, p float64) (cp, density float64) {
	half := f.cp
	if f.other[0] != 0 {
		if s, err := f.At(T, p); err == nil {
			half = max(half, math.Abs(f.other.at(T)/s.Cp-1))
		}
	}
	return half / math.Sqrt(3), f.density
}
