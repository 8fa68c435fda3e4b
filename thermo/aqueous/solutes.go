package aqueous

// Polynomials for density in kg/m³, cp in J/(kg K) and freezing point in K:
// Å. Melinder, Properties of Secondary Working Fluids for Indirect Systems,
// International Institute of Refrigeration, 2nd edition (2010); coefficients by
// way of the incompressible-fluid files of CoolProp (MEG and MPG).
//
//	Y(T, x) = Σ c[i][j] (T − baseT)^i (x − baseX)^j
//	Tfreeze(x) = Σ f[j] (x − baseX)^j
//
// x is the mass fraction of solute, 0 to 0.6; T runs from the freezing point to
// 373.15 K. Checked against ASHRAE Handbook Fundamentals 2001, chapter 21: the
// tests hold the rows and the deviations.
type solute struct {
	name              string
	baseT, baseX      float64
	density, cp       [4][6]float64
	freezing          [6]float64
	cpFit, densityFit float64 // relative standard uncertainties of the polynomials
}

const (
	maxFraction    = 0.6
	maxTemperature = 373.15 // K
)

// cpFit and densityFit are the root-mean-square deviations from ASHRAE: 1.15 %
// and 0.48 % for ethylene glycol, where cp is worst in strong, cold mixtures
// (-3.2 %) and density in hot ones (-0.9 %); 0.16 % and 0.37 % for propylene
// glycol. Close as the two stand in cp of propylene glycol, they may draw on the
// same measurements, so 0.5 % is taken there, by our own judgement.
var solutes = [...]solute{
	{
		name: "ethylene glycol", baseT: 304.878, baseX: 0.308462,
		density: [4][6]float64{
			{1034, 131.1, 0.749, -106.2, -96.23, 489.1},
			{-0.4781, -0.6876, 0.7855, 1.229, -7.211, 0},
			{-0.002692, 0.004805, -0.003995, -0.01153, 0, 0},
			{4.725e-06, 1.69e-06, 4.982e-05, 0, 0, 0},
		},
		cp: [4][6]float64{
			{3737, -1799, -993.3, 2610, 1537, -16180},
			{2.93, 10.46, 3.516, -1.189, -42.72, 0},
			{-0.004675, -0.04147, 0.05109, -0.1643, 0, 0},
			{-1.389e-05, 1.847e-05, -0.0007138, 0, 0, 0},
		},
		freezing: [6]float64{257.9, -80.8, -133.4, -72.93, 100.6, 11.4},
		cpFit:    0.0115, densityFit: 0.0048,
	},
	{
		name: "propylene glycol", baseT: 305.8583, baseX: 0.307031,
		density: [4][6]float64{
			{1018, 76.04, -24.98, -155, -113.1, 234.2},
			{-0.5406, -0.945, 0.27, 2.829, -2.221, 0},
			{-0.002666, 0.005541, -0.004018, -0.007175, 0, 0},
			{1.347e-05, -1.343e-05, 3.376e-05, 0, 0, 0},
		},
		cp: [4][6]float64{
			{3882, -1304, -1598, 353.9, 5000, -4959},
			{2.699, 5.07, 0.9534, 31.02, -71.35, 0},
			{-0.001659, -0.004752, 0.1167, -0.295, 0, 0},
			{-1.032e-05, 0.0001522, -0.000487, 0, 0, 0},
		},
		freezing: [6]float64{259.9, -66.31, -109.4, -228.3, -340.9, 146.5},
		cpFit:    0.005, densityFit: 0.0037,
	},
}
