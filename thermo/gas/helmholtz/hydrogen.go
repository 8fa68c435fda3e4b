package helmholtz

// hydrogen is the equation of state of hydrogen. Its paper's range, 13.957 to
// 1000 K and to 2000 MPa, of normal hydrogen (3 ortho : 1 para), and its paper's
// expanded uncertainty, density 0.1 %, cp 1 %, are from memory.
var hydrogen = substance{
	formula: "H2", name: "hydrogen",
	source:    "Leachman, Jacobsen, Penoncello, Lemmon, J. Phys. Chem. Ref. Data 38 (2009) 721, normal hydrogen",
	molarMass: 0.00201588, gasConstant: 8.314472,
	reducingT: 33.145, reducingDensity: 15508,
	criticalT: 33.145, criticalP: 1296400, tripleT: 13.957,
	maxT: 1000, maxP: 100e6,
	stated: accuracy{cp: 0.01, ideal: 0.002, density: 0.001},
	ideal: idealTerms{
		logTau: 1.5,
		oscillators: []oscillator{
			{1.616, 531 / 33.145, -1},
			{-0.4117, 751 / 33.145, -1},
			{-0.792, 1989 / 33.145, -1},
			{0.758, 2484 / 33.145, -1},
			{1.217, 6859 / 33.145, -1},
		},
	},
	powers: []power{
		{-6.93643, 1, 0.6844, 0},
		{0.01, 4, 1, 0},
		{2.1101, 1, 0.989, 0},
		{4.52059, 1, 0.489, 0},
		{0.732564, 2, 0.803, 0},
		{-1.34086, 2, 1.1444, 0},
		{0.130985, 3, 1.409, 0},
		{-0.777414, 1, 1.754, 1},
		{0.351944, 3, 1.311, 1},
	},
	gaussians: []gaussian{
		{-0.0211716, 2, 4.187, 1.685, 1.506, 0.171, 0.7164, 0},
		{0.0226312, 1, 5.646, 0.489, 0.156, 0.2245, 1.3444, 0},
		{0.032187, 3, 0.791, 0.103, 1.736, 0.1304, 1.4517, 0},
		{-0.0231752, 1, 7.249, 2.506, 0.67, 0.2785, 0.7204, 0},
		{0.0557346, 1, 2.986, 1.607, 1.662, 0.3967, 1.5445, 0},
	},
	dew: curve{form: expOverT, scale: 1296400, T: 33.145, terms: []curveTerm{
		{-0.5553870929135406, 0.882},
		{-7.0852972599030295, 1.072},
		{0.006868538454095541, 1.355},
		{0.8295514415153659, 2.61},
		{-0.08773773693832483, 8.191},
		{3.754274235303921, 1.239},
	}},
	vapour: curve{form: expOverT, scale: 15508, T: 33.145, terms: []curveTerm{
		{-3.036644018774332, 0.473},
		{-773.9211864728516, 6.618},
		{1530.809493601263, 7.083},
		{-3087.995404817007, 9.094},
		{3472.491545729249, 10.577},
		{-15649.585518005188, 19.579},
	}},
	liquid: curve{form: plainForm, scale: 15508, T: 33.145, terms: []curveTerm{
		{1.9546584452513824, 0.407},
		{-5.715534926385584, 3.401},
		{714.2366728890577, 7.095},
		{-1666.5447521212081, 8.095},
		{2698.8598951804593, 10.911},
		{-12755.576112629806, 17.353},
	}},
}
