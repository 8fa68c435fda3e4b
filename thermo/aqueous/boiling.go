package aqueous

import (
	"math"

	"heatreeve/thermo/water"
)

// boiling is a lower bound of the temperature at which a mixture boils, or an
// equation for it less what that leaves open.
type boiling interface {
	temperature(p float64) float64 // K, p in Pa from minPressure to maxPressure
	minPressure() float64          // Pa
	why() string
}

// waterBound is the boiling point of water. A mixture with a solute far less
// volatile than water boils later.
type waterBound struct{}

func waterBoils(float64) boiling { return waterBound{} }

// leastPressure in Pa is where water boils at its freezing point.
var leastPressure = water.Liquid().Bounds().MinP

func (waterBound) minPressure() float64 { return leastPressure }

func (waterBound) temperature(p float64) float64 {
	T, err := water.SaturationTemperature(p)
	if err != nil {
		return 0
	}
	return T
}

func (waterBound) why() string {
	return "boiling point of water at this pressure; the mixture boils a little later"
}

// antoine is the boiling point of a pure alcohol, lg(p/bar) = a − b/(T/K + c). Up to
// 60 % by mass a mixture with water boils later: the azeotrope of ethanol, the only
// mixture to boil before it, lies near 96 %, and methanol has none.
type antoine struct {
	name    string
	a, b, c float64
}

// Ethanol: Ambrose and Sprake 1970; methanol: Ambrose, Sprake and Townsend 1975;
// both as fitted for the NIST Chemistry WebBook, from memory. Below 0 °C they are
// extrapolated: within 2 K of Stull's table of 1947 down to 611 Pa.
var (
	ethanol  = antoine{name: "ethanol", a: 5.37229, b: 1670.409, c: -40.191}
	methanol = antoine{name: "methanol", a: 5.20409, b: 1581.341, c: -33.50}
)

func ethanolBoils(float64) boiling  { return &ethanol }
func methanolBoils(float64) boiling { return &methanol }

func (a *antoine) minPressure() float64 { return leastPressure }

func (a *antoine) temperature(p float64) float64 {
	return a.b/(a.a-math.Log10(p/1e5)) - a.c
}

func (a *antoine) why() string {
	return "boiling point of pure " + a.name + " at this pressure; the mixture boils later"
}

// bubble is the bubble point of ammonia in water at one concentration:
// J. Pátek and J. Klomfar, Int. J. Refrigeration 18 (1995) 228-234, equation 1,
// 2 kPa to 2 MPa, from memory:
//
//	T = 100 K · Σ a (1 − y)^m [ln(2 MPa/p)]^n
//
// with the mole fraction y of ammonia. For pure water it is within 1 K of
// IAPWS-IF97, and so 1 K is taken off.
type bubble [5]float64

const bubbleMargin = 1.0 // K

func ammoniaBoils(x float64) boiling {
	const ammonia, water = 17.03026, 18.015268 // g/mol
	dry := 1 - (x/ammonia)/(x/ammonia+(1-x)/water)
	var b bubble
	for _, t := range []struct {
		m float64
		n int
		a float64
	}{
		{0, 0, 3.22302}, {0, 1, -0.384206}, {0, 2, 0.0460965}, {0, 3, -0.00378945}, {0, 4, 0.000135610},
		{1, 0, 0.487755}, {1, 1, -0.120108}, {1, 2, 0.0106154}, {2, 3, -0.000533589},
		{4, 0, 7.85041}, {5, 0, -11.5941}, {5, 1, -0.0523150}, {6, 0, 4.89596}, {13, 1, 0.0421059},
	} {
		b[t.n] += t.a * math.Pow(dry, t.m)
	}
	return &b
}

func (b *bubble) minPressure() float64 { return 2e3 }

func (b *bubble) temperature(p float64) float64 {
	return 100*horner(b[:], math.Log(2e6/min(p, 2e6))) - bubbleMargin
}

func (b *bubble) why() string {
	return "bubble point at this pressure, less 1 K that its equation leaves open"
}

// boilsBelow is the pressure in Pa from which on the bound lies above T in K.
func boilsBelow(b boiling, T float64) float64 {
	lo, hi := b.minPressure(), maxPressure
	for hi/lo > 1.0001 {
		if p := math.Sqrt(lo * hi); b.temperature(p) > T {
			hi = p
		} else {
			lo = p
		}
	}
	return hi
}
