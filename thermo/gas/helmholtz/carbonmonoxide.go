package helmholtz

// carbonMonoxide is the equation of state of carbon monoxide. Its paper's range,
// 68.16 to 500 K and to 100 MPa, and its paper's expanded uncertainty, density
// 0.3 %, cp 2 %, are from memory.
var carbonMonoxide = substance{
	formula: "CO", name: "carbon monoxide",
	source:    "Lemmon, Span, J. Chem. Eng. Data 51 (2006) 785",
	molarMass: 0.0280101, gasConstant: 8.314472,
	reducingT: 132.86, reducingDensity: 10850,
	criticalT: 132.86, criticalP: 3494000, tripleT: 68.16,
	maxT: 500, maxP: 100e6,
	stated: accuracy{cp: 0.02, ideal: 0.001, density: 0.003},
	ideal: idealTerms{
		logTau: 2.5,
		powers: []idealPower{
			{-9.111274701235156e-05, -1.5},
		},
		oscillators: []oscillator{
			{1.0128, 23.25003763359927, -1},
		},
	},
	powers: []power{
		{0.90554, 1, 0.25, 0},
		{-2.4515, 1, 1.125, 0},
		{0.53149, 1, 1.5, 0},
		{0.024173, 2, 1.375, 0},
		{0.072156, 3, 0.25, 0},
		{0.00018818, 7, 0.875, 0},
		{0.19405, 2, 0.625, 1},
		{-0.043268, 5, 1.75, 1},
		{-0.12778, 1, 3.625, 2},
		{-0.027896, 4, 3.625, 2},
		{-0.034154, 3, 14.5, 3},
		{0.016329, 4, 12, 3},
	},
	dew: curve{form: expOverT, scale: 3494000, T: 132.86, terms: []curveTerm{
		{0.0031655594711161982, 0.052},
		{-5.386279334978247, 0.968},
		{-0.44089436177701297, 1.972},
		{1.5403401817486662, 2.761},
		{-5.692323589833758, 4.199},
		{3.03081959067228, 5.126},
	}},
	vapour: curve{form: expOverT, scale: 10850, T: 132.86, terms: []curveTerm{
		{-3.6459289142239206, 0.444},
		{1.5167962228564473, 0.75},
		{-114.10174052209382, 1.847},
		{292.7876490687851, 2.04},
		{-183.6056308954516, 2.169},
		{4746.634272544051, 19.966},
	}},
	liquid: curve{form: plainForm, scale: 10850, T: 132.86, terms: []curveTerm{
		{3.973336124071812, 0.44},
		{-3.262687458485425, 0.672},
		{3.3499432070659303, 1.334},
		{-42.129174166388935, 3.874},
		{56.52859432308481, 4.413},
		{-110.70022756120696, 9.257},
	}},
}
