package helmholtz

// dryAir is the equation of state of dry air. Its paper's range, 59.75 to 2000 K
// and to 2000 MPa, as one pure substance of fixed composition, and its paper's
// expanded uncertainty, density 0.1 %, cp 1 %, are from memory.
var dryAir = substance{
	formula: "", name: "dry air",
	source:    "Lemmon, Jacobsen, Penoncello, Friend, J. Phys. Chem. Ref. Data 29 (2000) 331",
	molarMass: 0.02896546, gasConstant: 8.31451,
	reducingT: 132.6312, reducingDensity: 10447.7,
	criticalT: 132.5306, criticalP: 3786000, tripleT: 59.75,
	maxT: 2000, maxP: 100e6,
	stated: accuracy{cp: 0.01, ideal: 0.001, density: 0.001},
	ideal: idealTerms{
		logTau: 2.490888032,
		powers: []idealPower{
			{6.057194e-08, -3},
			{-2.10274769e-05, -2},
			{-0.000158860716, -1},
			{-0.00019536342, 1.5},
		},
		oscillators: []oscillator{
			{0.791309509, 25.36365, -1},
			{0.212236768, 16.90741, -1},
			{-0.197938904, 87.31279, 2. / 3},
		},
	},
	powers: []power{
		{0.118160747229, 1, 0, 0},
		{0.713116392079, 1, 0.33, 0},
		{-1.61824192067, 1, 1.01, 0},
		{0.0714140178971, 2, 0, 0},
		{-0.0865421396646, 3, 0, 0},
		{0.134211176704, 3, 0.15, 0},
		{0.0112626704218, 4, 0, 0},
		{-0.0420533228842, 4, 0.2, 0},
		{0.0349008431982, 4, 0.35, 0},
		{0.000164957183186, 6, 1.35, 0},
		{-0.101365037912, 1, 1.6, 1},
		{-0.17381369097, 3, 0.8, 1},
		{-0.0472103183731, 5, 0.95, 1},
		{-0.0122523554253, 6, 1.25, 1},
		{-0.146629609713, 1, 3.6, 2},
		{-0.0316055879821, 3, 6, 2},
		{0.000233594806142, 11, 3.25, 2},
		{0.0148287891978, 1, 3.5, 3},
		{-0.00938782884667, 3, 15, 3},
	},
	dew: curve{form: expOverT, scale: 3785020, T: 132.6312, terms: []curveTerm{
		{-0.1567266, 0.5},
		{-5.539635, 1},
		{0.7567212, 2.5},
		{-3.514322, 4},
	}},
	vapour: curve{form: expForm, scale: 10447.7, T: 132.6312, terms: []curveTerm{
		{-2.0466, 0.41},
		{-4.752, 1},
		{-13.259, 2.8},
		{-47.652, 6.5},
	}},
}
