package page

import (
	"errors"
	"math"
	"net/http"
	"net/url"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"golang.org/x/net/html"

	"heatreeve/agent/answer"
	"heatreeve/agent/loads"
	"heatreeve/agent/working"
)

// parsed is the tree of a page.
func parsed(t *testing.T, page string) *html.Node {
	t.Helper()
	n, err := html.Parse(strings.NewReader(page))
	if err != nil {
		t.Fatal(err)
	}
	checkAddresses(t, n)
	return n
}

// elements are all of a name, or all at all, in order.
func elements(n *html.Node, name string) (all []*html.Node) {
	for x := range n.Descendants() {
		if x.Type == html.ElementNode && (name == "" || x.Data == name) {
			all = append(all, x)
		}
	}
	return all
}

func attribute(n *html.Node, name string) string {
	for _, a := range n.Attr {
		if a.Key == name {
			return a.Val
		}
	}
	return ""
}

// byID is the element of an id.
func byID(t *testing.T, n *html.Node, id string) *html.Node {
	t.Helper()
	for _, x := range elements(n, "") {
		if attribute(x, "id") == id {
			return x
		}
	}
	t.Fatalf("no element %q", id)
	return nil
}

// text is what is read of an element, with single blanks.
func text(n *html.Node) string {
	var b strings.Builder
	for x := range n.Descendants() {
		if x.Type == html.TextNode {
			b.WriteString(x.Data + " ")
		}
	}
	return strings.Join(strings.Fields(b.String()), " ")
}

func tells(t *testing.T, n *html.Node, all ...string) {
	t.Helper()
	told := text(n)
	for _, want := range all {
		if !strings.Contains(told, want) {
			t.Errorf("not told %q in: %s", want, told)
		}
	}
}

// The figures of the invented plant, worked by hand: means of the fifty minutes that were
// measured, and what ± leaves of their digits.
func TestCourseOfALoad(t *testing.T) {
	p := newFakePlant(t)
	page := parsed(t, sheetOf(t, p, "hot-water", "span=1h"))
	course := byID(t, page, "course")
	tells(t, course, "duty 595 604 616 10 kW", "expected duty 640.0 640.0 640.0 4.0 kW", "inlet 130.00 130.00 130.00 0.47 °C", "outlet 90.00 92.45 94.90",
		"measured 75.0 % of the time, bridged 8.3 %, missing 16.7 %", "A point of a chart is 1 min")
	if q := p.series[0]; q.Load != "hot-water" || q.From != "2026-12-02T11:00:00Z" || q.To != "" {
		t.Errorf("asked for %+v", q)
	}
	chart := elements(course, "figure")[1]
	for name, want := range map[string]string{"data-factor": "1", "data-offset": "273.15", "data-decimals": "2", "data-unit": "°C"} {
		if got := attribute(chart, name); got != want {
			t.Errorf("%s of the temperatures is %q, want %q", name, got, want)
		}
	}
	data, err := url.Parse(attribute(byID(t, page, "charts"), "data-series"))
	if err != nil || data.Path != seriesPath || data.Query().Get("from") != "2026-12-02T11:00:00Z" {
		t.Errorf("columns from %v, %v", data, err)
	}
}

// 604.5 kW are 2.0627 million Btu/h, and 10 kW 34 thousand (NIST SP 811, appendix B.9).
func TestCourseInOtherUnits(t *testing.T) {
	page := parsed(t, sheetOf(t, newFakePlant(t), "hot-water", "duty=kBtu/h&temperature=°F&flow=lb/h"))
	tells(t, byID(t, page, "course"), "duty 2030 2063 2102 34 kBtu/h", "inlet 266.00 266.00 266.00 0.85 °F", "lb/h")
	tells(t, byID(t, page, "cp"), "Btu/(lb °F)", "101.5 psi absolute", "194.00")
	tells(t, byID(t, page, "exchanger"), "Btu/(h °F)", "h °F/MMBtu")
	tells(t, byID(t, page, "working"), "serves 2089 ± 34 kBtu/h")
}

