package helmholtz

import (
	"math"

	"heatreeve/thermo"
)

// idealCp is the expanded uncertainty of cp of the dilute gas, a fraction. The
// ideal parts come from molecular spectra.
const idealCp = 1e-3

// Uncertainty halves the expanded uncertainties that the papers state (from
// memory, the larger where a paper divides its range). That of cp falls to 0.05 %
// as the gas thins out, since the spectra fix the ideal part; a gas at a hundredth of the
// reducing density has a sixth of the rest. Within 5 % of the critical
// temperature and a factor 1.6 of the critical pressure both grow, cp up to
// tenfold and density up to thirtyfold: a guess on the safe side, no source.
func (f *fluid) Uncertainty(T, p float64) (cp, density float64) {
	cp, density = f.stated.cp/2, f.stated.density/2
	if f.phase == thermo.Gas {
		thin := p / (f.dense * f.r * T)
		part := thin / (thin + 0.05)
		cp = idealCp/2 + part*max(cp-idealCp/2, 0)
	}
	far := max(math.Abs(T/f.criticalT-1)/0.05, math.Abs(math.Log(p/f.criticalP))/0.5)
	if near := max(1-far, 0); near > 0 {
		cp *= 1 + 9*near
		density *= 1 + 29*near
	}
	return cp, density
}
