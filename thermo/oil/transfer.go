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

// Half-widths of what a data sheet says, as fractions, for rectangles: u = half-width/√3. Makers call their values typical,
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
	f, err := table.New(l.name, l.source, points, table.Options{
		Freezing: l.freezing, MaxP: maxPressure, CpUncertainty: l.cp / math.Sqrt(3), DensityUncertainty: l.density / math.Sqrt(3),
	})
	if err != nil || l.gravity == 0 {
		return f, err
	}
	return &mineral{f.(thermo.Compressed), cragoe(l.gravity)}, nil
}

// mineral is the table of a mineral oil, held against Cragoe's correlation.
type mineral struct {
	thermo.Compressed
	other quadratic
}

// Uncertainty is that of the table, but of cp at least the deviation from Cragoe's
// correlation at T over √3.
func (f *mineral) Uncertainty(T, p float64) (cp, density float64) {
	cp, density = f.Compressed.Uncertainty(T, p)
	if s, err := f.At(T, p); err == nil {
		cp = max(cp, math.Abs(f.other.at(T)/s.Cp-1)/math.Sqrt(3))
	}
	return cp, density
}
