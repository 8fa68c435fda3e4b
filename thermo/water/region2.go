package water

import "heatreeve/thermo"

// Basic equation of region 2: R7-97(2012), equations 15 to 17, tables 10 and 11.
//
//	g/(RT) = ln π + Σ n° τ^J° + Σ n π^I (τ − 0.5)^J,  π = p/1 MPa, τ = 540 K/T
//
// Range 273.15 K to 1073.15 K, pressure above zero up to saturation, to the
// boundary with region 3, or to 100 MPa. Checked against every value of table
// 15 and, at other states, against IAPWS-95.
const (
	region2Pressure    = 1e6   // Pa
	region2Temperature = 540.0 // K
	region2TauShift    = 0.5
)

var region2Ideal = [...]idealTerm{
	{-9.6927686500217, 0},
	{10.086655968018, 1},
	{-0.005608791128302, -5},
	{0.071452738081455, -4},
	{-0.40710498223928, -3},
	{1.4240819171444, -2},
	{-4.383951131945, -1},
	{-0.28408632460772, 2},
	{0.021268463753307, 3},
}

var region2Residual = [...]term{
	{-0.0017731742473213, 1, 0},
	{-0.017834862292358, 1, 1},
	{-0.045996013696365, 1, 2},
	{-0.057581259083432, 1, 3},
	{-0.05032527872793, 1, 6},
	{-3.3032641670203e-05, 2, 1},
	{-0.00018948987516315, 2, 2},
	{-0.0039392777243355, 2, 4},
	{-0.043797295650573, 2, 7},
	{-2.6674547914087e-05, 2, 36},
	{2.0481737692309e-08, 3, 0},
	{4.3870667284435e-07, 3, 1},
	{-3.227767723857e-05, 3, 3},
	{-0.0015033924542148, 3, 6},
	{-0.040668253562649, 3, 35},
	{-7.8847309559367e-10, 4, 1},
	{1.2790717852285e-08, 4, 2},
	{4.8225372718507e-07, 4, 3},
	{2.2922076337661e-06, 5, 7},
	{-1.6714766451061e-11, 6, 3},
	{-0.0021171472321355, 6, 16},
	{-23.895741934104, 6, 35},
	{-5.905956432427e-18, 7, 0},
	{-1.2621808899101e-06, 7, 11},
	{-0.038946842435739, 7, 25},
	{1.1256211360459e-11, 8, 8},
	{-8.2311340897998, 8, 36},
	{1.9809712802088e-08, 9, 13},
	{1.0406965210174e-19, 10, 4},
	{-1.0234747095929e-13, 10, 10},
	{-1.0018179379511e-09, 10, 14},
	{-8.0882908646985e-11, 16, 29},
	{0.10693031879409, 16, 50},
	{-0.33662250574171, 18, 57},
	{8.9185845355421e-25, 20, 20},
	{3.0629316876232e-13, 20, 35},
	{-4.2002467698208e-06, 20, 48},
	{-5.9056029685639e-26, 21, 21},
	{3.7826947613457e-06, 22, 53},
	{-1.2768608934681e-15, 23, 39},
	{7.3087610595061e-29, 24, 26},
	{5.5414715350778e-17, 24, 40},
	{-9.436970724121e-07, 24, 58},
}

var region2Weights = weigh(region2Residual[:])

// region2 follows from γ by the relations of R7-97(2012), table 12.
func region2(T, p float64) thermo.Balance {
	var w powers2
	tau := region2Temperature / T
	y := tau - region2TauShift
	w.fill(p*(1/region2Pressure), y)
	return w.balance(T, p, tau, tau/y)
}

func (w *powers2) balance(T, p, tau, f float64) thermo.Balance {
	t, tt := region2IdealSums(tau, T*(1/region2Temperature))
	rt := gasConstant * T
	return thermo.Balance{
		Enthalpy: rt * (t + f*w.sum(&region2Weights.j)),
		Cp:       -gasConstant * (tt + f*f*w.sum(&region2Weights.jj)),
		Density:  p / (rt * (1 + w.sum(&region2Weights.i))),
	}
}

// region2All adds cv = cp − R (1 + πγrπ − πτγrπτ)²/(1 − π²γrππ), table 12.
func region2All(T, p float64) thermo.Properties {
	var w powers2
	tau := region2Temperature / T
	y := tau - region2TauShift
	w.fill(p*(1/region2Pressure), y)
	b := w.balance(T, p, tau, tau/y)
	d := p/(gasConstant*T*b.Density) - tau/y*w.sum(&region2Weights.ij)
	return complete(b, p, b.Cp-gasConstant*d*d/(1-w.sum(&region2Weights.ii)))
}

