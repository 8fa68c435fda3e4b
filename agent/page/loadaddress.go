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
