package proving

import (
	"fmt"
	"slices"
	"strings"
	"time"

	"heatreeve/agent/site"
	"heatreeve/ingest/quality"
)

// mostLags bounds the lags that are remembered of a tag.
const mostLags = 512

// tagTrial is what was heard of one tag.
type tagTrial struct {
	live, kept  int
	marks       map[quality.Mark]int // of readings that are not good
	first, last int64                // stamps of live readings
	gap         int64                // longest between two stamps
	newest      Heard                // by stamp, live or kept
	min, max    float64
	value       float64 // of the last live reading
	repeats     bool    // one came with the value of the one before
	step        float64 // smallest rise from one to the next, 0 where there was none
	lags        []int64
}

func (t *tagTrial) hear(h Heard) {
	if t.live+t.kept == 0 || h.At >= t.newest.At {
		t.newest = h
	}
	if h.Mark != quality.None && h.Mark != quality.Refused { // which is told among the refusals
		if t.marks == nil {
			t.marks = map[quality.Mark]int{}
		}
		t.marks[h.Mark]++
	}
	if h.Retained {
		t.kept++
		return
	}
	t.live++
	t.climb(h.Value)
	switch {
	case t.live == 1:
		t.first, t.last, t.min, t.max = h.At, h.At, h.Value, h.Value
	case h.At > t.last:
		t.gap = max(t.gap, h.At-t.last)
		t.last = h.At
	}
	if h.Mark.Quality() != quality.Bad {
		t.min, t.max = min(t.min, h.Value), max(t.max, h.Value)
	}
	if h.Stamped && len(t.lags) < mostLags {
		t.lags = append(t.lags, h.Arrival-h.At)
	}
}

// climb notes by how much a register rises.
func (t *tagTrial) climb(x float64) {
	rise := x - t.value
	switch t.value = x; {
	case t.live == 1:
	case rise == 0:
		t.repeats = true
	case rise > 0 && (t.step == 0 || rise < t.step):
		t.step = rise
	}
}

// resolution is the step of a register: as the file declares it, or as seen, where it stood
// still at times.
func (t *tagTrial) resolution(declared float64) float64 {
	if declared == 0 && t.repeats {
		return t.step
	}
	return declared
}

// Tag is what a trial found out about one tag.
type Tag struct {
	Name, Topic string
	Live, Kept  int     // readings, and those of messages that the broker had kept
	Every       float64 // mean time between live readings, s; 0 where fewer than two came
	Has         bool    // a reading came
	Value       float64 // the newest, SI
	Shown       string  // the same in the unit of the tag
	Mark        quality.Mark
	Stamped     bool
	Behind      float64 // median of how far stamps are behind arrivals, s
	Jitter      float64 // half of the span of the middle 80 % of it, s
	Findings    []Finding

	state    bool // it is of a pump or a bypass, which stand as they are for days
	siblings int  // tags of the same Sparkplug source that were heard
}

// Doubtful tells whether the newest reading is not good.
func (t *Tag) Doubtful() bool { return t.Has && t.Mark.Quality() != quality.Good }

func (t *Trial) tellTag(i int, seconds float64, refused []Refused) Tag {
	declared, heard := &t.site.Tags[i], &t.tags[i]
	told := Tag{Name: declared.Name, Topic: declared.Topic, Live: heard.live, Kept: heard.kept, Stamped: declared.Time != ""}
	if m := declared.Metric; m != nil {
		told.Topic, told.Stamped = strings.TrimSpace(m.Source()+" "+m.Name), m.Name != ""
	}
	told.siblings, told.state = t.siblings(i), t.state(i)
	if heard.live > 1 {
		told.Every = float64(heard.last-heard.first) / float64(heard.live-1) / 1e9
	}
	if heard.live+heard.kept > 0 {
		told.Has, told.Value, told.Mark = true, heard.newest.Value, heard.newest.Mark
		told.Shown = declared.Show(told.Value)
	}
	if lags := slices.Sorted(slices.Values(heard.lags)); len(lags) > 0 {
		n := len(lags)
		told.Behind = float64(lags[n/2]) / 1e9
		told.Jitter = float64(lags[n-1-n/10]-lags[n/10]) / 2e9
	}
	told.Findings = heard.findings(declared, &told, seconds, refused, time.Duration(t.site.Timing.Ahead))
	return told
}

