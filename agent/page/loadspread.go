package page

import (
	"math"
	"strings"

	"heatreeve/agent/answer"
	"heatreeve/agent/shown"
	"heatreeve/agent/site"
	"heatreeve/thermo/unit"
)

// accuracy tells by how much a tag may be off at an SI reading, as an expanded uncertainty; 0 of a
// constant. What lasts counts alone, which is the accuracy of the instrument.
func accuracy(s *site.Site, from site.Source, x float64) float64 {
	if from.Constant() {
		return 0
	}
	return answer.CoverageFactor * s.Tags[from.Tag].Accuracy.HalfWidth(x) / math.Sqrt(3)
}

// flowAccuracy is that of a mass flow, by the meter of the stream; density is that of the fluid.
func flowAccuracy(s *site.Site, q *site.Stream, density, m float64) float64 {
	raw := m
	switch q.FlowKind {
	case unit.VolumeFlow:
		raw = m / density
	case unit.MolarFlow:
		raw = m / q.Fluid.MolarMass()
	}
	if raw == 0 || math.IsNaN(raw) || math.IsInf(raw, 0) {
		return 0
	}
	return math.Abs(m / raw * accuracy(s, q.Flow, raw))
}

// scale tells a browser how to write SI values: value = (SI − Offset)/Factor, with so many
// decimals; below zero, tens and hundreds are rounded. Spread is the expanded uncertainty in
// the unit, beside which a chart is not to enlarge what it shows.
type scale struct {
	Factor, Offset float64
	Spread         float64
	Decimals       int
	Unit           string
}

// scaleOf has the digits that an expanded uncertainty about a value leaves.
func scaleOf(u unit.Unit, value, expanded float64) scale {
	text, spread := shown.Figure(u, value, expanded)
	decimals := decimalsIn(text, 4)
	if spread != "" {
		decimals = decimalsIn(spread, 2)
	}
	return scale{u.Factor, u.Offset, expanded / u.Factor, decimals, shown.Label(u)}
}

// decimalsIn is how many decimals a figure of so many digits has; below zero, tens and hundreds
// are rounded.
func decimalsIn(text string, digits int) int {
	if _, behind, found := strings.Cut(text, "."); found {
		return len(behind)
	}
	return min(0, digits-len(strings.TrimPrefix(text, "-")))
}

// told is a figure with its ± and unit, as a text.
func told(u unit.Unit, value, expanded float64) string {
	text, spread := shown.Figure(u, value, expanded)
	if spread != "" {
		text += " ± " + spread
	}
	return text + " " + shown.Label(u)
}
