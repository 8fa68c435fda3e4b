package loads

// witness compares a load with the energy register of another meter. A span of it lies
// between two readings of that register, of those of one minute the first alone, and is
// compared where the load was measured throughout.
type witness struct {
	From   int64   // where the present span begins; 0 before the first reading
	Heat   float64 // that the load served in the present span, J
	Lacked int64   // end of the last time that was not measured
	Marks  []mark  // that the accounts have not come to yet
	Last   int64   // grid point of the newest mark
	Rise   float64 // of the register since the newest mark, J
	Unsure bool    // a part of it is not known
}

// mark is the end of a span, and what the register counted in it.
type mark struct {
	At    int64
	Rise  float64
	Known bool
}

// hear takes what the register has told at a grid point.
func (w *witness) hear(c *count) {
	w.Rise += c.Amount
	w.Unsure = w.Unsure || !c.Known
	if w.Last != 0 && floor(w.Last, minute) == floor(c.To, minute) {
		return
	}
	w.Marks = append(w.Marks, mark{At: c.To, Rise: w.Rise, Known: !w.Unsure && w.Last != 0})
	w.Last, w.Rise, w.Unsure = c.To, 0, false
}

// cuts reports whether a span ends at g, so that what lies before and after it must be
// told apart.
func (w *witness) cuts(g int64) bool {
	if w == nil {
		return false
	}
	i := len(w.Marks) - 1
	for i >= 0 && w.Marks[i].At > g {
		i--
	}
	return i >= 0 && w.Marks[i].At == g
}

// serve adds heat that the load served.
func (w *witness) serve(heat float64) {
	if w != nil {
		w.Heat += heat
	}
}

// lack notes time up to to that was not measured.
func (w *witness) lack(to int64) {
	if w != nil {
		w.Lacked = to
	}
}

// compare ends the spans that the accounts have come to the end of, in the minute m, in
// which they end.
func (w *witness) compare(g int64, m *Minute) {
	for len(w.Marks) > 0 && w.Marks[0].At <= g {
		k := w.Marks[0]
		w.Marks = w.Marks[1:]
		if k.Known && w.From != 0 && w.Lacked <= w.From {
			m.Witness += k.Rise
			m.Compared += w.Heat
		}
		w.From, w.Heat = k.At, 0
	}
}

// attest hears what the witness of a load has told at g, and closes what it waited for.
func (e *Engine) attest(load int, g int64) {
	l := &e.loads[load]
	if c := &e.tags[l.terms.witness].Count; c.To == g {
		l.Witness.hear(c)
	}
	l.turn(l.decided(g))
}