// siblings counts the other metrics of the same Sparkplug source that were heard.
func (t *Trial) siblings(i int) int {
	n := 0
	own := t.site.Tags[i].Metric
	for k := range t.site.Tags {
		if m := t.site.Tags[k].Metric; own != nil && m != nil && m.Name != "" && k != i && m.Source() == own.Source() && t.tags[k].live > 0 {
			n++
		}
	}
	return n
}

// state tells whether the tag is of the pump or the bypass of a load.
func (t *Trial) state(i int) bool {
	return slices.ContainsFunc(t.site.Loads, func(l site.HeatLoad) bool {
		return l.HasRunning && l.Running.Tag == i || l.HasBypass && l.Bypass.Tag == i
	})
}

// wanted is how many equal readings in a row look stuck.
const wanted = 10

func (t *tagTrial) findings(declared *site.Tag, told *Tag, seconds float64, refused []Refused, ahead time.Duration) (all []Finding) {
	add := func(level Level, format string, args ...any) {
		all = append(all, Finding{level, fmt.Sprintf(format, args...)})
	}
	for _, r := range refused {
		level := Note
		if told.Live == 0 {
			level = Fault
		}
		why := r.Reason
		if r.Last != "" {
			why += ": " + r.Last
		}
		add(level, "%d messages refused, %s", r.Count, why)
	}
	silent := declared.OnChange || declared.Liveness != nil && declared.Liveness.Online != ""
	switch {
	case told.Live > 0:
	case len(refused) > 0:
	case told.Kept > 0 && !silent:
		add(Fault, "only a message that the broker had kept; nothing live in %.0f s", seconds)
	case declared.Metric != nil && told.siblings > 0:
		add(Fault, "nothing by Sparkplug from %q in %.0f s, though other metrics of its source came: check its name, letter by letter, or listen for longer", told.Topic, seconds)
	case declared.Metric != nil:
		add(Fault, "nothing by Sparkplug from %q in %.0f s; metrics sent by alias are known from the birth of their node on, so let it be born while this listens, or let commands: rebirth of the broker ask for it", told.Topic, seconds)
	case silent:
		add(Note, "nothing live in %.0f s; it reports on change, so listen for longer, or make it change", seconds)
	default:
		add(Fault, "no message on topic %q in %.0f s; check the topic, the publisher and the broker's access list, or listen for longer", declared.Topic, seconds)
	}
	if gap := time.Duration(t.gap); !silent && declared.Holds() > 0 && gap > declared.Holds() {
		add(Fault, "%v without a reading, but max_age is %v: what needs it is blind in between", gap.Round(time.Second), declared.Holds())
	}
	if t.live >= wanted && t.min == t.max && declared.Counter == nil && declared.Liveness == nil && !declared.OnChange && !told.state && !t.stands(declared.Unit.Dimension) {
		add(Note, "has not moved in %d readings; stuck, or with a coarse step", t.live)
	}
	if told.Stamped && len(t.lags) > 0 {
		t.clock(declared, told, ahead, add)
	}
	for _, m := range slices.Sorted(func(yield func(quality.Mark) bool) {
		for m := range t.marks {
			if !yield(m) {
				return
			}
		}
	}) {
		level := Note
		if m.Quality() == quality.Bad && t.marks[m] == t.live+t.kept {
			level = Fault
		}
		add(level, "%d readings %v by their source: %v", t.marks[m], m.Quality(), m)
	}
	return all
}

// slowClock is how far stamps may lie beside arrivals without a remark, s.
const slowClock = 5

func (t *tagTrial) clock(declared *site.Tag, told *Tag, ahead time.Duration, add func(Level, string, ...any)) {
	lag := time.Duration(told.Behind * float64(time.Second)).Round(100 * time.Millisecond)
	zone := ""
	if quarter := 15 * time.Minute; lag.Abs() > quarter/2 && (lag-lag.Round(quarter)).Abs() < 30*time.Second {
		zone = "; that is the step of a time zone"
	}
	switch {
	case -lag > ahead/2:
		add(Fault, "stamps are %v ahead of this machine's clock, which refuses more than %v: set the clocks by network time%s", -lag, ahead, zone)
	case declared.Holds() > 0 && lag > declared.Holds():
		add(Fault, "stamps are %v behind this machine's clock, more than its max_age of %v: figures would be shown blind%s", lag, declared.Holds(), zone)
	case told.Behind > slowClock || told.Behind < -slowClock:
		add(Note, "stamps are %v behind this machine's clock%s", lag, zone)
	}
}
