package helmholtz

import (
	"math"

	"heatreeve/thermo"
)

// liquidCp is the least expanded uncertainty of cp that is claimed for a liquid.
const liquidCp = 0.02

// Uncertainty halves the expanded uncertainties (k = 2) of the substance. That of
// cp falls to that of the ideal gas as a gas thins out: a gas at a twentieth of
// the reducing density has half of the rest. A liquid has 1 % or more in cp.
// Within 5 % of the critical temperature and a factor of 1.6 of the critical
// pressure both grow, cp up to tenfold and density up to thirtyfold: common
// practice, no source.
func (f *fluid) Uncertainty(T, p float64) (cp, density float64) {
	cp, density = f.stated.cp/2, f.stated.density/2
	if f.phase == thermo.Gas {
		thin := p / (f.dense * f.r * T)
		part := thin / (thin + 0.05)
		cp = f.stated.ideal/2 + part*max(cp-f.stated.ideal/2, 0)
	} else {
		cp = max(cp, liquidCp/2)
	}
	far := max(math.Abs(T/f.criticalT-1)/0.05, math.Abs(math.Log(p/f.criticalP))/0.5)
	if near := max(1-far, 0); near > 0 {
		cp *= 1 + 9*near
		density *= 1 + 29*near
	}
	return cp, density
}
