package agent

import (
	"heatreeve/agent/site"
	"heatreeve/ingest"
	"heatreeve/ingest/quality"
	"heatreeve/ingest/signal"
)

// rawSignal gives a tag the conversion of its raw signal. A current is a measurement a
// little beyond its span as well, so that what the session refuses lies further out.
func rawSignal(t *site.Tag, tag *ingest.Tag) {
	s := t.Signal
	slack := slackOf(t)
	switch {
	case s.Root && s.Loop:
		tag.Signal = signal.RootOfCurrent(t.Max, s.CutOff, slack)
	case s.Root:
		tag.Signal = signal.Root{Full: t.Max, Span: s.FullAt, CutOff: s.CutOff}
	case s.Loop:
		tag.Signal = signal.Current{Lo: t.Min, Hi: t.Max, Slack: slack}
	default:
		tag.Signal = signal.Resistance{R0: s.R0, Lead: s.Lead}
	}
	if s.Loop {
		lo, hi := signal.Within()
		span := t.Max - t.Min
		tag.Min, tag.Max = t.Min+lo*span, t.Min+hi*span
	}
}

// loopWidth is the span of a current, mA, and mostSlack how far from an end of it a reading
// may be by the accuracy of its tag and not be marked: half of what NE 43 leaves for a
// measurement below 4 mA.
const (
	loopWidth = 16
	mostSlack = 0.1
)

// slackOf is by how many mA a zero or full span may be off: as far as the tag's accuracy at
// either end; that of a root, as far as its cut-off.
func slackOf(t *site.Tag) float64 {
	if t.Signal.Root {
		return min(loopWidth*t.Signal.CutOff*t.Signal.CutOff, mostSlack)
	}
	off := max(t.Accuracy.HalfWidth(t.Min), t.Accuracy.HalfWidth(t.Max))
	return min(loopWidth*off/(t.Max-t.Min), mostSlack)
}

var qualityCodes = map[string]ingest.QualityCode{"OPC UA": ingest.OPCUA, "NE 107": ingest.NE107, "Sparkplug": ingest.Sparkplug}

func qualityOf(q *site.Quality) *ingest.Quality {
	if q == nil {
		return nil
	}
	out := &ingest.Quality{At: q.At, Code: qualityCodes[q.Code], AbsentIsGood: q.AbsentIsGood}
	for m, words := range map[quality.Mark][]string{quality.None: q.Good, quality.Doubted: q.Uncertain, quality.Rejected: q.Bad} {
		for _, w := range words {
			if out.Words == nil {
				out.Words = make(map[string]quality.Mark)
			}
			out.Words[w] = m
		}
	}
	return out
}