func TestWorkingOfAMinute(t *testing.T) {
	p := newFakePlant(t)
	p.working.Sections[0].Lines = append(p.working.Sections[0].Lines, working.Line{Words: "outlet", Value: math.NaN(), Reading: &working.Sample{Tag: "TT-202", At: midday, Quality: "bad", Reason: "no-value", Fault: "bad reading"}},
		working.Line{Words: "a remark without a value"})
	p.working.Sections = append(p.working.Sections, working.Section{Title: working.CausesTitle, Lines: []working.Line{{Words: "said twice"}}})
	page := parsed(t, sheetOf(t, p, "hot-water", "at=2026-12-02T10:30"))
	w := byID(t, page, "working")
	tells(t, w, "it serves 612 ± 10 kW; it is holding", "Readings: good", "m mass flow [1] V × ρ = 0.004 × 930 = 3.72 kg/s",
		"T1 inlet 403.15 K from TT-201 at 12:00:00.000, 0.25 s old, good", "TT-202 at 12:00:00.000, 0 s old, bad (no-value), not used: bad reading", "a remark without a value",
		"fouling, milk-heater (weight 0.70): less heat passes", "duty 612.3 kW (3.2 standard uncertainties)", "Sources a table", "Notes a note")
	if strings.Contains(text(w), "said twice") {
		t.Error("the causes stand among the lines as well")
	}
	if q := p.explains[0]; q.At != "2026-12-02T10:30:00Z" || q.Load != "hot-water" {
		t.Errorf("asked for %+v", q)
	}
	for _, x := range elements(w, "input") {
		if attribute(x, "name") == "at" && attribute(x, "value") != "2026-12-02T10:30" {
			t.Errorf("the form has %q", attribute(x, "value"))
		}
	}
	var ways []string
	for _, a := range elements(w, "a") {
		ways = append(ways, attribute(a, "href"))
	}
	for _, want := range []string{"/loads/hot-water?at=2026-12-02T10%3A29%3A00Z#working", "/loads/hot-water?at=2026-12-02T10%3A31%3A00Z#working", "/loads/hot-water#working", "#source-1"} {
		if !strings.Contains(strings.Join(ways, "\n"), want) {
			t.Errorf("no link %s in %s", want, ways)
		}
	}
}

// What an answer refuses is told in its place, and the other parts stand.
func TestPartsWithoutAnAnswer(t *testing.T) {
	p := newFakePlant(t)
	p.fault = errors.New(`at 2026: the history "goes" <up> to midday`)
	page := parsed(t, sheetOf(t, p, "hot-water", ""))
	for _, id := range []string{"course", "working", "heat", "cp", "events"} {
		tells(t, byID(t, page, id), `Not told: at 2026: the history "goes" <up> to midday`)
	}
	tells(t, byID(t, page, "uncertainty"), "flow 64.0 %")
	tells(t, byID(t, page, "exchanger"), "16.00 ± 0.64 kW/K")
}

// Every way on keeps units and what it does not change of the place in time.
func TestLinksKeepUnitsAndPlace(t *testing.T) {
	const place = "span=1w&to=2026-12-01T06:00&at=2026-11-30T10:00&by=day&duty=MW&temperature=°F&heat=GJ"
	p := newFakePlant(t)
	p.events.Events = []answer.Event{{At: midday.Add(-48 * time.Hour), Kind: "start"}}
	page := parsed(t, sheetOf(t, p, "hot-water", place))
	kept := map[string]string{"span": "1w", "to": "2026-12-01T06:00:00Z", "at": "2026-11-30T10:00:00Z", "by": "day", "duty": "MW", "temperature": "°F", "heat": "GJ"}
	for part, changed := range map[string]string{"course": "span to", "working": "at", "heat": "span to by", "exchanger": "", "events": "span to at"} {
		links := elements(byID(t, page, part), "a")
		for _, a := range links {
			to, err := url.Parse(attribute(a, "href"))
			if err != nil {
				t.Fatal(err)
			}
			for name, want := range kept {
				if strings.HasPrefix(to.Path, "/loads/") && !strings.Contains(changed, name) && to.Query().Get(name) != want {
					t.Errorf("%s: %s loses %s", part, to, name)
				}
			}
			if to.Path == "/account" && to.Query().Get("heat") != "GJ" {
				t.Errorf("%s loses the units", to)
			}
		}
		if len(links) == 0 {
			t.Errorf("%s leads nowhere", part)
		}
	}
	form := elements(page, "form")[0]
	fields := url.Values{}
	for _, x := range elements(form, "input") {
		fields.Add(attribute(x, "name"), attribute(x, "value"))
	}
	if got, want := fields.Encode(), "at=2026-11-30T10%3A00&by=day&duty=MW&heat=GJ&span=1w&temperature=%C2%B0F&to=2026-12-01T06%3A00%3A00Z"; got != want {
		t.Errorf("the form carries %s, want %s", got, want)
	}
	if q := p.series[0]; q.From != "2026-11-24T06:00:00Z" || q.To != "2026-12-01T06:00:00Z" {
		t.Errorf("course of %+v", q)
	}
	if q := p.asked[0]; q.From != "2026-11-24T06:00:00Z" || q.To != "2026-12-01T06:00:00Z" {
		t.Errorf("events of %+v", q)
	}
	if q := p.reports[0]; q.From != "2026-10-31" || q.To != "2026-12-01T06:00:00Z" || q.By != "day" {
		t.Errorf("heat of %+v", q)
	}
}

