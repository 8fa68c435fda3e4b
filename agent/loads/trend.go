package loads

import (
	"math"

	"heatreeve/ingest/quality"
)

// trend is how the readings of one tag went of late: their means in parts of a span, so
// that it takes the same room however often the tag reports.
type trend struct {
	Tag    string
	Width  int64  // length of a part, ns
	Parts  []part // by time: those of the span, and the newest from before it
	Newest int64  // stamp of the newest reading; 0 before the first
	count  int    // parts in the span
}

// part holds the readings stamped in [Start, Start+Width).
type part struct {
	Start    int64
	N        float64
	At       float64 // mean of the stamps, s after Start
	Value    float64 // mean
	Min, Max float64
	Last     float64
	Mark     quality.Mark // the worst of them
}

// newTrend returns the trend of a tag over a span; where the grid is coarser than a
// sixtieth of the span, the parts are as long as the grid.
func newTrend(tag string, span, grid int64) trend {
	width := max((span+slots-1)/slots, grid)
	return trend{Tag: tag, Width: width, count: int(max(1, span/width))}
}

// add takes in a reading newer than all before. Where the tag had a lapse since the
// newest before, what was before is forgotten.
func (c *trend) add(s sample, lapse int64) {
	if c.Newest <= lapse {
		c.Parts = c.Parts[:0]
	}
	c.Newest = s.At
	start := floor(s.At, c.Width)
	n := len(c.Parts)
	if n == 0 || c.Parts[n-1].Start != start {
		c.forget(start)
		c.Parts = append(c.Parts, part{Start: start, Min: s.Value, Max: s.Value})
		n = len(c.Parts)
	}
	p := &c.Parts[n-1]
	p.N++
	p.At += (float64(s.At-start)/1e9 - p.At) / p.N
	p.Value += (s.Value - p.Value) / p.N
	p.Min, p.Max, p.Last = min(p.Min, s.Value), max(p.Max, s.Value), s.Value
	p.Mark = quality.Worse(p.Mark, s.Mark)
}

// forget drops the parts that lie before the span of which now is the last part, but for
// the newest of them.
func (c *trend) forget(now int64) {
	first := c.first(now)
	n := 0
	for n+1 < len(c.Parts) && c.Parts[n+1].Start < first {
		n++
	}
	c.Parts = append(c.Parts[:0], c.Parts[n:]...)
}

// first returns the start of the first part of the span that g lies in the last part of.
func (c *trend) first(g int64) int64 { return floor(g, c.Width) - int64(c.count-1)*c.Width }

// until returns when the span that ends at g moves on.
func (c *trend) until(g int64) int64 { return floor(g, c.Width) + c.Width }

// mark is the worst of the readings in the span that ends at g; where the tag reports by
// exception, the one that stood when it began is one of them.
func (c *trend) mark(g int64, onChange bool) (m quality.Mark) {
	from := c.first(g)
	for i := range c.Parts {
		if c.Parts[i].Start >= from || onChange && (i+1 == len(c.Parts) || c.Parts[i+1].Start >= from) {
			m = quality.Worse(m, c.Parts[i].Mark)
		}
	}
	return m
}

// fit draws the line through the readings of the span that ends at g. Where the tag
// reports by exception, a part without a reading counts, once it is over, as one reading
// of what stood.
func (c *trend) fit(g int64, onChange bool) line {
	var points [slots]point
	n, i := 0, 0
	stood, from := 0.0, c.first(g)
	for k := range c.count {
		start := from + int64(k)*c.Width
		for ; i < len(c.Parts) && c.Parts[i].Start < start; i++ {
			stood = c.Parts[i].Last
		}
		t := float64(start-from) / 1e9
		switch {
		case i < len(c.Parts) && c.Parts[i].Start == start:
			p := &c.Parts[i]
			points[n] = point{t + p.At, p.Value, p.N}
			n++
		case onChange && i > 0 && start+c.Width <= g:
			points[n] = point{t + float64(c.Width)/2e9, stood, 1}
			n++
		}
	}
	return fit(points[:n])
}

// extremes returns the least and the greatest reading of the span that ends at g, with the
// one that held when it began.
func (c *trend) extremes(g int64) (lo, hi float64) {
	lo, hi = math.Inf(1), math.Inf(-1)
	from := c.first(g)
	for i := range c.Parts {
		p := &c.Parts[i]
		switch {
		case p.Start >= from:
			lo, hi = min(lo, p.Min), max(hi, p.Max)
		case i+1 == len(c.Parts) || c.Parts[i+1].Start >= from:
			lo, hi = min(lo, p.Last), max(hi, p.Last)
		}
	}
	return lo, hi
}

// Trends of a load, by their place in it.
const (
	ofTemperature, ofContent = 0, 1 // of a vessel
	ofInlet, ofOutlet        = 0, 1 // of a stream that is corrected for stored heat
)

// follow is a trend of a load that a tag's readings go into.
type follow struct{ load, trend int }

// followed returns what a load needs the trends of, in their places, and the span.
func (l *Load) followed() ([]Source, int64) {
	switch s := &l.Stream; {
	case l.Vessel != nil:
		return []Source{l.Vessel.Temperature, l.Vessel.Content}, l.Vessel.Over
	case s.Stored > 0:
		return []Source{s.Inlet, s.Outlet}, s.StoredOver
	}
	return nil, 0
}

// trendsOf returns the empty trends of a load; that of a constant stays empty.
func trendsOf(cfg *Config, load int) []trend {
	sources, over := cfg.Loads[load].followed()
	trends := make([]trend, len(sources))
	for i, src := range sources {
		if src.Tag >= 0 {
			trends[i] = newTrend(cfg.Tags[src.Tag].Name, over, cfg.Grid)
		}
	}
	return trends
}

// resumeTrends takes up those that were saved of the same tags over the same span.
func resumeTrends(now, was []trend) []trend {
	for i := range now {
		if i < len(was) && was[i].Tag == now[i].Tag && was[i].Width == now[i].Width {
			was[i].count = now[i].count
			now[i] = was[i]
		}
	}
	return now
}

// enlistTrends notes which trends each tag's readings go into.
func (e *Engine) enlistTrends(load int) {
	sources, _ := e.cfg.Loads[load].followed()
	for i, src := range sources {
		if src.Tag >= 0 {
			e.follows[src.Tag] = append(e.follows[src.Tag], follow{load, i})
		}
	}
}

// follow adds the reading that the tag holds to the trends that it goes into, but for one
// that was set aside and for a bad one. After that what a tag that reports by exception has told stands no more.
func (e *Engine) follow(tag int) {
	t := &e.tags[tag]
	for _, f := range e.follows[tag] {
		c := &e.loads[f.load].Trends[f.trend]
		switch {
		case t.Held.Aside:
		case !t.Held.bad():
			c.add(sample{t.Held.At, t.Held.Value, t.Held.Mark}, t.Lapse)
		case e.cfg.Tags[tag].OnChange:
			c.Parts = c.Parts[:0]
		}
	}
}
