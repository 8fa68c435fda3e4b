package water

// Basic equation of region 1: R7-97(2012), equation 7 and table 2.
//
//	g/(RT) = γ(π, τ) = Σ n (7.1 − π)^I (τ − 1.222)^J,  π = p/16.53 MPa, τ = 1386 K/T
//
// Range 273.15 K to 623.15 K, saturation pressure to 100 MPa. Checked against
// every value of table 5 and, at other states, against IAPWS-95.
const (
	region1Pressure    = 16.53e6 // Pa
	region1Temperature = 1386.0  // K
	region1PiShift     = 7.1
	region1TauShift    = 1.222
)

// lowestJ1 is the most negative exponent of τ − 1.222 in table 2; the table of
// powers of that quantity starts there.
const lowestJ1 = -41

var region1Terms = [...]term{
	{0.14632971213167, 0, -2},
	{-0.84548187169114, 0, -1},
	{-3.756360367204, 0, 0},
	{3.3855169168385, 0, 1},
	{-0.95791963387872, 0, 2},
	{0.15772038513228, 0, 3},
	{-0.016616417199501, 0, 4},
	{0.00081214629983568, 0, 5},
	{0.00028319080123804, 1, -9},
	{-0.00060706301565874, 1, -7},
	{-0.018990068218419, 1, -1},
	{-0.032529748770505, 1, 0},
	{-0.021841717175414, 1, 1},
	{-5.283835796993e-05, 1, 3},
	{-0.00047184321073267, 2, -3},
	{-0.00030001780793026, 2, 0},
	{4.7661393906987e-05, 2, 1},
	{-4.4141845330846e-06, 2, 3},
	{-7.2694996297594e-16, 2, 17},
	{-3.1679644845054e-05, 3, -4},
	{-2.8270797985312e-06, 3, 0},
	{-8.5205128120103e-10, 3, 6},
	{-2.2425281908e-06, 4, -5},
	{-6.5171222895601e-07, 4, -2},
	{-1.4341729937924e-13, 4, 10},
	{-4.0516996860117e-07, 5, -8},
	{-1.2734301741641e-09, 8, -11},
	{-1.7424871230634e-10, 8, -6},
	{-6.8762131295531e-19, 21, -29},
	{1.4478307828521e-20, 23, -31},
	{2.6335781662795e-23, 29, -38},
	{-1.1947622640071e-23, 30, -39},
	{1.8228094581404e-24, 31, -40},
	{-9.3537087292458e-26, 32, -41},
}

var region1Groups = grouped(region1Terms[:], lowestJ1)

// region1 evaluates the basic equation and its derivatives in one pass.
func region1(T, p float64) gibbs {
	pi, tau := p/region1Pressure, region1Temperature/T
	x, y := region1PiShift-pi, tau-region1TauShift
	var a, b powers
	powersOfPi1(&a, x)
	powersOfTau1(&b, y)
	// (7.1 − π) falls as π rises: each derivative by π changes the sign.
	return sum(region1Groups, &a, &b, -pi/x, tau/y)
}

// powersOfPi1 fills a[k] = x^k for the exponents I of table 2.
func powersOfPi1(a *powers, x float64) {
	a[0], a[1] = 1, x
	a[2] = x * x
	a[3] = a[2] * x
	a[4] = a[2] * a[2]
	a[5] = a[3] * a[2]
	a[8] = a[4] * a[4]
	a[21] = a[8] * a[8] * a[5]
	a[23] = a[21] * a[2]
	a[29] = a[21] * a[8]
	a[30] = a[29] * x
	a[31] = a[29] * a[2]
	a[32] = a[29] * a[3]
}

// powersOfTau1 fills b[k − lowestJ1] = y^k for the exponents J of table 2.
func powersOfTau1(b *powers, y float64) {
	const o = -lowestJ1
	b[o], b[o+1] = 1, y
	b[o+2] = y * y
	b[o+3] = b[o+2] * y
	b[o+4] = b[o+2] * b[o+2]
	b[o+5] = b[o+3] * b[o+2]
	b[o+6] = b[o+3] * b[o+3]
	b[o+10] = b[o+5] * b[o+5]
	b[o+17] = b[o+10] * b[o+5] * b[o+2]
	r := 1 / y
	b[o-1] = r
	b[o-2] = r * r
	b[o-3] = b[o-2] * r
	b[o-4] = b[o-2] * b[o-2]
	b[o-5] = b[o-3] * b[o-2]
	b[o-6] = b[o-3] * b[o-3]
	b[o-7] = b[o-4] * b[o-3]
	b[o-8] = b[o-4] * b[o-4]
	b[o-9] = b[o-5] * b[o-4]
	b[o-11] = b[o-6] * b[o-5]
	b[o-29] = b[o-11] * b[o-9] * b[o-9]
	b[o-31] = b[o-29] * b[o-2]
	b[o-38] = b[o-29] * b[o-9]
	b[o-39] = b[o-31] * b[o-8]
	b[o-40] = b[o-31] * b[o-9]
	b[o-41] = b[o-38] * b[o-3]
}
