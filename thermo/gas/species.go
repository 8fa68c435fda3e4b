package gas

// The coefficients of NASA Glenn for cp/R and h/(RT) of the ideal gas:
// B. J. McBride, M. J. Zehe, S. Gordon, NASA Glenn Coefficients for Calculating
// Thermodynamic Properties of Individual Species, NASA/TP-2002-211556 (2002),
// file thermo.inp; 200 K to 1000 K and 1000 K to 6000 K.
//
//	cp/R   =  a0 T⁻² + a1 T⁻¹ + a2 + a3 T + a4 T² + a5 T³ + a6 T⁴
//	h/(RT) = −a0 T⁻² + a1 T⁻¹ ln T + a2 + a3 T/2 + a4 T²/3 + a5 T³/4 + a6 T⁴/5 + b/T
//
// Checked against NIST-JANAF, TRC and the ideal part of reference equations of
// state: the tests hold the rows and the deviations. CH4 stands up to 5 % above
// JANAF at 1500 K, whose methane table is the older; it agrees within 0.4 % with
// Setzmann and Wagner (1991) up to 600 K.

// range9 is one temperature range of a species or a mixture.
type range9 struct {
	a [7]float64
	b float64
}

type species struct {
	formula, name string
	molarMass     float64 // kg/mol, from the same file
	low, high     range9  // below and above 1000 K
}

var table = [...]species{
	{
		formula: "N2", name: "nitrogen", molarMass: 0.0280134,
		low:  range9{[7]float64{22103.71497, -381.846182, 6.08273836, -0.00853091441, 1.384646189e-05, -9.62579362e-09, 2.519705809e-12}, 710.846086},
		high: range9{[7]float64{587712.406, -2239.249073, 6.06694922, -0.00061396855, 1.491806679e-07, -1.923105485e-11, 1.061954386e-15}, 12832.10415},
	},
	{
		formula: "O2", name: "oxygen", molarMass: 0.0319988,
		low:  range9{[7]float64{-34255.6342, 484.700097, 1.119010961, 0.00429388924, -6.83630052e-07, -2.0233727e-09, 1.039040018e-12}, -3391.45487},
		high: range9{[7]float64{-1037939.022, 2344.830282, 1.819732036, 0.001267847582, -2.188067988e-07, 2.053719572e-11, -8.19346705e-16}, -16890.10929},
	},
	{
		formula: "Ar", name: "argon", molarMass: 0.039948,
		low:  range9{[7]float64{2: 2.5}, -745.375},
		high: range9{[7]float64{20.10538475, -0.0599266107, 2.500069401, -3.99214116e-08, 1.20527214e-11, -1.819015576e-15, 1.078576636e-19}, -744.993961},
	},
	{
		formula: "CO2", name: "carbon dioxide", molarMass: 0.0440095,
		low:  range9{[7]float64{49436.5054, -626.411601, 5.30172524, 0.002503813816, -2.127308728e-07, -7.68998878e-10, 2.849677801e-13}, -45281.9846},
		high: range9{[7]float64{117696.2419, -1788.791477, 8.29152319, -9.22315678e-05, 4.86367688e-09, -1.891053312e-12, 6.33003659e-16}, -39083.5059},
	},
	{
		formula: "CO", name: "carbon monoxide", molarMass: 0.0280101,
		low:  range9{[7]float64{14890.45326, -292.2285939, 5.72452717, -0.00817623503, 1.456903469e-05, -1.087746302e-08, 3.027941827e-12}, -13031.31878},
		high: range9{[7]float64{461919.725, -1944.704863, 5.91671418, -0.000566428283, 1.39881454e-07, -1.787680361e-11, 9.62093557e-16}, -2466.261084},
	},
	{
		formula: "H2O", name: "water vapour", molarMass: 0.01801528,
		low:  range9{[7]float64{-39479.6083, 575.573102, 0.931782653, 0.00722271286, -7.34255737e-06, 4.95504349e-09, -1.336933246e-12}, -33039.7431},
		high: range9{[7]float64{1034972.096, -2412.698562, 4.64611078, 0.002291998307, -6.83683048e-07, 9.42646893e-11, -4.82238053e-15}, -13842.86509},
	},
	{
		formula: "H2", name: "hydrogen", molarMass: 0.00201588,
		low:  range9{[7]float64{40783.2321, -800.918604, 8.21470201, -0.01269714457, 1.753605076e-05, -1.20286027e-08, 3.36809349e-12}, 2682.484665},
		high: range9{[7]float64{560812.801, -837.150474, 2.975364532, 0.001252249124, -3.74071619e-07, 5.9366252e-11, -3.6069941e-15}, 5339.82441},
	},
	{
		formula: "He", name: "helium", molarMass: 0.004002602,
		low:  range9{[7]float64{2: 2.5}, -745.375},
		high: range9{[7]float64{2: 2.5}, -745.375},
	},
	{
		formula: "CH4", name: "methane", molarMass: 0.01604246,
		low:  range9{[7]float64{-176685.0998, 2786.18102, -12.0257785, 0.0391761929, -3.61905443e-05, 2.026853043e-08, -4.97670549e-12}, -23313.1436},
		high: range9{[7]float64{3730042.76, -13835.01485, 20.49107091, -0.001961974759, 4.72731304e-07, -3.72881469e-11, 1.623737207e-15}, 75320.6691},
	},
	{
		formula: "C2H6", name: "ethane", molarMass: 0.03006904,
		low:  range9{[7]float64{-186204.4161, 3406.19186, -19.51705092, 0.0756583559, -8.20417322e-05, 5.0611358e-08, -1.319281992e-11}, -27029.3289},
		high: range9{[7]float64{5025782.13, -20330.22397, 33.2255293, -0.00383670341, 7.23840586e-07, -7.3191825e-11, 3.065468699e-15}, 111596.395},
	},
	{
		formula: "C3H8", name: "propane", molarMass: 0.04409562,
		low:  range9{[7]float64{-243314.4337, 4656.27081, -29.39466091, 0.1188952745, -0.0001376308269, 8.81482391e-08, -2.342987994e-11}, -35403.3527},
		high: range9{[7]float64{6420731.68, -26597.91134, 45.3435684, -0.00502066392, 9.47121694e-07, -9.57540523e-11, 4.00967288e-15}, 145558.2459},
	},
	{
		formula: "NH3", name: "ammonia", molarMass: 0.01703052,
		low:  range9{[7]float64{-76812.2615, 1270.951578, -3.89322913, 0.02145988418, -2.183766703e-05, 1.317385706e-08, -3.33232206e-12}, -12648.86413},
		high: range9{[7]float64{2452389.535, -8040.89424, 12.71346201, -0.000398018658, 3.55250275e-08, 2.53092357e-12, -3.32270053e-16}, 43861.9196},
	},
	{
		formula: "SO2", name: "sulfur dioxide", molarMass: 0.0640638,
		low:  range9{[7]float64{-53108.4214, 909.031167, -2.356891244, 0.02204449885, -2.510781471e-05, 1.446300484e-08, -3.36907094e-12}, -41137.5208},
		high: range9{[7]float64{-112764.0116, -825.226138, 7.61617863, -0.000199932761, 5.65563143e-08, -5.45431661e-12, 2.918294102e-16}, -33513.0869},
	},
}

