package helmholtz

// ammonia is the equation of state of ammonia, with the coefficients of the CoolProp fluid file,
// whose key names the year 2020; the paper of 2023 is from memory. Its range, 195.49 to 725 K and
// to 1000 MPa, and its paper's expanded uncertainty, density 0.2 %, cp 2 %, are from memory.
var ammonia = substance{
	formula: "NH3", name: "ammonia",
	source:    "Gao, Wu, Bell, Harvey, Lemmon, J. Phys. Chem. Ref. Data 52 (2023) 013102",
	molarMass: 0.01703052, gasConstant: 8.3144598,
	reducingT: 405.56, reducingDensity: 13696,
	criticalT: 405.56, criticalP: 11363391.162815, tripleT: 195.49,
	maxT: 725, maxP: 100e6,
	stated: accuracy{cp: 0.02, ideal: 0.0065, density: 0.002},
	ideal: idealTerms{
		logTau: 3,
		oscillators: []oscillator{
			{2.224, 4.0585856593352405, -1},
			{3.148, 9.776605187888352, -1},
			{0.9579, 17.829667620080876, -1},
		},
	},
	powers: []power{
		{0.006132232, 4, 1, 0},
		{1.7395866, 1, 0.382, 0},
		{-2.2261792, 1, 1, 0},
		{-0.30127553, 2, 1, 0},
		{0.08967023, 3, 0.677, 0},
		{-0.076387037, 3, 2.915, 2},
		{-0.84063963, 2, 3.51, 2},
		{-0.27026327, 3, 1.063, 1},
	},
	gaussians: []gaussian{
		{6.212578, 1, 0.655, 0.42776, -0.0726, 1.708, 1.036, 0},
		{-5.7844357, 1, 1.3, 0.6424, -0.1274, 1.4865, 1.2777, 0},
		{2.4817542, 1, 3.1, 0.8175, 0.7527, 2.0915, 1.083, 0},
		{-2.3739168, 2, 1.4395, 0.7995, 0.57, 2.43, 1.2906, 0},
		{0.01493697, 2, 1.623, 0.91, 2.2, 0.488, 0.928, 0},
		{-3.7749264, 1, 0.643, 0.3574, -0.243, 1.1, 0.934, 0},
		{0.0006254348, 3, 1.13, 1.21, 2.96, 0.85, 0.919, 0},
		{-1.7359e-05, 3, 4.5, 4.14, 3.02, 1.14, 1.852, 0},
		{-0.13462033, 1, 1, 22.56, 0.9574, 945.64, 1.05897, 0},
		{0.07749072839, 1, 4, 22.68, 0.9576, 993.85, 1.05277, 0},
		{-1.6909858, 1, 4.3315, 2.8452, 0.4478, 0.3696, 1.108, 1.244},
		{0.93739074, 1, 4.015, 2.8342, 0.44689, 0.2962, 1.313, 0.6826},
	},
	dew: curve{form: expOverT, scale: 11365000, T: 405.56, terms: []curveTerm{
		{-7.2257, 1},
		{1.4263, 1.5},
		{-0.59642, 2},
		{-2.798, 3.6},
		{-3.7869, 15.5},
	}},
	vapour: curve{form: expForm, scale: 13696, T: 405.56, terms: []curveTerm{
		{-0.053296, 0.14},
		{-3.4589, 0.44},
		{-6.7572, 1.314},
		{-17.26, 3.225},
		{-43.12, 6.4},
		{-115.18, 14},
	}},
	liquid: curve{form: plainForm, scale: 13696, T: 405.56, terms: []curveTerm{
		{2.447, 0.384},
		{5.8341, 1.65},
		{-25.944, 2.2},
		{53.383, 2.75},
		{-54.411, 3.35},
		{22.771, 4},
	}},
}