// Names and texts of the site file, of events and of readings are text, whatever they look like.
func TestHostileNames(t *testing.T) {
	const evil = `</title><script>alert(1)</script>"'><img src=x onerror=alert(2)>{{.}}&amp;`
	p := newFakePlant(t)
	p.site.Loads[0].Name, p.site.Exchangers[0].Name, p.site.Loads[3].Name = evil, evil, evil+"/../2"
	p.snapshot.Loads[0].Name, p.snapshot.Exchangers[0].Name = evil, evil
	p.events.Events = []answer.Event{{At: midday, Kind: evil, Subject: evil, Text: evil}}
	p.working.Notes, p.working.Verdict, p.working.Reason = []string{evil}, evil, evil
	l := &p.working.Sections[0].Lines[1]
	l.Words, l.Symbol, l.Formula, l.Source, l.Reading.Tag, l.Reading.Reason = evil, evil, evil, evil, evil, evil
	p.working.Causes[0].Says, p.working.Causes[0].Subject = evil, evil
	p.report.Notes = []string{evil}
	page := parsed(t, sheetOf(t, p, evil, "at=2026-12-02T10:30"))
	for _, x := range elements(page, "") {
		own := strings.HasPrefix(attribute(x, "src"), "/assets/") || strings.HasPrefix(attribute(x, "src"), "/ribbon.svg")
		if x.Data == "style" || (x.Data == "script" || x.Data == "img") && (!own || text(x) != "") {
			t.Errorf("an element %s", x.Data)
		}
		for _, a := range x.Attr {
			if a.Key == "style" || strings.HasPrefix(a.Key, "on") {
				t.Errorf("%s has an attribute %s=%q", x.Data, a.Key, a.Val)
			}
		}
	}
	if n := strings.Count(text(page), evil); n < 12 {
		t.Errorf("the text stands %d times", n)
	}
	own, other := false, false
	for _, a := range elements(page, "a") {
		to, err := url.Parse(attribute(a, "href"))
		if err != nil {
			t.Fatal(err)
		}
		own = own || to.Path == "/loads/"+evil
		other = other || to.Path == "/loads/"+evil+"/../2" && !strings.Contains(strings.TrimPrefix(to.EscapedPath(), "/loads/"), "/")
	}
	if !own || !other {
		t.Errorf("links lead to the load: %v, and to that of the other side: %v", own, other)
	}
}

func TestAddressesThatAreNone(t *testing.T) {
	for query, want := range map[string]string{
		"span=2h":             "span \"2h\": allowed are 1h, 6h, 1d, 1w, 1mo, 6mo, 1y, 2y",
		"by=week":             "by \"week\": allowed are hour, day, month",
		"to=tomorrow":         "to \"tomorrow\" is no date",
		"at=2026-13-01":       "at \"2026-13-01\" is no date",
		"at=2026-03-29T01:30": "at ",
	} {
		v, _ := url.ParseQuery(query)
		p := newFakePlant(t)
		_, err := loadAddressOf("x", v, p.site.Zone)
		var wrong *answer.QueryError
		if !errors.As(err, &wrong) || !strings.HasPrefix(err.Error(), want) {
			t.Errorf("%s: %v, want %s", query, err, want)
		}
	}
}

