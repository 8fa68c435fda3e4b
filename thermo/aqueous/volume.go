package aqueous

import (
	"fmt"

	"heatreeve/thermo"
)

// NewByVolume is [New] with a concentration by volume: that of the pure solute at
// 20 °C over that of the mixture at 20 °C, as alcoholic strength is defined (OIML R 22).
// The mass fraction x follows from
//
//	φ = x ρ(20 °C, x) / ρ(pure solute, 20 °C)
//
// Counted against the sum of the volumes before mixing, which the trade may mean
// as well, the figure is smaller: at 60 % by mass by 0.7 % to 1.3 % of volume for the
// glycols, by up to 2.4 % for the alcohols. Where it matters, give the mass
// fraction. The conversion tables of ASHRAE (10 to 50 vol %) are met within 0.3 %
// of volume, closer than by the other count; that of OIML for
// ethanol (from memory) within 0.02 %.
//
// Known are the glycols, ethanol, methanol and glycerol; a solid or a gas has no
// volume of its own to count, and is refused. The uncertainty is a standard
// uncertainty of the volume fraction, at most 0.1.
func NewByVolume(solute string, volumeFraction, volumeFractionUncertainty float64) (thermo.Fluid, error) {
	s, err := lookup(solute)
	if err != nil {
		return nil, err
	}
	if s.density20 == 0 {
		return nil, fmt.Errorf("%s by volume: only solutes that are liquid at 20 °C come by volume; state its mass fraction", s.name)
	}
	// The last bit of the largest strength must not shut it out.
	if highest := s.volumeFraction(s.max); !(volumeFraction >= 0 && volumeFraction <= highest*(1+1e-12)) {
		return nil, fmt.Errorf("%s of volume fraction %g; the polynomials hold from 0 to %.4g (mass fraction %g)", s.name, volumeFraction, highest, s.max)
	}
	if u := volumeFractionUncertainty; !(u >= 0 && u <= maxFractionUncertainty) {
		return nil, fmt.Errorf("%s: uncertainty of the volume fraction is %g; it lies from 0 to %g", s.name, u, maxFractionUncertainty)
	}
	x := s.massFraction(volumeFraction)
	name := fmt.Sprintf("%s %.4g vol %%", s.name, 100*volumeFraction)
	return s.mix(name, x, volumeFractionUncertainty/s.volumeSlope(x)), nil
}

const roomTemperature = 293.15 // K

// volumeFraction at mass fraction x; it rises with x.
func (s *solute) volumeFraction(x float64) float64 {
	rho := at(&s.density, x-s.baseX)
	return x * rho.at(roomTemperature-s.baseT) / s.density20
}

// volumeSlope is its derivative by x.
func (s *solute) volumeSlope(x float64) float64 {
	rho, slope := at(&s.density, x-s.baseX), slopeAt(&s.density, x-s.baseX)
	t := roomTemperature - s.baseT
	return (rho.at(t) + x*slope.at(t)) / s.density20
}

// massFraction inverts volumeFraction by bisection.
func (s *solute) massFraction(volume float64) float64 {
	lo, hi := 0.0, s.max
	for range 60 {
		if x := (lo + hi) / 2; s.volumeFraction(x) < volume {
			lo = x
		} else {
			hi = x
		}
	}
	return (lo + hi) / 2
}
