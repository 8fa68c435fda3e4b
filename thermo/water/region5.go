package water

import "heatreeve/thermo"

// Basic equation of region 5: R7-97(2012), equations 32 to 34, tables 37 and 38.
//
//	g/(RT) = ln π + Σ n° τ^J° + Σ n π^I τ^J,  π = p/1 MPa, τ = 1000 K/T
//
// Range 1073.15 K to 2273.15 K, pressure above zero up to 50 MPa. Checked
// against every value of table 42 and, at other states, against IAPWS-95.
const (
	region5Pressure    = 1e6    // Pa
	region5Temperature = 1000.0 // K
)

var region5Ideal = [...]idealTerm{
	{-13.179983674201, 0},
	{6.8540841634434, 1},
	{-0.024805148933466, -3},
	{0.36901534980333, -2},
	{-3.1161318213925, -1},
	{-0.32961626538917, 2},
}

var region5Residual = [...]term{
	{0.0015736404855259, 1, 1},
	{0.00090153761673944, 1, 2},
	{-0.0050270077677648, 1, 3},
	{2.2440037409485e-06, 2, 3},
	{-4.1163275453471e-06, 2, 9},
	{3.7919454822955e-08, 3, 7},
}

var region5Weights = weigh(region5Residual[:])

// region5 follows from γ by the relations of R7-97(2012), table 39, which are
// those of region 2.
func region5(T, p float64) thermo.Properties {
	pi, tau := p/region5Pressure, region5Temperature/T
	t, tt := region5IdealSums(tau)
	n := &region5Weights
	rt := gasConstant * T
	b := thermo.Balance{
		Enthalpy: rt * (t + region5Sum(&n.j, pi, tau)),
		Cp:       -gasConstant * (tt + region5Sum(&n.jj, pi, tau)),
		Density:  p / (rt * (1 + region5Sum(&n.i, pi, tau))),
	}
	d := p/(rt*b.Density) - region5Sum(&n.ij, pi, tau)
	return complete(b, p, b.Cp-gasConstant*d*d/(1-region5Sum(&n.ii, pi, tau)))
}

// region5IdealSums returns τγ°τ and τ²γ°ττ.
func region5IdealSums(tau float64) (t, tt float64) {
	r := 1 / tau
	y := [...]float64{1, tau, r * r * r, r * r, r, tau * tau}
	for k, e := range region5Ideal {
		j := float64(e.j)
		t += j * e.n * y[k]
		tt += j * (j - 1) * e.n * y[k]
	}
	return t, tt
}

// region5Sum returns Σ n x^I y^J over the lines of table 38, with the factors n.
func region5Sum(n *lines, x, y float64) float64 {
	y3 := y * y * y
	y6 := y3 * y3
	return x * (y*(n[0]+y*n[1]) + y3*n[2] + x*(y3*n[3]+y6*y3*n[4]) + x*x*y6*y*n[5])
}
