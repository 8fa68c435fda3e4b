package design

// mostWaiting bounds the minutes of one side that wait for the other: a side that tells
// nothing is not waited for longer than a quarter of an hour.
const mostWaiting = 15

// pairing brings the minutes of two loads together by their start.
type pairing struct {
	Waiting [2][]Minute // in the order of time
	Newest  [2]int64    // start of the newest minute of each side
}

// enter takes in the next minute of one side.
func (p *pairing) enter(side int, m Minute) {
	p.Waiting[side] = append(p.Waiting[side], m)
	p.Newest[side] = m.Start
}

// next returns the earliest minute of either side, with that of the other side of the same
// start or nil where it has none; false where it may still come.
func (p *pairing) next() (pair [2]*Minute, ok bool) {
	hot, cold := first(p.Waiting[0]), first(p.Waiting[1])
	switch {
	case hot != nil && cold != nil && hot.Start == cold.Start:
		return [2]*Minute{hot, cold}, true
	case hot != nil && (cold == nil || hot.Start < cold.Start):
		return [2]*Minute{hot, nil}, p.Newest[1] >= hot.Start || len(p.Waiting[0]) > mostWaiting
	case cold != nil:
		return [2]*Minute{nil, cold}, p.Newest[0] >= cold.Start || len(p.Waiting[1]) > mostWaiting
	}
	return pair, false
}

func first(all []Minute) *Minute {
	if len(all) == 0 {
		return nil
	}
	return &all[0]
}

// drop removes what next returned.
func (p *pairing) drop(pair [2]*Minute) {
	for side, m := range pair {
		if m != nil {
			p.Waiting[side] = p.Waiting[side][1:]
		}
	}
}
