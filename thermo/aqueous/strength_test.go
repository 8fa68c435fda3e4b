package aqueous

import (
	"errors"
	"math"
	"testing"

	"heatreeve/thermo"
)

// Strength is the derivative of cp and density, signed, so that the change of their
// product, which a volume flow is multiplied by, is that of neighbouring mixtures. What a
// root sum of squares of the two would say instead is too much for glycols and salts, whose
// cp and density go opposite ways, and too little by up to √2 where they go the same way.
func TestStrengthMovesBothAtOnce(t *testing.T) {
	const u = 0.005
	mixed := map[string]bool{"ethanol": true, "methanol": true, "ammonia": true}
	left, least := 0.0, 1.0
	for k := range solutes {
		s := &solutes[k]
		for _, part := range []float64{0.2, 0.4, 0.6, 0.8} {
			x := part * s.max
			f, weaker, stronger := mustNew(t, s.name, x, u), mustNew(t, s.name, x-1e-5, 0), mustNew(t, s.name, x+1e-5, 0)
			lo, hi := f.Bounds().MinT+1, f.Bounds().MaxT
			for _, T := range []float64{lo, (lo + hi) / 2, hi} {
				cp, density := f.(thermo.Blend).Strength(T, 3e5)
				a, err1 := weaker.At(T, 3e5)
				b, err2 := stronger.At(T, 3e5)
				if err := errors.Join(err1, err2); err != nil {
					t.Fatal(err)
				}
				want := u * math.Log(b.Cp*b.Density/(a.Cp*a.Density)) / 2e-5
				if !(math.Abs(cp+density-want) <= 1e-8) {
					t.Errorf("%s at %g K: the product changes by %g, want %g", f.Name(), T, cp+density, want)
				}
				if mixed[s.name] {
					least = min(least, math.Hypot(cp, density)/math.Abs(cp+density))
					continue
				}
				left = max(left, math.Abs(cp+density)/max(-cp, density))
				if !(cp < 0 && density > 0) {
					t.Errorf("%s at %g K: cp changes by %g, density by %g", f.Name(), T, cp, density)
				}
			}
		}
	}
	t.Logf("of glycols and salts at most %.3f of the greater one is left; of the others the root sum of squares is down to %.3f of the change", left, least)
	if !(left <= 0.98) || !(least >= 0.7 && least < 0.75) {
		t.Errorf("left %g, want at most 0.98; least %g, want 0.71", left, least)
	}
}
