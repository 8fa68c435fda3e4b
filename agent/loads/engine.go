package loads

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"heatreeve/ingest/quality"
	"heatreeve/ingest/screen"
)

// Windows are the lengths of the rolling means, ns, in the order of
// [LoadState.Means].
var Windows = [...]int64{minute, 15 * minute, 60 * minute}

// Engine computes the loads of one plant. It is not safe for use by several
// goroutines at once.
type Engine struct {
	cfg       Config
	equations []equation // one a load
	next      int64      // the next grid point to compute; 0 before the first reading
	through   int64
	tags      []tagState
	loads     []loadState
	tally     []Tally
	doubted   [][]Doubted // of each tag, by mark; nil where none has any
	users     [][]int     // loads that read each tag
	bypasses  []bool      // tags that are bypasses of loads
	onChange  []int       // tags that report by exception
	follows   [][]follow  // trends that each tag's readings go into
	holds     []int       // loads with a hold
	counters  []bounded
	besides   [][]int // the sensors beside each tag; nil where there are none
	renewed   []bool  // tags whose numbers meant something else in the restored state
}

// Tally counts what became of a tag's readings.
type Tally struct {
	Repeated, Late, Crowded uint64
	// Reset counts the falls of a counter that no roll-over explains, and Implausible the
	// rises by more than can have passed.
	Reset, Implausible uint64
}

// Doubted is how many readings had a mark.
type Doubted struct {
	Mark     quality.Mark
	Readings uint64
}

// New returns an engine without history. The error names what in cfg cannot be
// computed with.
func New(cfg Config) (*Engine, error) {
	if err := cfg.check(); err != nil {
		return nil, err
	}
	e := &Engine{
		cfg:      cfg,
		tags:     make([]tagState, len(cfg.Tags)),
		loads:    make([]loadState, len(cfg.Loads)),
		tally:    make([]Tally, len(cfg.Tags)),
		users:    make([][]int, len(cfg.Tags)),
		bypasses: make([]bool, len(cfg.Tags)),
		follows:  make([][]follow, len(cfg.Tags)),
		renewed:  make([]bool, len(cfg.Tags)),
	}
	for i := range cfg.Tags {
		if cfg.Tags[i].OnChange {
			e.onChange = append(e.onChange, i)
		}
		if cfg.Tags[i].Screen != nil {
			e.tags[i].Screen = new(screen.State)
		}
	}
	e.enlistBesides()
	for i := range e.loads {
		q, err := cfg.Loads[i].equation()
		if err != nil {
			return nil, fmt.Errorf("load %q: %w", cfg.Loads[i].Name, err)
		}
		e.equations = append(e.equations, q)
		e.enlist(i)
		e.enlistTrends(i)
		if q.Stream != nil && q.Hold > 0 {
			e.holds = append(e.holds, i)
		}
		e.loads[i] = newLoad(&cfg, i)
	}
	e.enlistCounters()
	return e, nil
}

// enlist notes which tags a load reads, and which it looks at beside these.
func (e *Engine) enlist(load int) {
	for _, src := range e.equations[load].needs {
		if src.Tag < 0 {
			continue
		}
		e.use(src.Tag, load)
		if e.besides != nil {
			for _, other := range e.besides[src.Tag] {
				e.use(other, load)
			}
		}
	}
	if l := &e.cfg.Loads[load]; l.HasRunning {
		e.use(l.Running.Tag, load)
	}
	if l := &e.cfg.Loads[load]; l.HasBypass {
		e.use(l.Bypass.Tag, load)
		e.bypasses[l.Bypass.Tag] = true
	}
}

func (e *Engine) use(tag, load int) {
	if !slices.Contains(e.users[tag], load) {
		e.users[tag] = append(e.users[tag], load)
	}
}

// Advance takes in one beat and books every grid interval that ends at or before
// b.Through. It appends the minutes that closed to closed and returns it.
// Event time never runs back: an earlier Through than the last is ignored.
func (e *Engine) Advance(b Beat, closed []Minute) []Minute {
	e.file(b.Readings)
	was := e.through
	e.through = max(e.through, b.Through)
	if e.next == 0 && !e.begin(was) {
		return closed
	}
	for e.next+e.cfg.Grid <= e.through {
		g := e.next
		e.arrive(g)
		span := e.cfg.Grid
		measured := e.evaluateAll(g)
		e.carry(g)
		if !measured {
			span = e.silence(g)
			e.lapse(g + span - e.cfg.Grid)
		}
		closed = e.book(g, span, closed)
		e.next = g + span
	}
	return closed
}