// trust says how far the ideal gas goes for a real one. cp and density are the
// relative deviations per Pa of the ideal gas from the reference equation of
// state, at 300 K and 1 bar; they grow in proportion to pressure and fall
// steeply as the gas gets hotter. fit is the relative standard uncertainty of
// the ideal cp, from the comparisons in the tests.
type trust struct {
	cp, density float64 // 1/Pa
	fit         float64
}

// The deviations of N2 to NH3 are those of testdata/real-gas.csv, where each
// equation is named. H2O: IAPWS-95 at 400 K, 1 bar, since it is no gas at 300 K
// and 1 bar. He and SO2: second virial coefficient in corresponding states,
// Pitzer and Curl's form with Abbott's coefficients (from memory).
var trusts = map[string]trust{
	"N2":   {0.00155e-5, 0.00018e-5, 0.001},
	"O2":   {0.00169e-5, 0.00062e-5, 0.001},
	"Ar":   {0.00228e-5, 0.00061e-5, 0.001},
	"CO2":  {0.00785e-5, 0.00488e-5, 0.001},
	"CO":   {0.00173e-5, 0.00034e-5, 0.001},
	"H2O":  {0.0528e-5, 0.0108e-5, 0.0025},
	"H2":   {0.00020e-5, 0.00058e-5, 0.001},
	"He":   {0.00005e-5, 0.0005e-5, 0.001},
	"CH4":  {0.00254e-5, 0.00169e-5, 0.005},
	"C2H6": {0.00661e-5, 0.00736e-5, 0.003},
	"C3H8": {0.0123e-5, 0.0157e-5, 0.004},
	"NH3":  {0.0336e-5, 0.0101e-5, 0.004},
	"SO2":  {0.029e-5, 0.0152e-5, 0.003},
}
