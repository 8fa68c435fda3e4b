package water

import "math"

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

// idealTerm is one line of table 10.
type idealTerm struct {
	n float64
	j int8
}

// lowestJ2 is the most negative exponent of τ in table 10.
const lowestJ2 = -5

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

var region2Groups = grouped(region2Residual[:], 0)

// region2 evaluates the basic equation and its derivatives in one pass.
func region2(T, p float64) gibbs {
	pi, tau := p/region2Pressure, region2Temperature/T
	y := tau - region2TauShift
	var a, b powers
	powersOfPi2(&a, pi)
	powersOfTau2(&b, y)
	return region2IdealPart(pi, tau).plus(sum(region2Groups, &a, &b, 1, tau/y))
}

// region2IdealPart is the ideal-gas part of the basic equation.
func region2IdealPart(pi, tau float64) gibbs {
	var c [16]float64
	const o = -lowestJ2
	c[o], c[o+1] = 1, tau
	c[o+2] = tau * tau
	c[o+3] = c[o+2] * tau
	r := 1 / tau
	c[o-1] = r
	c[o-2] = r * r
	c[o-3] = c[o-2] * r
	c[o-4] = c[o-2] * c[o-2]
	c[o-5] = c[o-3] * c[o-2]
	g := gibbs{g: math.Log(pi), p: 1, pp: -1}
	for k := range region2Ideal {
		t := &region2Ideal[k]
		v, j := t.n*c[uint8(t.j-lowestJ2)&15], float64(t.j)
		g.g += v
		g.t += j * v
		g.tt += j * (j - 1) * v
	}
	return g
}

// powersOfPi2 fills a[k] = x^k for the exponents I of table 11.
func powersOfPi2(a *powers, x float64) {
	a[0], a[1] = 1, x
	for k := 2; k <= 10; k++ {
		a[k] = a[k/2] * a[k-k/2]
	}
	a[16] = a[8] * a[8]
	a[18] = a[9] * a[9]
	a[20] = a[10] * a[10]
	a[21] = a[20] * x
	a[22] = a[20] * a[2]
	a[23] = a[20] * a[3]
	a[24] = a[20] * a[4]
}

// powersOfTau2 fills b[k] = y^k for the exponents J of table 11.
func powersOfTau2(b *powers, y float64) {
	b[0], b[1] = 1, y
	for k := 2; k <= 29; k++ {
		b[k] = b[k/2] * b[k-k/2]
	}
	b[35] = b[29] * b[6]
	b[36] = b[29] * b[7]
	b[39] = b[29] * b[10]
	b[40] = b[29] * b[11]
	b[48] = b[29] * b[19]
	b[50] = b[29] * b[21]
	b[53] = b[29] * b[24]
	b[57] = b[29] * b[28]
	b[58] = b[29] * b[29]
}

// boundary23 is the auxiliary equation between regions 2 and 3: R7-97(2012),
// equations 5 and 6, table 1; 623.15 K and 16.5292 MPa to 863.15 K and 100 MPa.
var boundary23 = [...]float64{348.05185628969, -1.1671859879975, 0.0010192970039326, 572.54459862746, 13.9188397787}

func boundary23Pressure(T float64) float64 {
	n := &boundary23
	return 1e6 * (n[0] + T*(n[1]+T*n[2]))
}

func boundary23Temperature(p float64) float64 {
	n := &boundary23
	return n[3] + math.Sqrt((p/1e6-n[4])/n[2])
}