func TestStepsInTime(t *testing.T) {
	zone, err := time.LoadLocation("Europe/Dublin")
	if err != nil {
		t.Fatal(err)
	}
	v := url.Values{"span": {"1mo"}, "to": {"2026-05-01"}}
	a, err := loadAddressOf("x", v, zone)
	if err != nil {
		t.Fatal(err)
	}
	now := time.Date(2026, 5, 20, 9, 0, 0, 0, zone)
	if begin := a.begin(now); begin.Format(addressMinute) != "2026-04-01T00:00:00+01:00" {
		t.Errorf("begins %v", begin)
	}
	ways := a.stepLinks(now)
	if len(ways) != 3 || ways[0].To != "/loads/x?span=1mo&to=2026-04-01T00%3A00%3A00%2B01%3A00#course" || ways[1].To != "/loads/x?span=1mo#course" {
		t.Errorf("ways %+v", ways)
	}
}

func TestLoadsThatAreNone(t *testing.T) {
	p := newFakePlant(t)
	if w := get(p.page(t), "/loads/boiler"); w.Code != http.StatusNotFound || !strings.Contains(w.Body.String(), "no load of this name") {
		t.Errorf("status %d: %s", w.Code, w.Body)
	}
	w := get(p.page(t), "/loads/milk?span=2h&duty=furlong")
	if w.Code != http.StatusBadRequest || !strings.Contains(w.Body.String(), "duty &quot;furlong&quot; is no unit") {
		t.Errorf("status %d: %s", w.Code, w.Body)
	}
	p.snapshot = nil
	if w := get(p.page(t), "/loads/milk"); w.Code != http.StatusServiceUnavailable || !strings.Contains(w.Body.String(), "no beat yet") {
		t.Errorf("status %d: %s", w.Code, w.Body)
	}
}

// Every load of every site file that comes with the program has a sheet, whatever its fluid: with
// figures, blind, and in other units. No part of it says what is no number.
func TestSheetOfEveryLoad(t *testing.T) {
	files, err := filepath.Glob("../../configs/*.yaml")
	if err != nil || len(files) < 5 {
		t.Fatalf("site files %v, %v", files, err)
	}
	for _, file := range files {
		p := fakePlantOf(t, filepath.Base(file))
		for i := range p.site.Loads {
			p.snapshot.Loads[i].Figure.Pressure = 0 // that of the file, which suits the fluid
			for _, query := range []string{"", "temperature=°F&duty=ton of refrigeration&span=1y&by=month"} {
				page := parsed(t, sheetOf(t, p, p.site.Loads[i].Name, strings.ReplaceAll(query, " ", "+")))
				cp := byID(t, page, "cp")
				if len(elements(cp, "path")) < 2 {
					t.Errorf("%s: %s: no curve of %s", file, p.site.Loads[i].Name, text(cp))
				}
				for _, x := range append(elements(page, "path"), elements(page, "rect")...) {
					for _, a := range x.Attr {
						if strings.Contains(a.Val, "NaN") || strings.Contains(a.Val, "Inf") {
							t.Errorf("%s: %s: %s=%q", file, p.site.Loads[i].Name, a.Key, a.Val)
						}
					}
				}
				if told := text(page); strings.Contains(told, "NaN") || strings.Contains(told, "+Inf") {
					t.Errorf("%s: %s: %s", file, p.site.Loads[i].Name, told)
				}
				p.snapshot.Loads[i].Figure = loads.Figure{Fault: loads.Stale}
			}
		}
	}
}

// A month back from the last of March is the last of February.
func TestSpansEndWithTheirMonths(t *testing.T) {
	for to, want := range map[string]string{"2026-03-31": "2026-02-28", "2028-03-30": "2028-02-29", "2026-05-15": "2026-04-15", "2026-01-31": "2025-12-31"} {
		end, err := time.Parse(time.DateOnly, to)
		if err != nil {
			t.Fatal(err)
		}
		if got := months(1)(end).Format(time.DateOnly); got != want {
			t.Errorf("a month back from %s is %s, want %s", to, got, want)
		}
	}
}
