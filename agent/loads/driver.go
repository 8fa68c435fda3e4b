package loads

import "math"

// MaxDrivers is how many tags may drive a load.
const MaxDrivers = 4

// driven sums the drivers of a load over some time: the value times seconds, and the time, ns,
// in which each had one.
type driven struct {
	Sum  [MaxDrivers]float64
	Time [MaxDrivers]int64
}

// take adds the first n values over span; NaN is none.
func (d *driven) take(values *[MaxDrivers]float64, n int, span int64) {
	for k, x := range values[:n] {
		if x == x {
			d.Sum[k] += x * (float64(span) / 1e9)
			d.Time[k] += span
		}
	}
}

func (d *driven) add(o *driven, n int) {
	for k := range n {
		d.Sum[k] += o.Sum[k]
		d.Time[k] += o.Time[k]
	}
}

// means returns the first n time-weighted means, NaN where there was no value; the others are 0.
func (d *driven) means(n int) (m [MaxDrivers]float64) {
	for k := range n {
		m[k] = math.NaN()
		if t := d.Time[k]; t > 0 {
			m[k] = d.Sum[k] / (float64(t) / 1e9)
		}
	}
	return m
}

// drive puts what drives a load at g beside its figure, which takes nothing from it.
func (e *Engine) drive(load int, g int64) {
	f := &e.loads[load].figure
	for k, src := range e.cfg.Loads[load].Drivers {
		f.Drivers[k] = e.told(src.Tag, g)
	}
}

// told is the value of a tag at g, NaN where there is none to use.
func (e *Engine) told(i int, g int64) float64 {
	tag, h := &e.cfg.Tags[i], &e.tags[i].Held
	switch {
	case !h.Has || h.bad():
		return math.NaN()
	case tag.OnChange && e.standing(i, g) != holds, !tag.OnChange && g-h.At >= tag.MaxAge:
		return math.NaN()
	}
	return h.Value
}

// driversOf names what drives a load, and what its numbers are of, so that a sum of something
// else is not gone on with.
func driversOf(cfg *Config, load int) (names []string) {
	for _, src := range cfg.Loads[load].Drivers {
		t := &cfg.Tags[src.Tag]
		names = append(names, t.Name+": "+t.Meaning)
	}
	return names
}

// undriven forgets the sums of the drivers.
func (l *loadState) undriven() {
	l.Minute.Driven = driven{}
	if l.Counted != nil {
		for i := range l.Counted.Pieces {
			l.Counted.Pieces[i].Sum.Driven = driven{}
		}
	}
}
