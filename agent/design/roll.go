package design

import "math"

// Roll holds the warnings on one load or exchanger that stand.
type Roll struct {
	Standing []Warning // at most one of a kind
	changed  []Warning // raised or over since they were last taken
}

// standing returns the warning of a kind that stands, or nil.
func (r *Roll) standing(k Kind) *Warning {
	for i := range r.Standing {
		if r.Standing[i].Kind == k {
			return &r.Standing[i]
		}
	}
	return nil
}

// raise raises a warning whose deviation is Now at the instant at, or brings the one that
// stands up to it.
func (r *Roll) raise(w Warning, at int64) {
	if s := r.standing(w.Kind); s != nil {
		s.Now, s.Significance, s.Causes = w.Now, w.Significance, w.Causes
		if math.Abs(w.Now) > math.Abs(s.Greatest) {
			s.Greatest = w.Now
		}
		return
	}
	w.Begin, w.Greatest = at, w.Now
	w.Since = min(w.Since, at)
	r.Standing = append(r.Standing, w)
	r.changed = append(r.changed, w)
}

// clear ends the warning of a kind, should it stand.
func (r *Roll) clear(k Kind, at int64) {
	for i := range r.Standing {
		if w := r.Standing[i]; w.Kind == k {
			w.End = at
			r.changed = append(r.changed, w)
			r.Standing = append(r.Standing[:i], r.Standing[i+1:]...)
			return
		}
	}
}

// take returns what was raised or is over since it was last called.
func (r *Roll) take(into []Warning) []Warning {
	into = append(into, r.changed...)
	r.changed = r.changed[:0]
	return into
}