// file takes in readings.
func (e *Engine) file(readings []Reading) {
	for i := range readings {
		e.take(&readings[i])
	}
}

// Relief returns the instant up to which event time has to come so that each tag has
// room for so many more readings, or 0 where all have it.
func (e *Engine) Relief(readings int) int64 {
	at := int64(0)
	for i := range e.tags {
		p := e.tags[i].Pending
		if over := len(p) + readings - maxPending; over > 0 && len(p) > 0 {
			at = max(at, ceil(p[min(over, len(p))-1].At, e.cfg.Grid)+e.cfg.Grid)
		}
	}
	return at
}

// Recall marks readings as taken without taking them: after a restart, those of
// the last beats before the saved state, so that a broker's second delivery of
// them counts as repeated and not as late.
func (e *Engine) Recall(readings []Reading) {
	for _, r := range readings {
		e.tags[r.Tag].remember(r.At)
	}
}

// Adopt takes in a beat whose intervals have been booked elsewhere: its readings are
// held, event time moves on, and nothing is booked.
func (e *Engine) Adopt(b Beat) {
	e.file(b.Readings)
	was := e.through
	e.through = max(e.through, b.Through)
	if next := floor(e.through, e.cfg.Grid); (e.next != 0 || e.begin(was)) && next > e.next {
		for e.next < next {
			e.arrive(e.next)
			span := min(e.quiet(e.next), next-e.next)
			e.next += span
			e.lapse(e.next - e.cfg.Grid)
		}
		e.arrive(next)
		for i := range e.loads {
			e.loads[i].forget()
		}
	}
}

// ClearTally forgets what has become of readings so far: after a restart, that of the
// beats put through again.
func (e *Engine) ClearTally() { clear(e.tally); clear(e.doubted) }

// booked returns the newest grid point computed, or a time before all others.
func (e *Engine) booked() int64 {
	if e.next == 0 {
		return math.MinInt64
	}
	return e.next - e.cfg.Grid
}

// take files one reading, and counts what became of it.
func (e *Engine) take(r *Reading) {
	grid := e.cfg.Grid
	if e.cfg.Tags[r.Tag].adds() {
		grid = 1 // every one of them waits
	}
	switch e.tags[r.Tag].take(sample{r.At, r.Value, r.Mark}, e.booked(), grid) {
	case Taken:
		if r.Mark != quality.None {
			e.doubt(r.Tag, r.Mark)
		}
	case Repeated:
		e.tally[r.Tag].Repeated++
	case Late:
		e.tally[r.Tag].Late++
	case Crowded:
		e.tally[r.Tag].Crowded++
	}
}

// doubt counts a reading by its mark.
func (e *Engine) doubt(tag int, m quality.Mark) {
	if e.doubted == nil {
		e.doubted = make([][]Doubted, len(e.tags))
	}
	all := e.doubted[tag]
	i := slices.IndexFunc(all, func(d Doubted) bool { return d.Mark >= m })
	if i < 0 {
		i = len(all)
	}
	if i == len(all) || all[i].Mark != m {
		all = slices.Insert(all, i, Doubted{Mark: m})
	}
	all[i].Readings++
	e.doubted[tag] = all
}

// reachBack is how long before event time the accounts may begin: a stray stamp of
// a clock that was never set must not open years of missing time.
const reachBack = 60 * minute

// begin sets the first grid point once event time has reached the earliest
// reading, at most reachBack before event time or where event time was, if that is
// earlier; without any reading the accounts begin where event time stands.
func (e *Engine) begin(was int64) bool {
	first := int64(math.MaxInt64)
	for i := range e.tags {
		if p := e.tags[i].Pending; len(p) > 0 {
			first = min(first, p[0].At)
		}
	}
	if first == math.MaxInt64 {
		first = e.through
	}
	if first <= 0 || first > e.through {
		return false
	}
	back := e.through - reachBack
	if was > 0 {
		back = min(back, was)
	}
	e.next = ceil(max(first, back), e.cfg.Grid)
	e.tallyBefore(e.next)
	return true
}

