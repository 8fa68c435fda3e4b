package page

import (
	"context"
	"errors"
	"fmt"
	"html"
	"math"
	"net/http"
	"net/http/httptest"
	"regexp"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/design"
	"heatreeve/agent/loads"
	"heatreeve/agent/shown"
	"heatreeve/agent/site"
	"heatreeve/agent/view"
	"heatreeve/agent/working"
	"heatreeve/ingest/quality"
)

// fixed is a source that stands still.
type fixed struct {
	snapshot *view.Snapshot
	now      time.Time
	series   func(answer.SeriesQuery) (*answer.Series, error)
	report   func(answer.Query) (*answer.Report, error)
}

var errNothing = errors.New("nothing is kept")

func (f *fixed) Snapshot() *view.Snapshot { return f.snapshot }
func (f *fixed) Now() time.Time           { return f.now }
func (f *fixed) Report(_ context.Context, q answer.Query) (*answer.Report, error) {
	if f.report == nil {
		return nil, errNothing
	}
	return f.report(q)
}
func (f *fixed) Explain(context.Context, answer.Explanation) (*working.Working, error) {
	return nil, errNothing
}
func (f *fixed) Events(context.Context, answer.EventQuery, func(*answer.Event)) (int, error) {
	return 0, errNothing
}
func (f *fixed) Series(_ context.Context, q answer.SeriesQuery) (*answer.Series, error) {
	if f.series == nil {
		return nil, errNothing
	}
	return f.series(q)
}

var noon = time.Date(2026, 12, 1, 12, 0, 0, 0, time.UTC)

// mill is a plant of loads in several states.
func mill(t testing.TB, all ...view.Load) (*Page, *fixed) {
	t.Helper()
	s := &site.Site{Name: "Mill", Zone: time.UTC, Shown: shown.Usual()}
	for i := range all {
		all[i].Until = math.MaxInt64
		s.Loads = append(s.Loads, site.HeatLoad{Name: all[i].Name, Stream: &site.Stream{Gives: i%2 == 0}})
	}
	source := &fixed{now: noon, snapshot: &view.Snapshot{Site: "Mill", At: noon.UnixNano(), Loads: all, Broker: view.Broker{Connected: true}}}
	p := New(source, Options{Site: s, Version: "test", Safety: "No safety\nfunction."})
	return p, source
}

func get(p http.Handler, path string) *httptest.ResponseRecorder {
	w := httptest.NewRecorder()
	p.ServeHTTP(w, httptest.NewRequest(http.MethodGet, path, nil))
	return w
}

func hall() view.Load {
	return view.Load{Name: "hall", Verdict: design.Blind, Figure: loads.Figure{Fault: loads.Stale, Reason: "TT-1 is old"}}
}

func cooler() view.Load {
	return view.Load{Name: "cooler", Verdict: design.Holding, Design: 40e3, Allow: 0.1, Figure: loads.Figure{Duty: 40.8e3, Uncertainty: 350, Remark: loads.Remark{Latent: true, Note: "sensible part only: coil"}}}
}

// words are those of a page, without its marks.
func words(text string) string {
	return strings.Join(strings.Fields(html.UnescapeString(regexp.MustCompile(`<[^>]*>`).ReplaceAllString(text, ""))), " ")
}

// The sheet says why a load is blind and what to bear in mind with a duty, in the units asked
// for and with the digits that the uncertainty leaves; what asks for attention comes first.
func TestSheetTellsEachLoad(t *testing.T) {
	doubted := cooler()
	doubted.Name, doubted.Figure.Mark, doubted.Figure.By = "chiller", quality.Stuck, "TT-2"
	short := cooler()
	short.Name, short.Verdict = "kiln", design.Short
	p, source := mill(t, cooler(), hall(), doubted, short)
	source.snapshot.Tags = []view.Tag{{Name: "TT-8", Newest: 1}, {Name: "TT-9", Kept: "21.5 °C"}}
	for i := range tagsTold + 2 {
		source.snapshot.Tags = append(source.snapshot.Tags, view.Tag{Name: fmt.Sprintf("FT-%d", i), Refused: []view.Refusal{{Reason: "empty"}, {Reason: "ahead", Count: 20}}})
	}
	for i := range tagsTold + 1 { // two more than are told, with TT-9
		source.snapshot.Tags = append(source.snapshot.Tags, view.Tag{Name: fmt.Sprintf("PT-%d", i), Kept: "1 bar"})
	}
	source.snapshot.History.Fault = "no space left"
	w := get(p, "/")
	text := words(w.Body.String())
	for _, want := range []string{
		"hall blind – kW takes heat", "TT-1 is old", "cooler holding 40.80 ± 0.70 kW gives heat", "sensible part only: coil",
		`tag "TT-2" is uncertain: stuck; sensible part only: coil`, "TT-9: the broker had kept 21.5 °C, of an age that nobody knows", "history: no space left",
		"FT-0: all that came was refused (20 ahead); the log tells an example", "of 2 more tags all that came was refused", "of 2 more tags the broker had kept a reading", "No safety function.",
	} {
		if !strings.Contains(text, want) {
			t.Errorf("%q is not on the sheet: %s", want, text)
		}
	}
	if strings.Contains(text, "TT-8") {
		t.Error("the sheet tells of a tag that nothing was kept of")
	}
	body := w.Body.String()
	order := []int{strings.Index(body, `data-load="kiln"`), strings.Index(body, `data-load="hall"`), strings.Index(body, `data-load="cooler"`)}
	if !(order[0] > 0 && order[0] < order[1] && order[1] < order[2]) {
		t.Errorf("bands at %v: short comes first, then blind, then holding", order)
	}
	if other := words(get(p, "/?duty=kBtu/h").Body.String()); !strings.Contains(other, "cooler holding 139.2 ± 2.4 kBtu/h") {
		t.Errorf("in kBtu/h: %s", other)
	}
}

