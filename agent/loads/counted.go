package loads

import "heatreeve/ingest/quality"

// counted is the time of a load with a counter for its flow that the next count decides
// on. Its heat is kept for one unit of flow a second.
type counted struct {
	Pieces []piece // since the last count, one a minute
	Told   []count // those that came in a gap that is still open
}

// piece is a part of a minute that one count decides on, and in which no span of the
// witness ends.
type piece struct {
	From, To int64
	Sum      minuteSum
}

// at returns the count that is known of the grid point g in an open gap.
func (c *counted) at(g int64) (count, bool) {
	for len(c.Told) > 0 && c.Told[0].To <= g {
		c.Told = c.Told[1:]
	}
	if len(c.Told) == 0 {
		return count{}, false
	}
	return c.Told[0], true
}

// piece returns the sum of the present piece, widened to hold [g, g+span).
func (l *loadState) piece(g, span int64) *minuteSum {
	c := l.Counted
	n := len(c.Pieces)
	if n == 0 || g >= c.Pieces[n-1].Sum.Sum.Start+minute || l.Witness.cuts(g) {
		c.Pieces = append(c.Pieces, piece{From: g})
		n++
	}
	p := &c.Pieces[n-1]
	p.To = g + span
	return &p.Sum
}

// told takes a new count: it decides on the pieces, and on a gap once that has ended.
func (l *loadState) told(c count) {
	l.decide(&c)
	if l.Gap.open() {
		l.Counted.Told = append(l.Counted.Told, c)
	}
}

// unheard decides that the pieces, and an open gap, are missing: no count came for too
// long.
func (l *loadState) unheard() {
	if l.Gap.open() {
		l.lapse()
	}
	l.decide(&count{})
}

// decide books the pieces by the count that they waited for.
func (l *loadState) decide(c *count) {
	pieces := l.Counted.Pieces
	l.Counted.Pieces = pieces[:0]
	if len(pieces) == 0 {
		return
	}
	l.blur(pieces, c)
	for i := range pieces {
		l.settle(&pieces[i], c)
	}
}

// blur adds what the steps of the counter add to the variance of the heat, in the
// newest minute that has any of it: a minute that is all missing has no record.
func (l *loadState) blur(pieces []piece, c *count) {
	var heat float64 // of the whole count, at one unit of flow a second
	var newest *Minute
	for i := range pieces {
		s := &pieces[i].Sum.Sum
		heat += s.Given - s.Taken
		if s.Measured > 0 {
			newest = s
		}
	}
	seconds := float64(c.To-c.From) / 1e9
	if u := resolution(l.terms.step); u > 0 && newest != nil && c.Known && c.Amount > 0 {
		u *= heat / seconds / c.rate() // of the heat, as it is before it is scaled
		newest.Random += u * u
	}
}

// settle books a piece. A count of nothing is measured time without a flow, which needs
// no temperatures, and one that is not known is missing.
func (l *loadState) settle(p *piece, c *count) {
	switch {
	case !c.Known:
		l.enterMissing(p.From, p.To)
	case c.Amount == 0:
		l.enter(&Figure{Idle: true, Mark: c.Mark, Drivers: p.Sum.Driven.means(l.terms.drivers)}, p.From, p.To-p.From)
	default:
		if c.Mark.Quality() == quality.Uncertain {
			p.Sum.Sum.Uncertain = p.Sum.Sum.Measured
		}
		l.enterPiece(p, c.rate())
	}
}

// bookCount rolls the windows of a load whose flow is counted, and decides on what has
// waited for a count that has come at g.
func (e *Engine) bookCount(load int, g, span int64) {
	l := &e.loads[load]
	f := e.live(load)
	l.roll(&f, g, span)
	if c := &e.tags[l.terms.counter].Count; c.To == g {
		l.told(*c)
	}
}
