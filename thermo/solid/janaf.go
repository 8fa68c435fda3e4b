package solid

import "heatreeve/thermo/table"

// janafSolid is a pure substance by the NIST-JANAF Thermochemical Tables, 4th edition
// (1998). A row is a temperature in K, cp in J/(kg K) and the enthalpy above that at 298.15
// K in J/kg, the molar values of the table over the molar mass in kg/mol. Density in kg/m³
// and melting point in K are handbook values from memory (those of aluminium and copper are
// fixed points of ITS-90).
type janafSolid struct {
	name, table      string
	molarMass        float64
	density, melting float64
	rows             [][3]float64
}

// janafHalfWidth is that of cp as a fraction: 1 %, from memory for metals near and above
// room temperature.
const janafHalfWidth = 0.01

// Quartz ends before its change from α to β near 847 K, across which the table's own
// enthalpy rises by a tenth more than the area under its cp.
var janaf = [...]janafSolid{
	{
		name: "aluminium", table: "Al-002", molarMass: 0.0269815, density: 2699, melting: 933.473,
		rows: [][3]float64{
			{200, 790.84, -83538.6}, {250, 855.55, -42251.1}, {298.15, 897.24, 0}, {350, 930.75, 47439.8},
			{400, 955.62, 94620.3}, {450, 976.04, 142912.5}, {500, 994.83, 192205.5}, {600, 1033.52, 293571.1},
			{700, 1078.52, 399124.8}, {800, 1132.7, 509570.6}, {900, 1197.41, 625983.6},
		},
	},
	{
		name: "copper", table: "Cu-002", molarMass: 0.063546, density: 8933, melting: 1357.77,
		rows: [][3]float64{
			{200, 356.14, -36587.7}, {250, 374.25, -18286.0}, {298.15, 384.63, 0}, {350, 393.02, 20174.4},
			{400, 398.42, 39955.3}, {450, 404.21, 60035.3}, {500, 407.77, 80335.5}, {600, 416.72, 121565.5},
			{700, 424.83, 163645.2}, {800, 432.66, 206511.8}, {900, 441.4, 250196.7},
		},
	},
	{
		name: "iron", table: "Fe-004", molarMass: 0.055845, density: 7870, melting: 1811,
		rows: [][3]float64{
			{200, 386.57, -41454.0}, {250, 425.14, -21076.2}, {298.15, 449.35, 0}, {350, 470.71, 23869.6},
			{400, 490.39, 47882.5}, {450, 510.66, 72916.1}, {500, 531.86, 98970.4}, {600, 573.89, 154230.5},
			{700, 619.61, 213788.2}, {800, 679.54, 278503.0}, {900, 771.69, 350649.1},
		},
	},
	{
		name: "quartz", table: "O-037", molarMass: 0.0600843, density: 2650, melting: 0,
		rows: [][3]float64{
			{200, 543.22, -63577.3}, {298.15, 742.11, 0}, {400, 889.25, 83499.4}, {500, 992.66, 177850.1},
			{600, 1072.11, 281204.9}, {700, 1144.53, 392015.9}, {800, 1226.63, 510416.2},
		},
	},
	{
		name: "alumina", table: "Al-096", molarMass: 0.101961, density: 3970, melting: 2327,
		rows: [][3]float64{
			{200, 501.37, -63749.7}, {298.15, 774.95, 0}, {400, 942.38, 88219.7}, {500, 1040.89, 187767.3},
			{600, 1103.8, 295219.9}, {700, 1146.77, 407860.6}, {800, 1178.24, 524189.1}, {900, 1203.03, 643293.1},
		},
	},
}

func (s *janafSolid) make() description {
	points, enthalpies := make([]table.Point, len(s.rows)), make([]float64, len(s.rows))
	for k, row := range s.rows {
		points[k], enthalpies[k] = table.Point{T: row[0], Cp: row[1], Density: s.density}, row[2]
	}
	return description{
		name: s.name, source: "NIST-JANAF Thermochemical Tables, 4th edition (1998), table " + s.table + "; density from memory",
		points:  points,
		options: table.Options{Boiling: s.melting, MolarMass: s.molarMass, Enthalpies: enthalpies},
		cpHalf:  janafHalfWidth, densityHalf: densityHalfWidth,
	}
}
