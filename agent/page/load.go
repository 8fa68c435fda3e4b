package page

import (
	"context"
	"errors"
	"net/http"
	"net/url"
	"time"

	"heatreeve/agent/loads"
	"heatreeve/agent/shown"
	"heatreeve/agent/site"
	"heatreeve/agent/view"
)

// loadPage is the sheet of one load within its frame.
type loadPage struct {
	frame
	Name     string
	At       time.Time // event time, by the clock of the site
	Band     *band     // nil before the first beat
	Warnings []warning // that stand
	Returned []warning // that stand no more, and were not acknowledged
	Sheet    *loadSheet
}

// loadSheet is what is told of one load: its parts in their order.
type loadSheet struct {
	source   Source
	site     *site.Site
	zone     *time.Location
	snapshot *view.Snapshot
	index    int // of the load
	load     *site.HeatLoad
	serves   string // gives or takes heat
	figure   loads.Figure
	now      time.Time // event time
	address  loadAddress
	units    shown.Units

	Course     *coursePart
	Working    *workingPart
	Shares     *sharesPart
	Cp         *cpPart
	Heat       *heatPart
	Exchangers []*exchangerPart
	Events     *eventsPart
}

// sheetWait is how long all that an answer needs is waited for together: less than a
// connection may take to be written to.
const sheetWait = 12 * time.Second

// oneLoad answers with the sheet of one load.
func (p *Page) oneLoad(w http.ResponseWriter, r *http.Request) {
	x := loadPage{Name: r.PathValue("load")}
	x.frame = p.frameOf(r, x.Name, "span", "to", "at", "by")
	x.Look = append(x.Look, "uplot/uPlot.min.css", "load.css")
	x.Script = append(x.Script, "uplot/uPlot.iife.min.js", "load.js")
	status := http.StatusOK
	i, s := p.loadIndex(x.Name), p.Snapshot()
	switch {
	case i < 0:
		status, x.Fault = http.StatusNotFound, "There is no load of this name in the site file."
	case s == nil:
		status = http.StatusServiceUnavailable
		w.Header().Set("Retry-After", "2")
	default:
		x.At = time.Unix(0, s.At).In(p.Site.Zone)
		b := p.bandOf(&x.frame, s, i)
		x.Band = &b
		x.Warnings, x.Returned = p.warningsOf(&x.frame, s, x.Name)
		sheet, err := p.sheetOf(s, i, r.URL.Query(), &x.frame)
		if err != nil && x.Fault == "" {
			x.Fault = err.Error()
		}
		if x.Fault != "" {
			status = http.StatusBadRequest
		}
		if s.At > 0 { // else there is nothing to tell yet
			ctx, cancel := context.WithTimeout(r.Context(), sheetWait)
			defer cancel()
			sheet.fill(ctx)
			x.Sheet = sheet
		}
	}
	send(w, r, status, loadView(&x))
}

// sheetOf reads an address; where it is wrong, the sheet is that of what of it is right, and the
// error is an [*answer.QueryError].
func (p *Page) sheetOf(snapshot *view.Snapshot, index int, v url.Values, f *frame) (*loadSheet, error) {
	s := &loadSheet{
		source: p.Source, site: p.Site, zone: p.Site.Zone, snapshot: snapshot, index: index, load: &p.Site.Loads[index], serves: p.serves(index), units: f.Units,
	}
	var err error
	s.address, err = loadAddressOf(s.load.Name, v, s.zone)
	s.address.units = f.unitValues
	s.figure, _ = snapshot.Current(index, p.Now().UnixNano())
	s.now = time.Unix(0, snapshot.At).In(s.zone)
	return s, err
}

// why tells a reader why there is no answer.
func why(err error) string {
	if errors.Is(err, context.DeadlineExceeded) {
		return "the agent is busy with other questions; load the page again in a moment"
	}
	return err.Error()
}

// fill asks the source for every part; what one cannot tell, it says in its place.
func (s *loadSheet) fill(ctx context.Context) {
	s.Course = s.course(ctx)
	s.Working = s.working(ctx)
	s.Heat = s.heat(ctx)
	s.Shares = s.shares(s.Heat.total)
	s.Cp = s.cp(ctx)
	s.Exchangers = s.exchangers()
	s.Events = s.events(ctx)
}
