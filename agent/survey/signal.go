package survey

import (
	"fmt"
	"slices"
	"strings"
)

// Signal is one number, or one state, that a topic carries.
type Signal struct {
	Topic string `json:"-"`
	// Metric is the name of a Sparkplug metric, whose source is Topic; "" of any other.
	Metric string `json:"metric,omitempty"`
	// Samples is the pointer of the list that the messages carry, "" where they carry one
	// value. Value, Time, Quality and Unit are pointers in the message, or in an
	// element of that list; "" for none, and as Value for a bare number. Of a metric, Unit is
	// the key of the property that names it.
	Samples string `json:"samples,omitempty"`
	Value   string `json:"value"`
	Time    string `json:"time,omitempty"`
	Quality string `json:"quality,omitempty"`
	Unit    string `json:"unit,omitempty"`

	// Truth tells that it is true or false, for which 1 and 0 stand below.
	Truth bool `json:"truth,omitempty"`

	Count    int     `json:"count"`
	Nulls    int     `json:"nulls,omitempty"`
	Min      float64 `json:"min"`
	Max      float64 `json:"max"`
	Last     float64 `json:"last"`
	Decimals int     `json:"decimals"`
	// Still tells that the number did not move, Rising that it only rose.
	Still  bool `json:"still,omitempty"`
	Rising bool `json:"rising,omitempty"`

	// Kept tells that it came in nothing but a message that the broker had kept.
	Kept bool `json:"kept,omitempty"`

	Says      string   `json:"says,omitempty"`      // the unit that the payload names
	Qualities []string `json:"qualities,omitempty"` // words or codes met

	Clock *Clock  `json:"clock,omitempty"` // nil without stamps in live messages
	Every float64 `json:"every_s"`         // as of the topic
	Gap   float64 `json:"longest_gap_s"`

	Tag   string `json:"tag"` // a name for it
	Guess Guess  `json:"guess"`
}

// Clock is how stamps lie against this machine's clock, s.
type Clock struct {
	Behind float64 `json:"behind_s"` // the median; below zero where they are ahead
	Jitter float64 `json:"jitter_s"` // half of the span that holds the middle 80 %
}

// words of members that hold not a measurement but something about it.
var (
	timeWords    = []string{"t", "ts", "time", "timestamp", "stamp", "datetime", "date", "at", "when"}
	qualityWords = []string{"q", "quality", "qual", "status", "statuscode", "state", "qc", "opcquality"}
	unitWords    = []string{"u", "unit", "units", "uom", "engunit", "engunits", "engineeringunit", "engineeringunits", "eu"}
	valueWords   = []string{"v", "val", "value", "reading", "pv", "measurement", "data"}
	otherWords   = []string{"seq", "sequence", "id", "msgid", "version", "ver", "schema", "alias", "rssi", "snr", "battery", "uptime", "index", "count", "n", "bdseq"}
)

// plain is a name in small letters, without what parts its words.
func plain(name string) string {
	return strings.Map(func(r rune) rune {
		switch {
		case r >= 'A' && r <= 'Z':
			return r + 'a' - 'A'
		case r == '_' || r == '-' || r == ' ' || r == '.':
			return -1
		}
		return r
	}, name)
}

// named tells whether the member at pointer has one of the names.
func named(pointer string, names []string) bool { return slices.Contains(names, plain(key(pointer))) }

// measures tells whether the number at pointer is likely to be a measurement.
func (t *topic) measures(pointer string) bool {
	s := t.series[pointer]
	switch {
	case s.tells():
		return !named(pointer, otherWords)
	case s.numbers == 0 || s.numbers < s.texts:
		return false
	case pointer == "":
		return true
	case !t.plug && s.timed() && (named(pointer, timeWords) || s.rising()):
		return false
	}
	return !named(pointer, qualityWords) && !named(pointer, otherWords)
}

// signal sums up what is known of the number at pointer.
func (t *topic) signal(pointer string) Signal {
	s := t.series[pointer]
	samples, within := list(pointer)
	told := Signal{
		Topic: t.name, Samples: samples, Value: within,
		Count: s.numbers, Nulls: s.nulls, Min: s.min, Max: s.max, Last: s.last, Decimals: s.decimals,
		Still: s.numbers > 1 && s.min == s.max, Rising: s.rising(),
		Kept: t.live == 0,
	}
	if s.tells() {
		told.truths(s)
	}
	if t.live > 1 {
		told.Every = float64(t.last-t.first) / float64(t.live-1) / 1e9
		told.Gap = float64(t.longestGap) / 1e9
	}
	if t.plug {
		told.Metric, told.Value, told.Clock = pointer, "", s.clock()
		told.Unit, told.Says = s.unit.key, s.unit.text
		told.Guess = guess(&told)
		return told
	}
	if at, ok := t.beside(pointer, func(p string, x *series) bool { return x.timed() && (named(p, timeWords) || x.rising()) }); ok {
		_, told.Time = list(at)
		told.Clock = t.series[at].clock()
	}
	if at, ok := t.beside(pointer, func(p string, x *series) bool { return named(p, qualityWords) }); ok {
		_, told.Quality = list(at)
		told.Qualities = t.series[at].met()
	}
	names := func(p string, x *series) bool { return named(p, unitWords) && len(x.words) > 0 }
	at, ok := t.beside(pointer, names)
	if !ok && samples != "" && samples != whole {
		at, ok = t.beside(samples, names) // beside the list, for all of it
	}
	if ok {
		_, told.Unit = list(at)
		told.Says = t.series[at].words[0]
	}
	if by, ok := t.namedBy(pointer); ok {
		told.Guess.Why = fmt.Sprintf("not one tag: each element of the list is another, named by its %q", key(by))
		return told
	}
	if strings.Contains(within, "/"+each) {
		told.Guess.Why = "a list within a list, which no tag reads"
		return told
	}
	told.Guess = guess(&told)
	return told
}

// truths sums up what came of true and false.
func (told *Signal) truths(s *series) {
	told.Truth, told.Count = true, s.truths[0]+s.truths[1]
	told.Min, told.Max = float64(fromBool(s.truths[0] == 0)), float64(fromBool(s.truths[1] > 0))
	told.Last, told.Still = told.Max, told.Count > 1 && told.Min == told.Max
}

// beside finds the place that says something about the value at pointer: in the object
// that holds it, or else in those around that, but not outside of a list's element.
func (t *topic) beside(pointer string, is func(string, *series) bool) (string, bool) {
	samples, _ := list(pointer)
	for around := pointer; around != ""; {
		around = parent(around)
		best := ""
		for p, s := range t.series {
			if p != pointer && parent(p) == around && is(p, s) && (best == "" || p < best) {
				best = p
			}
		}
		if best != "" {
			return best, true
		}
		if samples != "" && strings.HasSuffix(around, "/"+each) {
			break
		}
	}
	return "", false
}

// clock sums up how the stamps lie.
func (s *series) clock() *Clock {
	if len(s.lags) == 0 {
		return nil
	}
	lags := slices.Sorted(slices.Values(s.lags))
	n := len(lags)
	low, high := lags[n/10], lags[n-1-n/10]
	return &Clock{Behind: float64(lags[n/2]) / 1e9, Jitter: float64(high-low) / 2e9}
}

// met are the qualities met, as words or codes.
func (s *series) met() []string {
	met := slices.Clone(s.words)
	if s.numbers > 0 {
		met = append(met, number(s.min))
		if s.max != s.min {
			met = append(met, number(s.max))
		}
	}
	return met
}
