package page

import (
	"context"
	"math"
	"net/http"
	"net/url"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/design"
	"heatreeve/agent/design/exchanger"
	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/agent/view"
	"heatreeve/agent/working"
)

// fakePlant answers for an invented plant with figures that can be told at sight, and keeps what
// it was asked.
type fakePlant struct {
	site     *site.Site
	snapshot *view.Snapshot
	report   *answer.Report
	working  *working.Working
	events   *answer.Events
	fault    error
	series   []answer.SeriesQuery
	reports  []answer.Query
	explains []answer.Explanation
	asked    []answer.EventQuery
}

func (p *fakePlant) Snapshot() *view.Snapshot { return p.snapshot }
func (p *fakePlant) Now() time.Time           { return time.Unix(0, p.snapshot.At) }

func (p *fakePlant) Report(_ context.Context, q answer.Query) (*answer.Report, error) {
	p.reports = append(p.reports, q)
	return p.report, p.fault
}

func (p *fakePlant) Explain(_ context.Context, q answer.Explanation) (*working.Working, error) {
	p.explains = append(p.explains, q)
	return p.working, p.fault
}

func (p *fakePlant) Events(_ context.Context, q answer.EventQuery, tell func(*answer.Event)) (int, error) {
	p.asked = append(p.asked, q)
	if p.fault != nil {
		return 0, p.fault
	}
	for i := range p.events.Events {
		tell(&p.events.Events[i])
	}
	return p.events.Unused, nil
}

func (p *fakePlant) Series(_ context.Context, q answer.SeriesQuery) (*answer.Series, error) {
	p.series = append(p.series, q)
	if p.fault != nil {
		return nil, p.fault
	}
	x := &answer.Series{Load: q.Load, Span: 60, From: midday.Add(-time.Hour), To: midday, Accounted: midday}
	at := func(v float64) *float64 { return &v }
	for i := range 60 {
		x.Start = append(x.Start, p.snapshot.At/1e9-3600+60*int64(i))
		if i >= 50 { // then there was nothing
			for _, c := range []*[]*float64{&x.Lowest, &x.Highest, &x.Mean, &x.Uncertainty, &x.Expected, &x.ExpectedU, &x.Inlet, &x.Outlet, &x.Flow} {
				*c = append(*c, nil)
			}
			x.Measured, x.Bridged, x.Given, x.Taken = append(x.Measured, 0), append(x.Bridged, 0), append(x.Given, 0), append(x.Taken, 0)
			continue
		}
		mean := 600e3 + 1e3*float64(i%10)
		x.Lowest, x.Highest, x.Mean = append(x.Lowest, at(mean-5e3)), append(x.Highest, at(mean+7e3)), append(x.Mean, at(mean))
		x.Uncertainty, x.Expected, x.ExpectedU = append(x.Uncertainty, at(5e3)), append(x.Expected, at(640e3)), append(x.ExpectedU, at(2e3))
		x.Inlet, x.Outlet, x.Flow = append(x.Inlet, at(403.15)), append(x.Outlet, at(363.15+float64(i)/10)), append(x.Flow, at(3.7))
		x.Measured, x.Bridged, x.Given, x.Taken = append(x.Measured, 54), append(x.Bridged, 6), append(x.Given, 60*mean), append(x.Taken, 0)
	}
	return x, nil
}

// midday is the newest instant of the invented plant.
var midday = time.Date(2026, 12, 2, 12, 0, 0, 0, time.UTC)

func newFakePlant(t *testing.T) *fakePlant { return fakePlantOf(t, "brackwater-creamery.yaml") }

func fakePlantOf(t *testing.T, file string) *fakePlant {
	t.Helper()
	s, err := site.Load(filepath.Join("../../configs", file))
	if err != nil {
		t.Fatal(err)
	}
	p := &fakePlant{site: s, snapshot: &view.Snapshot{Site: s.Name, At: midday.UnixNano()}}
	for i := range s.Loads {
		l := view.Load{Name: s.Loads[i].Name, Until: math.MaxInt64, Verdict: design.Holding, Design: 640e3, Allow: 0.08}
		l.Figure = loads.Figure{At: p.snapshot.At, Duty: 600e3, Uncertainty: 5e3, MassFlow: 3.7, Density: 940, Inlet: 403.15, Outlet: 363.15, Pressure: 7e5}
		l.Figure.Share[loads.PartFlow], l.Figure.Share[loads.PartInlet] = 4e3, -3e3
		p.snapshot.Loads = append(p.snapshot.Loads, l)
	}
	p.snapshot.Exchangers = []view.Exchanger{{Name: "milk-heater", Allowance: 1e-5, Standing: fouledStanding(p.snapshot.At)}}
	p.report, p.working, p.events = fakeReport(), fakeWorking(), &answer.Events{}
	return p
}

