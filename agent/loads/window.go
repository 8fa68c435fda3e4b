package loads

// slots is into how many parts a rolling window is cut; the window's mean moves
// on in steps of one part.
const slots = 60

// Window is a rolling window over the last 60 parts of its length, the present
// one included.
type Window struct {
	Slot     int64 // length of a part, ns
	Now      int64 // start of the present part
	parts    int
	present  int // index of the present part
	Heat     [slots]float64
	Measured [slots]int64
}

// newWindow returns a window of the given length; where the grid is coarser than
// a part, the parts are as long as the grid.
func newWindow(length, grid int64) Window {
	slot := max(length/slots, grid)
	return Window{Slot: slot, parts: int(max(1, length/slot))}
}

// book adds heat (J) worked over span from g on; missing time is booked as
// measured 0. It never goes back.
func (w *Window) book(g int64, heat float64, measured int64) {
	if g >= w.Now+w.Slot {
		w.move(g)
	}
	w.Heat[w.present] += heat
	w.Measured[w.present] += measured
}

// move makes the part that g lies in the present one, and empties those in between.
func (w *Window) move(g int64) {
	for steps := 0; w.Now+w.Slot <= g; steps++ {
		if steps >= w.parts || w.Now == 0 {
			w.Now = floor(g, w.Slot)
			w.present = w.index(w.Now)
			return
		}
		w.Now += w.Slot
		if w.present++; w.present == w.parts {
			w.present = 0
		}
		w.Heat[w.present], w.Measured[w.present] = 0, 0
	}
}

func (w *Window) index(at int64) int { return int(at / w.Slot % int64(w.parts)) }

// resume takes up the window that was saved of the same length on the same grid.
func (w *Window) resume(was Window) {
	was.parts = w.parts
	was.present = was.index(was.Now)
	*w = was
}

// Mean is a rolling mean with the share of the window that was measured; time
// before the first reading counts as not measured.
type Mean struct {
	Duty     float64 // W, over the measured time; meaningless where Coverage is 0
	Coverage float64 // measured time / span, 0 to 1
}

// mean returns the mean at the instant through.
func (w *Window) mean(through int64) Mean {
	var heat float64
	var measured int64
	for i := range w.parts {
		heat += w.Heat[i]
		measured += w.Measured[i]
	}
	if measured == 0 {
		return Mean{}
	}
	from := w.Now - int64(w.parts-1)*w.Slot
	return Mean{
		Duty:     heat / (float64(measured) / 1e9),
		Coverage: float64(measured) / float64(through-from),
	}
}

// floor returns the multiple of step at or before at; at is not negative.
func floor(at, step int64) int64 { return at - at%step }

// ceil returns the multiple of step at or after at; at is not negative.
func ceil(at, step int64) int64 { return floor(at+step-1, step) }
