package loads

// book accounts for the present figure over [g, g+span): as soon as it is decided.
func (l *loadState) book(g, span int64) {
	f := &l.figure
	switch {
	case l.Counted != nil && !l.counting:
		l.unheard()
		l.enterMissing(g, g+span)
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

// measured accounts for a figure over [g, g+span).
func (l *loadState) measured(f *Figure, g, span int64) {
	if l.Counted != nil {
		l.piece(g, span).measure(f, g, span, &l.terms)
		return
	}
	l.enter(f, g, span)
}

// bridged accounts for a duty that a straight line gives over [g, g+span).
func (l *loadState) bridged(duty float64, g, span int64) {
	heat := givenUp(duty*(float64(span)/1e9), l.terms.gives)
	if l.Counted == nil {
		l.enterBridged(heat, g, span)
		return
	}
	if c, ok := l.Counted.at(g); ok {
		p := piece{From: g, To: g + span}
		p.Sum.bridge(heat, g, span)
		l.settle(&p, &c)
		return
	}
	l.piece(g, span).bridge(heat, g, span)
}

// missing accounts for [from, to) as time without a figure.
func (l *loadState) missing(from, to int64) {
	if l.Counted == nil {
		l.enterMissing(from, to)
		return
	}
	for from < to {
		end := min(to, floor(from, minute)+minute)
		if c, ok := l.Counted.at(from); ok {
			end = min(end, c.To)
			p := piece{From: from, To: end}
			p.Sum.miss(from, end-from)
			l.settle(&p, &c)
		} else {
			l.piece(from, end-from).miss(from, end-from)
		}
		from = end
	}
}

// What follows puts decided time into registers and minutes, each load's in the order
// of time. The registers know which way the heat of stream or content went.

// enter books a figure over [g, g+span), which lies in one minute.
func (l *loadState) enter(f *Figure, g, span int64) {
	l.turn(g)
	heat := f.Duty * (float64(span) / 1e9)
	l.Minute.measure(f, g, span, &l.terms)
	l.Registers.book(givenUp(heat, l.terms.gives), span, f.uncertain())
	l.Witness.serve(heat)
	l.entered(g + span)
}

// enterBridged books heat that a straight line gives, J, positive where it was given up.
func (l *loadState) enterBridged(heat float64, g, span int64) {
	l.turn(g)
	l.Minute.bridge(heat, g, span)
	l.Registers.bridge(heat, span)
	l.Witness.lack(g + span)
	l.entered(g + span)
}

// enterMissing books [from, to) as time without a figure.
func (l *loadState) enterMissing(from, to int64) {
	l.Registers.Missing += to - from
	for from < to {
		l.turn(from)
		end := min(to, floor(from, minute)+minute)
		l.Minute.miss(from, end-from)
		l.Witness.lack(end)
		from = end
	}
	l.entered(to)
}

// enterPiece books a part of a minute that was summed for one unit of flow a second.
func (l *loadState) enterPiece(p *piece, rate float64) {
	l.turn(p.From)
	s := &p.Sum.Sum
	l.Minute.add(&p.Sum, p.From, rate, &l.terms)
	l.Registers.add(s, rate)
	l.Witness.serve(givenUp(s.Given-s.Taken, l.terms.gives) * rate)
	if s.Bridged+s.Missing > 0 {
		l.Witness.lack(p.To)
	}
	l.entered(p.To)
}

// entered closes the minute where it ends at g. With a witness it waits for the reading
// that may end a span there.
func (l *loadState) entered(g int64) {
	if l.Witness == nil {
		l.turn(g)
	}
}

// turn closes what has ended by g.
func (l *loadState) turn(g int64) {
	if l.Witness != nil {
		l.Witness.compare(g, &l.Minute.Sum)
	}
	if !l.Minute.Begun || g < l.Minute.Sum.Start+minute {
		return
	}
	if m, ok := l.Minute.close(&l.terms); ok {
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
