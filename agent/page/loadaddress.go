package page

import (
	"maps"
	"net/url"
	"slices"
	"strings"
	"time"

	"heatreeve/agent/account"
	"heatreeve/agent/answer"
)

// span is a length of time that the sheet of a load shows.
type span struct {
	Name, Words string
	back        func(time.Time) time.Time // from its end to its beginning
}

func hours(n int) func(time.Time) time.Time {
	return func(t time.Time) time.Time { return t.Add(-time.Duration(n) * time.Hour) }
}

func days(n int) func(time.Time) time.Time {
	return func(t time.Time) time.Time { return t.AddDate(0, 0, -n) }
}

func months(n int) func(time.Time) time.Time {
	return func(t time.Time) time.Time { return t.AddDate(0, -n, 0) }
}

// spans are those that may be chosen; the shortest comes first.
var spans = [...]span{
	{"1h", "1 hour", hours(1)},
	{"6h", "6 hours", hours(6)},
	{"1d", "1 day", days(1)},
	{"1w", "1 week", days(7)},
	{"1mo", "1 month", months(1)},
	{"6mo", "6 months", months(6)},
	{"1y", "1 year", months(12)},
	{"2y", "2 years", months(24)},
}

// usualSpan is the index of the span where an address has none.
const usualSpan = 1

// bys are the periods by which heat may be shown.
var bys = [...]string{"hour", "day", "month"}

// usualBy is the one where an address has none.
const usualBy = "hour"

// addressMinute writes an instant into an address, so that it means the same everywhere.
const addressMinute = "2006-01-02T15:04:05Z07:00"

// loadAddress is what the address of a load's sheet says: a place in time, and units.
type loadAddress struct {
	load  string
	span  *span
	to    time.Time // zero: live
	at    time.Time // whose working is told; zero: the newest
	by    string
	units url.Values // those that are not the site's
}

// loadAddressOf reads an address. The error is an [*answer.QueryError].
func loadAddressOf(load string, v url.Values, zone *time.Location) (a loadAddress, err error) {
	a = loadAddress{load: load, span: &spans[usualSpan], by: usualBy}
	if name := v.Get("span"); name != "" {
		i := slices.IndexFunc(spans[:], func(s span) bool { return s.Name == name })
		if i < 0 {
			return a, answer.Wrongf("span %q: allowed are %s", name, spanNames())
		}
		a.span = &spans[i]
	}
	if by := v.Get("by"); by != "" {
		if !slices.Contains(bys[:], by) {
			return a, answer.Wrongf("by %q: allowed are %s", by, strings.Join(bys[:], ", "))
		}
		a.by = by
	}
	if a.to, err = instantOf("to", v, zone); err != nil {
		return a, err
	}
	a.to = a.to.Truncate(time.Minute)
	a.at, err = instantOf("at", v, zone)
	return a, err
}

// instantOf reads the parameter of a name; one that is missing is the zero time.
func instantOf(name string, v url.Values, zone *time.Location) (time.Time, error) {
	text := v.Get(name)
	if text == "" {
		return time.Time{}, nil
	}
	ns, err := account.Moment(text, zone)
	if err != nil {
		return time.Time{}, answer.Wrongf("%s %v", name, err)
	}
	return time.Unix(0, ns).In(zone), nil
}

func spanNames() string {
	var names []string
	for i := range spans {
		names = append(names, spans[i].Name)
	}
	return strings.Join(names, ", ")
}

// Values are the parameters; what is usual is left out.
func (a loadAddress) Values() url.Values {
	v := url.Values{}
	for name, texts := range a.units {
		v[name] = texts
	}
	if a.span != &spans[usualSpan] {
		v.Set("span", a.span.Name)
	}
	if a.by != usualBy {
		v.Set("by", a.by)
	}
	if !a.to.IsZero() {
		v.Set("to", a.to.Format(addressMinute))
	}
	if !a.at.IsZero() {
		v.Set("at", a.at.Format(addressMinute))
	}
	return v
}

// Path is the address without its parameters.
func (a loadAddress) Path() string { return "/loads/" + url.PathEscape(a.load) }

// String is the whole address, with a part of the page to go to.
func (a loadAddress) link(part string) string {
	text := a.Path()
	if query := a.Values().Encode(); query != "" {
		text += "?" + query
	}
	if part != "" {
		text += "#" + part
	}
	return text
}

func (a loadAddress) over(s *span) loadAddress       { a.span = s; return a }
func (a loadAddress) until(t time.Time) loadAddress  { a.to = t; return a }
func (a loadAddress) minute(t time.Time) loadAddress { a.at = t; return a }
func (a loadAddress) per(by string) loadAddress      { a.by = by; return a }

// live tells that the sheet goes as far as the history does.
func (a loadAddress) live() bool { return a.to.IsZero() }

// end is where the span ends, if event time has come to now.
func (a loadAddress) end(now time.Time) time.Time {
	if a.live() {
		return now.Truncate(time.Minute)
	}
	return a.to
}

// begin is where it begins.
func (a loadAddress) begin(now time.Time) time.Time {
	return a.span.back(a.end(now)).Truncate(time.Minute)
}

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

// hidden are the parameters that a form carries on, besides those that it asks for.
func (a loadAddress) hidden(without ...string) (all []field) {
	v := a.Values()
	for _, name := range slices.Sorted(maps.Keys(v)) {
		if !slices.Contains(without, name) {
			all = append(all, field{name, v.Get(name)})
		}
	}
	return all
}
