package loads

// loadState is what the engine keeps of one load. Exported fields are part of the
// engine's saved state.
type loadState struct {
	Registers Registers
	Windows   [len(Windows)]Window
	Minute    minuteSum
	Gap       gap
	terms     terms
	figure    Figure
	fresh     bool     // figure was worked from the values held now
	closed    []Minute // not yet handed over
}

// terms are what a load is accounted by.
type terms struct {
	load         int // index into [Config.Loads]
	grid, bridge int64
	gives        bool
}

// newLoad returns the empty accounts of a load.
func newLoad(cfg *Config, load int) loadState {
	l := loadState{terms: terms{load: load, grid: cfg.Grid, bridge: cfg.Bridge, gives: cfg.Loads[load].gives()}}
	for k, length := range Windows {
		l.Windows[k] = newWindow(length, cfg.Grid)
	}
	return l
}

// resume takes up the accounts that were saved on the same grid.
func (l *loadState) resume(was loadState) {
	was.terms = l.terms
	for k := range l.Windows {
		was.Windows[k].parts = l.Windows[k].parts
	}
	*l = was
}

// forget drops what is not in the registers yet, because it was booked elsewhere.
func (l *loadState) forget() {
	l.Minute.Begun = false
	l.Gap = gap{}
}

// book accounts for the present figure over [g, g+span). Windows, which are live, know
// it at once; registers and minutes as soon as it is decided.
func (l *loadState) book(g, span int64) {
	f := &l.figure
	l.roll(f, g, span)
	switch {
	case f.Measured():
		if l.Gap.open() {
			l.bridge(g, f.Duty)
		}
		l.measured(f, g, span)
		l.Gap.Last, l.Gap.Duty = g, f.Duty
	case l.mayBridge(f, g):
		l.widen(g + span)
	default:
		if l.Gap.open() {
			l.lapse()
		}
		l.missing(g, g+span)
	}
}

// undecided returns how much of the time up to through is in no register yet.
func (l *loadState) undecided(through int64) int64 {
	if l.Gap.open() {
		return through - l.from()
	}
	return 0
}

// roll moves the rolling windows on. Their heat is positive in the load's service.
func (l *loadState) roll(f *Figure, g, span int64) {
	var heat float64
	measured := span
	if f.Measured() {
		heat = f.Duty * (float64(span) / 1e9)
	} else {
		g, measured = g+span-l.terms.grid, 0
	}
	for k := range l.Windows {
		l.Windows[k].book(g, heat, measured)
	}
}

// What follows puts decided time into registers and minutes, each load's in the order
// of time. The registers know which way the heat of stream or content went.

// measured books a figure over [g, g+span).
func (l *loadState) measured(f *Figure, g, span int64) {
	l.turn(g)
	l.Minute.measure(f, g, span, l.terms.gives)
	l.Registers.book(givenUp(f.Duty*(float64(span)/1e9), l.terms.gives), span)
	l.turn(g + span)
}

// bridged books a duty that a straight line gives over [g, g+span).
func (l *loadState) bridged(duty float64, g, span int64) {
	l.turn(g)
	heat := givenUp(duty*(float64(span)/1e9), l.terms.gives)
	l.Minute.bridge(heat, g, span)
	l.Registers.bridge(heat, span)
	l.turn(g + span)
}

// missing books [from, to) as time without a figure.
func (l *loadState) missing(from, to int64) {
	l.Registers.Missing += to - from
	for from < to {
		l.turn(from)
		end := min(to, floor(from, minute)+minute)
		l.Minute.miss(from, end-from)
		from = end
	}
	l.turn(to)
}

// turn closes the minute that has ended by g.
func (l *loadState) turn(g int64) {
	if !l.Minute.Begun || g < l.Minute.Sum.Start+minute {
		return
	}
	if m, ok := l.Minute.close(l.terms.load); ok {
		l.closed = append(l.closed, m)
	}
}

// givenUp turns heat that is positive in the load's service into heat that is
// positive where stream or content gave it up.
func givenUp(heat float64, gives bool) float64 {
	if gives {
		return heat
	}
	return -heat
}