var region2IdealJ, region2IdealJJ = func() (j, jj [len(region2Ideal)]float64) {
	for k, t := range region2Ideal {
		e := float64(t.j)
		j[k], jj[k] = t.n*e, t.n*e*(e-1)
	}
	return j, jj
}()

// region2IdealSums returns τγ°τ and τ²γ°ττ; r is 1/τ.
func region2IdealSums(tau, r float64) (t, tt float64) {
	tau2, r2 := tau*tau, r*r
	r4 := r2 * r2
	n := &region2IdealJ
	t = r4*(n[2]*r+n[3]) + r2*(n[4]*r+n[5]) + n[6]*r + n[1]*tau + tau2*(n[7]+n[8]*tau)
	n = &region2IdealJJ
	tt = r4*(n[2]*r+n[3]) + r2*(n[4]*r+n[5]) + n[6]*r + tau2*(n[7]+n[8]*tau)
	return t, tt
}

// powers2 are the powers of x = π and y = τ − 0.5 that table 11 is made of.
type powers2 struct {
	x, x2, x4, x8, x16                float64
	y, y2, y3, y4, y6, y7, y8         float64
	y10, y11, y13, y14, y16, y18      float64
	y20, y21, y25, y26, y29, y35, y40 float64
}

func (w *powers2) fill(x, y float64) {
	w.x = x
	w.x2 = x * x
	w.x4 = w.x2 * w.x2
	w.x8 = w.x4 * w.x4
	w.x16 = w.x8 * w.x8
	w.y = y
	w.y2 = y * y
	w.y3 = w.y2 * y
	w.y4 = w.y2 * w.y2
	w.y6 = w.y3 * w.y3
	w.y7 = w.y4 * w.y3
	w.y8 = w.y4 * w.y4
	w.y10 = w.y6 * w.y4
	w.y11 = w.y7 * w.y4
	w.y13 = w.y7 * w.y6
	w.y14 = w.y7 * w.y7
	w.y16 = w.y8 * w.y8
	w.y18 = w.y10 * w.y8
	w.y20 = w.y10 * w.y10
	w.y21 = w.y11 * w.y10
	w.y25 = w.y14 * w.y11
	w.y26 = w.y13 * w.y13
	w.y29 = w.y18 * w.y11
	w.y35 = w.y21 * w.y14
	w.y40 = w.y20 * w.y20
}

// sum returns Σ n x^I y^J over the 43 lines of table 11, with the factors n; one
// statement for each I, those above 10 together.
func (w *powers2) sum(n *lines) float64 {
	s1 := n[0] + w.y*n[1] + w.y2*n[2] + w.y3*n[3] + w.y6*n[4]
	s2 := w.y*n[5] + w.y2*n[6] + w.y4*n[7] + w.y7*(n[8]+w.y29*n[9])
	s3 := n[10] + w.y*n[11] + w.y3*n[12] + w.y6*n[13] + w.y35*n[14]
	s4 := w.y*n[15] + w.y2*n[16] + w.y3*n[17]
	s5 := w.y7 * n[18]
	s6 := w.y3*n[19] + w.y16*n[20] + w.y35*n[21]
	s7 := n[22] + w.y11*n[23] + w.y25*n[24]
	s8 := w.y8*n[25] + w.y7*w.y29*n[26]
	s9 := w.y13 * n[27]
	s10 := w.y4*n[28] + w.y10*n[29] + w.y14*n[30]
	low := s1 + w.x*s2 + w.x2*(s3+w.x*s4) + w.x4*(s5+w.x*s6+w.x2*(s7+w.x*s8)) + w.x8*(s9+w.x*s10)
	return w.x*low + w.x16*w.high(n)
}

// high returns the lines with I from 16 on, divided by x¹⁶.
func (w *powers2) high(n *lines) float64 {
	s16 := w.y29*n[31] + w.y25*w.y25*n[32]
	s18 := w.y16 * w.y40 * w.y * n[33]
	s20 := w.y20*n[34] + w.y35*n[35] + w.y8*w.y40*n[36]
	s21 := w.y21 * n[37]
	s22 := w.y13 * w.y40 * n[38]
	s23 := w.y13 * w.y26 * n[39]
	s24 := w.y26*n[40] + w.y40*(n[41]+w.y18*n[42])
	return s16 + w.x2*s18 + w.x4*(s20+w.x*s21+w.x2*(s22+w.x*s23+w.x2*s24))
}
