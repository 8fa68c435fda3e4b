package survey

import (
	"math"
	"slices"

	"github.com/go-json-experiment/json/jsontext"

	"heatreeve/ingest"
)

const (
	// mostWords is how many different texts of one place are remembered.
	mostWords = 4
	// longestWord is how much of a text is remembered, bytes.
	longestWord = 40
	// mostLags is how many lags of stamps are remembered.
	mostLags = 64
	// reach is how far from its arrival a stamp may lie, ns, to be taken for one: a
	// number that happens to look like an instant of last year is none.
	reach = int64(400 * 24 * 3600e9)
)

// series is what came at one place of a topic's messages.
type series struct {
	numbers, texts, nulls, others int
	truths                        [2]int // false and true

	min, max, last float64
	up, down       int // how often the number was above, and below, the one before
	decimals       int // most digits behind the point
	words          []string

	stamps  int     // values that are an instant near their arrival
	lags    []int64 // of live stamps behind their arrival, ns
	lagNext int

	unit property // of a Sparkplug metric: what names its unit
}

func (s *series) hear(kind jsontext.Kind, raw []byte, m *Message) {
	switch kind {
	case '0':
		s.number(raw)
	case '"':
		s.texts++
		s.word(raw)
	case 'n':
		s.nulls++
	case 'f', 't':
		s.truth(kind == 't')
	default:
		s.others++
	}
	if kind == '0' || kind == '"' {
		s.stamp(kind, raw, m)
	}
}

func (s *series) number(raw []byte) {
	x, ok := ingest.Number(raw)
	if !ok {
		s.others++
		return
	}
	s.value(x)
	if i := slices.Index(raw, '.'); i >= 0 {
		s.decimals = max(s.decimals, len(raw)-i-1)
	}
}

func (s *series) value(x float64) {
	switch {
	case s.numbers == 0:
		s.min, s.max = x, x
	case x > s.last:
		s.up++
	case x < s.last:
		s.down++
	}
	s.numbers++
	s.min, s.max, s.last = math.Min(s.min, x), math.Max(s.max, x), x
}

func (s *series) truth(is bool) { s.truths[fromBool(is)]++ }

// tells tells whether true and false came, and no number.
func (s *series) tells() bool { return s.numbers+s.texts == 0 && s.truths[0]+s.truths[1] > 0 }

func (s *series) word(raw []byte) {
	text, err := jsontext.AppendUnquote(nil, raw)
	if err != nil {
		return
	}
	text = text[:min(len(text), longestWord)]
	if len(s.words) < mostWords && !slices.Contains(s.words, string(text)) {
		s.words = append(s.words, string(text))
	}
}

// stamp notes a value that may be the time of measurement. How far a message that the
// broker kept lies behind tells nothing of the clock.
func (s *series) stamp(kind jsontext.Kind, raw []byte, m *Message) {
	at, ok := ingest.Instant(kind, raw)
	if lag := m.At - at; !ok || lag > reach || lag < -reach {
		return
	}
	s.stamps++
	if !m.Retained {
		s.lag(m.At - at)
	}
}

func (s *series) lag(ns int64) {
	if len(s.lags) < mostLags {
		s.lags = append(s.lags, ns)
		return
	}
	s.lags[s.lagNext] = ns
	s.lagNext = (s.lagNext + 1) % mostLags
}

// timed tells whether every value was an instant near its arrival.
func (s *series) timed() bool { return s.stamps > 0 && s.stamps == s.numbers+s.texts }

// rising tells whether the number only ever rose, often enough for a register.
func (s *series) rising() bool { return s.down == 0 && s.up >= 5 }