// fouledStanding is of an exchanger whose fouling resistance was 4 K/MW on the last of ten days
// and has risen by 0.5 K/MW a day: it comes to 10 K/MW twelve days later.
func fouledStanding(at int64) design.Standing {
	last := math.Floor(float64(at) / 86400e9)
	return design.Standing{
		At: at - 60e9, Statistics: exchanger.Statistics{Ratio: math.Log(0.94), Closure: 1500}, Errors: exchanger.Statistics{Closure: 2000},
		Observed: exchanger.Observed{Conductance: 16e3, Clean: 17e3, Fouling: 4e-6}, RatioError: 0.02, FoulingError: 1e-7,
		Course: exchanger.Course{Days: 10, Slope: 0.5e-6, SlopeError: 1e-8, Level: 4e-6, Last: last, Mid: last - 4.5, About: 82.5, Scatter: 82.5e-16, Student: 2.306},
	}
}

func fakeReport() *answer.Report {
	l := answer.LoadReport{Load: "hot-water"}
	begin := midday.Add(-24 * time.Hour)
	for i := range 24 {
		start := begin.Add(time.Duration(i) * time.Hour)
		x := answer.PeriodReport{Start: start, End: start.Add(time.Hour), Given: 3.6e9 * float64(i) / 10, Uncertainty: 3.6e7, Expanded: 7.2e7, Measured: 2700, Bridged: 450, Missing: 450, Coverage: 0.75}
		l.Periods = append(l.Periods, x)
	}
	l.Total = answer.PeriodReport{Given: 27.6 * 3.6e9, Uncertainty: 1e9, Expanded: 2e9, Coverage: 0.75, Measured: 64800, Shares: []answer.Share{{Part: "flow", Uncertainty: 0.8e9, Fraction: 0.64}, {Part: "inlet", Uncertainty: 0.6e9, Fraction: 0.36}}}
	return &answer.Report{By: "hour", Loads: []answer.LoadReport{l}}
}

func fakeWorking() *working.Working {
	duty, u := 612.3e3, 5e3
	return &working.Working{
		Load: "hot-water", At: midday, Span: 1, Duty: &duty, Uncertainty: &u, Quality: "good", Verdict: "holding", Notes: []string{"a note"},
		Sections: []working.Section{{Title: "Heat", Lines: []working.Line{
			{Symbol: "m", Words: "mass flow", Law: "V × ρ", Formula: "0.004 × 930", Value: 3.72, Shown: "3.72", Unit: "kg/s", Source: "a table"},
			{Symbol: "T1", Words: "inlet", Value: 403.15, Shown: "403.15", Unit: "K", Reading: &working.Sample{Tag: "TT-201", At: midday, Age: 0.25, Quality: "good"}},
		}}},
		Causes: []working.Cause{{Kind: "fouling", Subject: "milk-heater", Weight: 0.7, Says: "less heat passes", Figures: []working.Figure{{Name: "duty", Value: 612300, Unit: "W", Stands: 3.2}}}},
	}
}

// page is the page of the invented plant.
func (p *fakePlant) page(t *testing.T) *Page {
	t.Helper()
	x := New(p, Options{Site: p.site, Version: "test", Safety: "Heatreeve informs."})
	return x
}

// sheetOf is the sheet of a load of the invented plant as HTML.
func sheetOf(t *testing.T, p *fakePlant, load, query string) string {
	t.Helper()
	w := get(p.page(t), "/loads/"+url.PathEscape(load)+"?"+strings.ReplaceAll(query, "°", "%C2%B0"))
	if w.Code != http.StatusOK {
		t.Fatalf("status %d: %s", w.Code, w.Body)
	}
	return w.Body.String()
}
