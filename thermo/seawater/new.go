package seawater

import (
	"fmt"
	"math"

	"heatreeve/thermo"
	"heatreeve/thermo/water"
)

// New returns seawater of the given absolute salinity in kg of salt per kg of seawater, from 0
// to 0.12; ocean water has 0.035.
func New(salinity float64) (thermo.Fluid, error) {
	if !(salinity >= 0 && salinity <= maxSalinity) {
		return nil, fmt.Errorf("salinity %g kg/kg is outside of 0 to %g; ocean water has 0.035", salinity, maxSalinity)
	}
	lowest, err1 := water.SaturationPressure(zero)
	highest, err2 := water.SaturationPressure(maxT)
	if err1 != nil || err2 != nil {
		panic("seawater: its temperatures are outside of water's saturation line")
	}
	s := &seawater{
		name: fmt.Sprintf("seawater %.4g g/kg", 1e3*salinity), salinity: salinity,
		bounds:      thermo.Bounds{MinT: zero, MaxT: maxT, MinP: lowest, MaxP: maxP},
		boilsBelowP: highest,
		freezing:    freezingPoint(salinity),
	}
	s.setDensity()
	s.setHeat()
	return s, nil
}

func (s *seawater) setDensity() {
	g := 1e3 * s.salinity
	for i := range s.density {
		s.density[i] = fresh[i] + s.salinity*salt[i]
	}
	s.density[2] += saltier * s.salinity * s.salinity
	for i := range s.squeeze {
		s.squeeze[i] = 1e-6 * nayarSqueeze[i]
	}
	for i := range nayarSalt {
		s.squeeze[i] += 1e-6 * g * nayarSalt[i]
	}
	for i := range s.relief {
		s.relief[i] = 1e-12 * nayarRelief[i]
	}
	s.relief[0] += 1e-12 * g * nayarSaltRelief
}

// setHeat turns cp into a polynomial of t and finds the constants of integration.
func (s *seawater) setHeat() {
	g := 1e3 * s.salinity
	var a [4]float64
	for i, c := range jamieson {
		a[i] = 1e3 * (c[0] + g*(c[1]+g*c[2])) * math.Pow(scale1968, float64(i))
		s.push[i] = 1e-6 * (nayarCp[i][0] + g*nayarCp[i][1])
	}
	s.cp = [4]float64{
		a[0] + zero*(a[1]+zero*(a[2]+zero*a[3])),
		a[1] + zero*(2*a[2]+zero*3*a[3]),
		a[2] + zero*3*a[3],
		a[3],
	}
	_, s.enthalpy = s.heat(base, 0)
	_, pushed := s.heat(base, 1) // one pascal more
	rho, beta, _ := s.expansion(base, atmosphere)
	s.pushed = pushed - s.enthalpy - (1-(base+zero)*beta)/rho
}

// freezingPoint in K at one atmosphere: F. J. Millero and W. H. Leung (1976) as in UNESCO
// Technical Papers in Marine Science 44 (1983), for practical salinities from 4 to 40
// (coefficients from memory), within 0.01 K of TEOS-10 to 42 g/kg and 0.05 K to 120 g/kg, on
// the cold side.
func freezingPoint(salinity float64) float64 {
	practical := salinity * 1e3 * 35 / 35.16504
	return zero + practical*(-0.0575+1.710523e-3*math.Sqrt(practical)-2.154996e-4*practical)
}
