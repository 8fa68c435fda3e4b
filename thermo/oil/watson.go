package oil

import "fmt"

// Watson factors of petroleum: aromatic 10, naphthenic 11, paraffinic 12.7 (from memory).
const aromatic, naphthenic, paraffinic = 10.0, 11.0, 12.7

// Specific gravities between which a Watson factor usual in the group stands for one that
// is not known. Beyond, it would be another product.
const minUsualSG, maxUsualSG = 0.70, 1.05

// setHeat chooses the correlation of cp, and the vapour pressure.
func (f *petroleum) setHeat(g *group, sg, watson float64) error {
	switch {
	case watson == 0:
		return f.setUnknownHeat(g, sg)
	case !(watson >= minWatson && watson <= maxWatson):
		return fmt.Errorf("watson factor of %g; it lies from %g to %g, or is 0 where it is not known", watson, minWatson, maxWatson)
	}
	f.name += fmt.Sprintf(", Watson %.4g", watson)
	f.cp, f.source = keslerLee(sg, watson), "cp by Kesler and Lee, Hydrocarbon Processing 55(3) (1976)"
	f.others = []quadratic{cragoe(sg), api7D22(sg, watson), fallonWatson(sg, watson)}
	f.endReduced(sg, watson)
	if f.maxT <= minPetroleumT {
		return fmt.Errorf("a Watson factor of %g makes it so light that it has a reduced temperature of %g at %.4g °C already", watson, keslerLeeReduced, f.maxT-zeroC)
	}
	f.boiling = newBoiling(sg, watson)
	f.minP, f.boilsBelow = f.boiling.pressure(minPetroleumT+boilingMargin), f.boiling.pressure(f.maxT+boilingMargin)
	if f.boiling.pressure(fifteenC+boilingMargin) > maxPressure {
		return fmt.Errorf("a Watson factor of %g makes it so light that it boils at %g kPa and 15 °C already", watson, maxPressure/1e3)
	}
	return nil
}

// setUnknownHeat is setHeat without a Watson factor.
func (f *petroleum) setUnknownHeat(g *group, sg float64) error {
	least := naphthenic
	switch {
	case sg >= cragoeMinSG && sg <= cragoeMaxSG:
		f.cp, f.source = cragoe(sg), "cp by Cragoe, NBS Miscellaneous Publication 97 (1929)"
	case sg >= minUsualSG && sg <= maxUsualSG:
		least = aromatic
		f.cp = keslerLee(sg, g.watson)
		f.source = fmt.Sprintf("cp by Kesler and Lee, Hydrocarbon Processing 55(3) (1976), at a Watson factor of %g that is usual in %s", g.watson, g.name)
		f.endReduced(sg, g.watson)
	default:
		return fmt.Errorf("specific gravity is %.5g, and cp without a Watson factor goes from %g to %g; give the Watson factor", sg, minUsualSG, maxUsualSG)
	}
	for _, kw := range []float64{least, paraffinic} {
		f.others = append(f.others, keslerLee(sg, kw), api7D22(sg, kw), fallonWatson(sg, kw))
	}
	return nil
}

// endReduced ends the range where Kesler and Lee's cp does.
func (f *petroleum) endReduced(sg, watson float64) {
	if limit := keslerLeeReduced * criticalTemperature(sg, watson); limit < f.maxT {
		f.maxT, f.ends = limit, "reduced temperature of 0.85, where Kesler and Lee's cp ends"
	}
}
