package loads

// slots is into how many parts a rolling window is cut; the window's mean moves
// on in steps of one part.
const slots = 60

// Window is a rolling window over the last 60 parts of its length, the present
// one included.
type Window struct {
	Slot     int64 // length of a part, ns
	Now      int64 // start of the present part
	Heat     [slots]float64
	Measured [slots]int64
	parts    int
}

// newWindow returns a window of the given length; where the grid is coarser than
// a part, the parts are as long as the grid.
func newWindow(length, grid int64) Window {
	slot := max(length/slots, grid)
	return Window{Slot: slot, parts: int(max(1, length/slot))}
}

// book adds heat (J) worked over span from g on; missing time is booked as
// measured 0.
func (w *Window) book(g int64, heat float64, measured int64) {
	if w.Now == 0 {
		w.Now = floor(g, w.Slot)
	}
	for steps := 0; w.Now+w.Slot <= g; steps++ {
		if steps >= w.parts {
			w.Now = floor(g, w.Slot)
			break
		}
		w.Now += w.Slot
		i := w.index(w.Now)
		w.Heat[i], w.Measured[i] = 0, 0
	}
	i := w.index(g)
	w.Heat[i] += heat
	w.Measured[i] += measured
}

func (w *Window) index(at int64) int { return int(at / w.Slot % int64(w.parts)) }

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
