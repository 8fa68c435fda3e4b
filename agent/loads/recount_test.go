package loads

import (
	"math"
	"slices"

	"heatreeve/ingest/quality"
)

// recount is the account of a plant as its rules are told, from all readings at once and
// without any state: for each grid point it looks through all that there is. Streams of a
// [steady] fluid by mass.
type recount struct {
	cfg      Config
	readings [][]Reading // of each tag, by stamp
	from, to int64       // grid points
	aside    map[Reading]bool
}

// held is the newest reading of the tag at g.
func (o *recount) held(tag int, g int64) (r Reading, ok bool) {
	for _, x := range o.readings[tag] {
		if x.At <= g {
			r, ok = x, true
		}
	}
	return r, ok
}

// alive tells whether there is a sign of life of an on-change tag at g, and whether its
// sign of life was ever heard.
func (o *recount) alive(tag int, g int64) (alive, heard bool) {
	sign := o.cfg.Tags[tag].Alive
	s, heard := o.held(sign, g)
	own, _ := o.held(tag, g)
	return heard && s.Value != 0 && !isBad(s) && g-max(s.At, own.At) < o.cfg.Tags[sign].MaxAge, heard
}

func isBad(r Reading) bool       { return r.Mark.Quality() == quality.Bad }
func isUncertain(r Reading) bool { return r.Mark.Quality() == quality.Uncertain }

// known is what a tag tells at a grid point.
type known struct {
	Reading
	has, usable bool
	variance    float64 // of its integral over a second, by what changes from reading to reading
	noise       float64 // variance of one reading by the same
}

// column is what a tag tells at all grid points.
func (o *recount) column(src Source) (all []known) {
	var before Reading
	var n, swept, steps, square float64
	lapse := int64(0)
	for g := o.from; g < o.to; g += o.cfg.Grid {
		if src.Tag < 0 {
			all = append(all, known{Reading: Reading{Value: src.Value}, has: true, usable: true})
			continue
		}
		tag := &o.cfg.Tags[src.Tag]
		r, has := o.held(src.Tag, g)
		if step := r.At - before.At; has && step > 0 {
			if before.At != 0 && step < tag.MaxAge && !isBad(before) && !isBad(r) && !o.aside[before] && !o.aside[r] {
				n = min(n+1, 16)
				square += ((r.Value-before.Value)*(r.Value-before.Value) - square) / n
				d := (r.Value - before.Value) * float64(step) / 1e9
				swept += (d*d - swept) / n
				steps += (float64(step)/1e9 - steps) / n
			}
			before = r
		}
		k := known{Reading: r, has: has, usable: has && g-r.At < tag.MaxAge}
		if tag.OnChange {
			alive, heard := o.alive(src.Tag, g)
			if !alive && (heard || g-r.At >= o.cfg.Tags[tag.Alive].MaxAge) {
				lapse = g
			}
			k.usable = has && alive && r.At > lapse
		}
		k.usable = k.usable && (tag.Counter != nil || !isBad(r))
		if n > 0 && !tag.OnChange && tag.Deadband == 0 && tag.Counter == nil {
			k.variance, k.noise = swept/2/steps, square/2
		}
		all = append(all, k)
	}
	return all
}

// told is that a register rose by amount between two grid points.
type told struct {
	from, to int64
	amount   float64
	known    bool
	doubted  bool // by the mark of one of its two readings
}

// tells lists what a register told; one that reports on change tells by its silence too.
func (o *recount) tells(tag int, largest float64) (all []told) {
	c := o.cfg.Tags[tag].Counter
	var last, broken Reading
	var to int64
	for i, x := range o.column(FromTag(tag)) {
		g := o.from + int64(i)*o.cfg.Grid
		switch {
		case x.has && isBad(x.Reading):
			if stopped(x.Mark) {
				broken = x.Reading
			}
		case x.has && x.At != last.At:
			k := told{from: to, to: g, doubted: isUncertain(x.Reading) || isUncertain(last)}
			rise := x.Value - last.Value
			if rolls := c.Modulus > 0 && -rise > c.Modulus/2; rolls {
				rise += c.Modulus
			}
			most := 1.1*largest*float64(max(x.At-last.At, g-to))/1e9 + o.cfg.Tags[tag].Resolution
			if last.At != 0 && rise >= 0 && rise <= most && broken.At <= last.At {
				k.amount, k.known = rise, true
			}
			all = append(all, k)
			last, to = x.Reading, g
		case o.cfg.Tags[tag].OnChange && x.usable && last.At != 0 && g-to >= o.cfg.Tags[tag].MaxAge:
			all = append(all, told{to, g, 0, true, isUncertain(last)})
			to = g
		}
	}
	return all
}

// stopped tells of a bad mark of a register that it may not have counted meanwhile.
func stopped(m quality.Mark) bool {
	return slices.Contains([]quality.Mark{quality.Rejected, quality.Failed, quality.FunctionCheck, quality.OutOfService}, m)
}

// counts tells at which grid points a register is alive: where its last reading is bad, by
// the last good one, unless it has stopped.
func (o *recount) counts(tag int) (alive []bool) {
	var good Reading
	for i, x := range o.column(FromTag(tag)) {
		g := o.from + int64(i)*o.cfg.Grid
		is := x.usable
		switch {
		case !x.has:
		case !isBad(x.Reading):
			good = x.Reading
		case good.At == 0 || stopped(x.Mark):
			is = false
		case !o.cfg.Tags[tag].OnChange:
			is = g-good.At < o.cfg.Tags[tag].MaxAge
		default:
			is = is && g-o.toldLast(tag, g) < o.cfg.Tags[tag].MaxAge
		}
		alive = append(alive, is)
	}
	return alive
}

// toldLast is the grid point up to which a register has told at g.
func (o *recount) toldLast(tag int, g int64) (to int64) {
	for _, k := range o.tells(tag, largestRate) {
		if k.to <= g {
			to = k.to
		}
	}
	return to
}

// lasting is the standard uncertainty of a reading by what lasts: its accuracy, and what
// is this reading's alone.
func (o *recount) lasting(src Source, x float64) (accuracy, alone float64) {
	if src.Tag < 0 {
		return 0, 0
	}
	t := &o.cfg.Tags[src.Tag]
	return (t.Accuracy.Abs + t.Accuracy.Rel*math.Abs(x-t.Accuracy.Zero)) / math.Sqrt(3), t.Deadband*t.Deadband/3 + t.Resolution*t.Resolution/12
}
