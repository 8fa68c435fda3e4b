package food

import "math"

type deviation struct{ t, cp, density float64 }

// deviations are how far the water polynomials are from IAPWS-IF97, as fractions: measured
// at 1 atm, beyond 100 °C at saturation.
var deviations = [...]deviation{
	{0, 0.0215, 0.0029}, {5, 0.0182, 0.0029}, {10, 0.0160, 0.0029}, {20, 0.0133, 0.0026}, {40, 0.0108, 0.0011}, {60, 0.0096, 0.0009},
	{80, 0.0094, 0.0018}, {95, 0.0099, 0.0018}, {120, 0.0118, 0.0012}, {135, 0.0139, 0.0018}, {150, 0.0167, 0.0043},
}

// Half-widths of what the dry components leave open, as fractions: cp by the errors that
// Choi and Okos gave for their fits, up to 6 % (from memory); density by that of milk, 0.6
// % to 0.7 % above ours at a tenth of solids (from memory). Fat by itself is known better:
// vegetable oil has 920 kg/m³ at 20 °C and 835 at 150 °C, crystals of fat at 0 °C some 960
// (from memory), ours 917, 863 and 926.
const dryCp, dryDensity, fatDensity = 0.06, 0.08, 0.04

// Melting fat takes up so much in J/kg up to meltedAt in °C.
const meltingHeat, meltedAt = 80e3, 40.0

// Uncertainty puts half-widths together, for water its deviation from IAPWS-IF97 at T, for
// the rest 6 % of cp and 8 % of density, of fat 4 %, each by its share of the food's cp or
// volume. Below 40 °C the fat may be melting, whatever fat it is: 80 kJ/kg spread over
// those 40 K is another part of the half-width of cp, and so is what an incompressible fluid
// leaves out of cp at p (see [thermo.Incompressible]), 0.1 % of milk at 2 MPa. The sum is
// taken for rectangular: u = half-width/√3.
func (m *mixture) Uncertainty(T, p float64) (cp, density float64) {
	t := min(max(T-zeroC, 0), maxT-zeroC)
	ofWater := deviationAt(t)
	total, volume := m.cp.at(t), m.volume(t)
	water := m.water * waterPart.cp.at(t) / total
	cp = water*ofWater.cp + (1-water)*dryCp + m.stiff.CpChange(p)/total
	if t < meltedAt {
		cp += m.fat * meltingHeat / meltedAt / total
	}
	water, fatty := m.water/waterPart.density.at(t)/volume, m.fat/fat.density.at(t)/volume
	density = water*ofWater.density + fatty*fatDensity + (1-water-fatty)*dryDensity
	return cp / math.Sqrt(3), density / math.Sqrt(3)
}

// deviationAt draws straight lines through the deviations, at t in °C.
func deviationAt(t float64) deviation {
	k := 1
	for k < len(deviations)-1 && deviations[k].t < t {
		k++
	}
	a, b := &deviations[k-1], &deviations[k]
	u := (t - a.t) / (b.t - a.t)
	return deviation{t, a.cp + u*(b.cp-a.cp), a.density + u*(b.density-a.density)}
}
