package loads

// gap is time without data right after a measured figure, which is not decided yet:
// when data come back within [Config.Bridge] a straight line fills it, and otherwise it
// is missing. Until then it is in no register, and its minutes stay open.
type gap struct {
	Last int64   // newest grid point with a measured figure; 0 where there is none
	Duty float64 // at Last, W
	To   int64   // end of the time that is not decided; 0 where there is none
}

func (p *gap) open() bool { return p.To != 0 }

// mayBridge reports whether the fault at g leaves a gap open, or opens one: data are
// missing, or too few are back yet to tell a rate, and there is nothing else that speaks
// against the last duty.
func (l *loadState) mayBridge(f *Figure, g int64) bool {
	return l.terms.bridge > 0 && (f.Fault == NoReading || f.Fault == Stale || f.Fault == BadReading || f.Fault == Fitting) &&
		(l.Gap.open() || l.Gap.Last != 0 && g == l.Gap.Last+l.terms.grid)
}

// from is where the gap begins.
func (l *loadState) from() int64 { return l.Gap.Last + l.terms.grid }

// widen leaves the time up to to undecided, unless a figure there would come too late.
func (l *loadState) widen(to int64) {
	l.Gap.To = to
	if to-l.from() > l.terms.bridge {
		l.lapse()
	}
}

// lapse decides that the gap is missing.
func (l *loadState) lapse() {
	l.missing(l.from(), l.Gap.To)
	l.Gap.To = 0
}

// bridge decides that the gap is filled: with the straight line from the last duty, at
// its grid point, to the new one at g.
func (l *loadState) bridge(g int64, duty float64) {
	p := &l.Gap
	slope := (duty - p.Duty) / float64(g-p.Last)
	for at := l.from(); at < g; at += l.terms.grid {
		l.bridged(p.Duty+slope*float64(at-p.Last), at, l.terms.grid)
	}
	p.To = 0
}