// tallyBefore counts as late what the accounts begin too late for: the readings before g,
// but for those of each tag's newest grid point, which is held there.
func (e *Engine) tallyBefore(g int64) {
	for i := range e.tags {
		before, _ := slices.BinarySearchFunc(e.tags[i].Pending, g+1, byStamp)
		if before == 0 {
			continue
		}
		newest := e.tags[i].Pending[before-1].At
		late, _ := slices.BinarySearchFunc(e.tags[i].Pending, ceil(newest, e.cfg.Grid)-e.cfg.Grid+1, byStamp)
		e.tally[i].Late += uint64(late)
	}
}

func byStamp(s sample, at int64) int { return cmp.Compare(s.At, at) }

// arrive brings what the tags hold, and whether it holds, to g.
func (e *Engine) arrive(g int64) {
	e.reach(g)
	e.lapse(g)
	e.counts(g)
}

// reach holds the newest reading of each tag at g and marks the figures that
// depend on it.
func (e *Engine) reach(g int64) {
	for i := range e.tags {
		if p := e.tags[i].Pending; len(p) > 0 && p[0].At <= g && e.hold(i, g) {
			e.touch(i)
			e.follow(i)
		}
	}
}

func (e *Engine) touch(tag int) {
	for _, load := range e.users[tag] {
		e.loads[load].fresh = false
	}
}

// evaluateAll brings every figure to g and reports whether any was measured, or may be
// once its counter tells. A figure whose inputs are the same and still held is not
// worked again.
func (e *Engine) evaluateAll(g int64) bool {
	any := false
	for i := range e.loads {
		l := &e.loads[i]
		if !l.fresh || g >= l.figure.Until || l.Hold.holds() {
			e.evaluate(i, g, &l.figure)
			l.fresh = true
		}
		l.figure.At = g
		if l.terms.drivers > 0 {
			e.drive(i, g)
		}
		if l.Counted != nil {
			l.counting = e.counting(i, g)
		}
		any = any || l.figure.Measured() || l.counting
	}
	return any
}

// silence returns how long from g on nothing can change while no load has a figure: no
// reading comes, and none is to be worked anew.
func (e *Engine) silence(g int64) int64 {
	span := e.quiet(g)
	for i := range e.loads {
		l := &e.loads[i]
		if l.Hold.holds() {
			return e.cfg.Grid
		}
		if at := l.figure.Until; at < g+span {
			span = max(ceil(at, e.cfg.Grid)-g, e.cfg.Grid)
		}
	}
	return span
}

// quiet returns how long from g on no reading comes, and no silence of a counter tells
// anything: up to the next waiting reading or the end of event time, on the grid. It
// ends with the minute g lies in, or where g begins one, with a later minute, so
// that every minute which holds anything is closed on its own.
func (e *Engine) quiet(g int64) int64 {
	until := floor(e.through, e.cfg.Grid)
	for i := range e.tags {
		if p := e.tags[i].Pending; len(p) > 0 {
			until = min(until, ceil(p[0].At, e.cfg.Grid))
		}
	}
	for _, b := range e.counters {
		if at := e.silentUntil(b.tag); at < until {
			until = ceil(at, e.cfg.Grid)
		}
	}
	if end := floor(g, minute) + minute; until > end {
		if g != floor(g, minute) {
			until = end
		}
		until = floor(until, minute)
	}
	return max(until-g, e.cfg.Grid)
}

// book adds the figures at g, good for span, to the accounts.
func (e *Engine) book(g, span int64, closed []Minute) []Minute {
	for i := range e.loads {
		l := &e.loads[i]
		if l.Counted == nil {
			l.roll(&l.figure, g, span)
		} else {
			e.bookCount(i, g, span)
		}
		if l.Witness != nil {
			e.attest(i, g)
		}
		l.book(g, span)
		if len(l.closed) > 0 {
			closed = append(closed, l.closed...)
			l.closed = l.closed[:0]
		}
	}
	return closed
}
