package water

import "heatreeve/thermo"

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

var region1Weights = weigh(region1Terms[:])

// region1 follows from γ by the relations of R7-97(2012), table 3:
//
//	h = RT τγτ,  cp = −R τ²γττ,  v = RT πγπ/p
func region1(T, p float64) thermo.Balance {
	var w powers1
	tau := region1Temperature / T
	w.fill(region1PiShift-p*(1/region1Pressure), tau-region1TauShift)
	return w.balance(T, tau)
}

func (w *powers1) balance(T, tau float64) thermo.Balance {
	t := tau * w.r
	return thermo.Balance{
		Enthalpy: gasConstant * region1Temperature * w.r * w.byTau(&region1Weights.j),
		Cp:       -gasConstant * t * t * w.byTau(&region1Weights.jj),
		// 7.1 − π falls as π rises: a derivative by π changes the sign.
		Density: -region1Pressure * w.x / (gasConstant * T * w.byPi(&region1Weights.i)),
	}
}

// region1All adds cv = cp + R (πγπ − πτγπτ)²/(π²γππ), table 3.
func region1All(T, p float64) thermo.Properties {
	var w powers1
	tau := region1Temperature / T
	w.fill(region1PiShift-p*(1/region1Pressure), tau-region1TauShift)
	b := w.balance(T, tau)
	x := p / (region1Pressure * w.x)
	d := p/(gasConstant*T*b.Density) + x*tau*w.r*w.byPi(&region1Weights.ij)
	return complete(b, p, b.Cp+gasConstant*d*d/(x*x*w.byPi(&region1Weights.ii)))
}

// powers1 are the powers of x = 7.1 − π, y = τ − 1.222, r = 1/y and z = x/y
// that table 2 is made of. Its last six lines are small multiples of x²¹ y⁻²⁹.
type powers1 struct {
	x, x2, x5, x8             float64
	y, y2, y3, y6, y10, y17   float64
	r, r2, r3, r5, r6, r8, r9 float64
	z, z2, z8, tail           float64
}

func (w *powers1) fill(x, y float64) {
	r := 1 / y
	w.x = x
	w.x2 = x * x
	x4 := w.x2 * w.x2
	w.x5 = x4 * x
	w.x8 = x4 * x4
	w.y = y
	w.y2 = y * y
	w.y3 = w.y2 * y
	w.y6 = w.y3 * w.y3
	y4 := w.y2 * w.y2
	w.y10 = w.y6 * y4
	w.y17 = w.y10 * w.y6 * y
	w.r = r
	w.r2 = r * r
	w.r3 = w.r2 * r
	w.r5 = w.r3 * w.r2
	w.r6 = w.r3 * w.r3
	w.r8 = w.r5 * w.r3
	w.r9 = w.r8 * r
	w.z = x * r
	w.z2 = w.z * w.z
	z4 := w.z2 * w.z2
	w.z8 = z4 * z4
	w.tail = w.z8 * w.z8 * z4 * w.z * w.r9 // x²¹ y⁻³⁰
}

// byTau returns Σ n x^I y^J over the lines of table 2 with J ≠ 0, with the
// factors n; one statement for each I, those above 5 together.
func (w *powers1) byTau(n *lines) float64 {
	s0 := w.r2*(n[0]+n[1]*w.y) + w.y*n[3] + w.y2*(n[4]+n[5]*w.y) + w.y2*w.y2*(n[6]+w.y*n[7])
	s1 := w.r9*(n[8]+n[9]*w.y2) + n[10]*w.r + w.y*(n[12]+w.y2*n[13])
	s2 := w.r3*n[14] + w.y*n[16] + w.y3*n[17] + w.y17*n[18]
	s3 := n[19]*w.r2*w.r2 + n[21]*w.y6
	s4 := w.r2*(n[22]*w.r3+n[23]) + n[24]*w.y10
	s5 := n[25] * w.r8 * w.x5
	s8 := w.x8 * w.r6 * (n[26]*w.r5 + n[27])
	tail := w.tail * (w.y*(n[28]+w.z2*n[29]) + w.z8*(n[30]+w.z*n[31]+w.z2*(n[32]+w.z*n[33])))
	return s0 + w.x*s1 + w.x2*(s2+w.x*s3+w.x2*s4) + s5 + s8 + tail
}

// byPi is byTau for the lines with I ≠ 0.
func (w *powers1) byPi(n *lines) float64 {
	s1 := w.r9*(n[8]+n[9]*w.y2) + n[10]*w.r + n[11] + w.y*(n[12]+w.y2*n[13])
	s2 := w.r3*n[14] + n[15] + w.y*n[16] + w.y3*n[17] + w.y17*n[18]
	s3 := n[19]*w.r2*w.r2 + n[20] + n[21]*w.y6
	s4 := w.r2*(n[22]*w.r3+n[23]) + n[24]*w.y10
	s5 := n[25] * w.r8 * w.x5
	s8 := w.x8 * w.r6 * (n[26]*w.r5 + n[27])
	tail := w.tail * (w.y*(n[28]+w.z2*n[29]) + w.z8*(n[30]+w.z*n[31]+w.z2*(n[32]+w.z*n[33])))
	return w.x*s1 + w.x2*(s2+w.x*s3+w.x2*s4) + s5 + s8 + tail
}