// A figure is shown for as long as its inputs are young enough.
func TestSheetIsBlindWhenInputsRunOut(t *testing.T) {
	p, source := mill(t, cooler())
	source.snapshot.Loads[0].Until = noon.UnixNano()
	if text := words(get(p, "/").Body.String()); !strings.Contains(text, "cooler holding 40.80") {
		t.Errorf("in time: %s", text)
	}
	source.now = noon.Add(1)
	if text := words(get(p, "/").Body.String()); !strings.Contains(text, "cooler blind –") || strings.Contains(text, "40.80") {
		t.Errorf("out of age: %s", text)
	}
}

// An address of no page leads back to those that there are.
func TestLostIsToldWhereToGo(t *testing.T) {
	p, _ := mill(t, cooler())
	w := get(p, "/loads?duty=MW")
	if body := w.Body.String(); w.Code != http.StatusNotFound || !strings.Contains(words(body), `There is no page at "/loads".`) || !strings.Contains(body, `href="/account?duty=MW"`) {
		t.Errorf("%d: %s", w.Code, body)
	}
}

func TestSheetFilters(t *testing.T) {
	p, _ := mill(t, cooler(), hall())
	for _, tt := range []struct{ query, hidden, says string }{
		{"?find=HAL", "cooler", "1 load left out"},
		{"?verdict=holding", "hall", "1 load left out"},
		{"?verdict=blind&verdict=holding", "", ""},
		{"?find=nothing", "hall cooler", "2 loads left out"},
	} {
		body := get(p, "/"+tt.query).Body.String()
		var hidden []string
		for _, band := range regexp.MustCompile(`<article [^>]*data-load="([^"]*)"[^>]* hidden>`).FindAllStringSubmatch(body, -1) {
			hidden = append(hidden, band[1])
		}
		if strings.Join(hidden, " ") != tt.hidden || !strings.Contains(body, `id="hidden">`+tt.says+"<") {
			t.Errorf("%s: hidden %q, want %q, and %q in %s", tt.query, hidden, tt.hidden, tt.says, body)
		}
		if none := strings.Contains(body, `<p id="nothing">`); none != (len(hidden) == 2) {
			t.Errorf("%s: that there is none is told: %v", tt.query, none)
		}
	}
}

// A unit that is none is told, and the page stands in the usual ones.
func TestSheetRefusesUnits(t *testing.T) {
	p, _ := mill(t, cooler())
	w := get(p, "/?duty=furlong")
	if text := words(w.Body.String()); w.Code != http.StatusBadRequest || !strings.Contains(text, `duty "furlong" is no unit to show it in; allowed are kW`) || !strings.Contains(text, "40.80 ± 0.70 kW") {
		t.Errorf("%d: %s", w.Code, text)
	}
}

// Names are text, whatever is in them, and links lead to where they say.
func TestSheetEscapesNames(t *testing.T) {
	hostile := `"><img src=x onerror=alert(1)>/../?a=b&c %2f`
	load := cooler()
	load.Name = hostile
	load.Figure.Note = `</p><script>alert(2)</script>`
	p, _ := mill(t, load)
	body := get(p, "/?find="+"%22%3E%3Cimg").Body.String()
	if strings.Contains(body, "<img src=x") || strings.Contains(body, "<script>alert") {
		t.Errorf("a name or a note is markup: %s", body)
	}
	if !strings.Contains(body, `href="/loads/%22%3E%3Cimg%20src=x%20onerror=alert%281%29%3E%2F..%2F%3Fa=b&amp;c%20%252f"`) {
		t.Errorf("the link is wrong: %s", body)
	}
}

// Without a beat there is a page, which says so.
func TestSheetBeforeTheFirstBeat(t *testing.T) {
	p, source := mill(t, cooler())
	source.snapshot = nil
	if text := words(get(p, "/").Body.String()); !strings.Contains(text, "no beat yet") {
		t.Error(text)
	}
}

// Before the first reading there is no event time, and nothing is told of 1970.
func TestSheetsBeforeTheFirstReading(t *testing.T) {
	p, source := mill(t, cooler())
	source.snapshot.At = 0
	plant := newFakePlant(t)
	plant.snapshot.At = 0
	for _, w := range []*httptest.ResponseRecorder{get(p, "/"), get(plant.page(t), "/loads/hot-water")} {
		text := words(w.Body.String())
		if w.Code != http.StatusOK || !strings.Contains(text, "No reading has come yet") || strings.Contains(text, "Thu 1 Jan") || strings.Contains(text, "19") {
			t.Errorf("%d %s", w.Code, text)
		}
	}
	if n := len(plant.series) + len(plant.reports) + len(plant.asked); n > 0 {
		t.Errorf("asked %d times", n)
	}
}
