package page

import "time"

// link is one of several ways on.
type link struct {
	Text, To string
	Current  bool
}

// spanLinks lead to the other spans.
func (a loadAddress) spanLinks() (all []link) {
	for i := range spans {
		all = append(all, link{spans[i].Words, a.over(&spans[i]).link("course"), a.span == &spans[i]})
	}
	return all
}

// stepLinks lead back, on, and to the present.
func (a loadAddress) stepLinks(now time.Time) []link {
	end, begin := a.end(now), a.begin(now)
	all := []link{{Text: "earlier", To: a.until(begin).link("course")}}
	if a.live() {
		return all
	}
	later := a.until(end.Add(end.Sub(begin)))
	if later.to.After(now) {
		later = a.until(time.Time{})
	}
	return append(all, link{Text: "later", To: later.link("course")}, link{Text: "to the present", To: a.until(time.Time{}).link("course")})
}

// byLinks lead to the other periods.
func (a loadAddress) byLinks() (all []link) {
	for _, by := range bys {
		all = append(all, link{"by " + by, a.per(by).link("heat"), a.by == by})
	}
	return all
}
