package page

import (
	"cmp"
	"fmt"
	"math"
	"net/http"
	"slices"
	"strings"
	"time"

	"heatreeve/agent/design"
	"heatreeve/agent/shown"
	"heatreeve/agent/view"
	"heatreeve/agent/warn"
)

// sheetOfLoads is the first page: a band a load.
type sheetOfLoads struct {
	frame
	At       time.Time // event time, by the clock of the site
	Began    bool      // the agent has had its first beat
	Tallies  []tally
	Find     string
	Bands    []band
	Hidden   int       // bands that the filter leaves out
	Warnings []warning // that stand
	Returned []warning // that have ended, and nobody has marked as seen
	Warned   string    // tells this list of warnings from another
	// Exchangers are those of which there is something to tell.
	Exchangers []exchangerLine
	Hours      []string // along the ribbons
	From, To   string   // of the ribbons
	Faults     []string // of broker and history
}

// tally counts the loads of a verdict, and may be ticked to see those alone.
type tally struct {
	Verdict string
	Count   int
	Ticked  bool
}

// warning is one that stands, or was not acknowledged.
type warning struct{ Subject, Href, Text, State string }

func (p *Page) sheet(w http.ResponseWriter, r *http.Request) {
	v := r.URL.Query()
	x := sheetOfLoads{frame: p.frameOf(r, "Sheet of loads", "find", "verdict"), Find: v.Get("find")}
	s := p.Snapshot()
	if s != nil {
		x.fill(p, s, v["verdict"])
	}
	for _, d := range design.Verdicts {
		x.Tallies = append(x.Tallies, tally{d.String(), x.count(s, p, d), slices.Contains(v["verdict"], d.String())})
	}
	status := http.StatusOK
	if x.Fault != "" {
		status = http.StatusBadRequest
	}
	send(w, r, status, sheetView(&x))
}

// exchangerLine is an exchanger in a line.
type exchangerLine struct{ Name, Href, When, Text string }

// exchangerLines tell of each exchanger with a window in the last hour; on the sheet of its
// cold side there is more.
func (p *Page) exchangerLines(f *frame, s *view.Snapshot) (all []exchangerLine) {
	sheet := loadSheet{units: f.Units}
	for i := range s.Exchangers {
		x, ok := s.Told(i)
		if !ok {
			continue
		}
		line := exchangerLine{Name: x.Name, When: time.Unix(0, x.At).In(p.Site.Zone).Format("15:04"), Text: x.Why}
		if x.Why == "" {
			line.Text = "UA " + told(sheet.conductance(), x.Observed.Conductance, coverageFactor*x.RatioError*x.Observed.Conductance) +
				", " + shown.Rounded(100*math.Exp(x.Ratio), 0) + " % of clean"
			if x.Allowance > 0 && x.Course.Days > 0 {
				line.Text += ". " + reached(x)
			}
		}
		for k := range p.Site.Exchangers {
			if e := &p.Site.Exchangers[k]; e.Name == x.Name {
				line.Href = f.LoadLink(p.Site.Loads[e.Cold].Name) + "#exchanger"
			}
		}
		all = append(all, line)
	}
	return all
}

// count is how many loads have a verdict now.
func (x *sheetOfLoads) count(s *view.Snapshot, p *Page, d design.Verdict) (n int) {
	if s == nil {
		return 0
	}
	at := p.Now().UnixNano()
	for i := range s.Loads {
		if _, verdict := s.Current(i, at); verdict == d {
			n++
		}
	}
	return n
}

func (x *sheetOfLoads) fill(p *Page, s *view.Snapshot, verdicts []string) {
	x.Began = true
	x.At = time.Unix(0, s.At).In(p.Site.Zone)
	x.Faults = faults(s)
	if s.At > 0 {
		x.alongRibbons()
	}
	for i := range s.Loads {
		b := p.bandOf(&x.frame, s, i)
		if !strings.Contains(strings.ToLower(b.Load), strings.ToLower(x.Find)) || len(verdicts) > 0 && !slices.Contains(verdicts, b.Verdict) {
			b.Hidden = true
			x.Hidden++
		}
		x.Bands = append(x.Bands, b)
	}
	slices.SortStableFunc(x.Bands, func(a, b band) int { return cmp.Compare(a.attention(), b.attention()) })
	x.Exchangers = p.exchangerLines(&x.frame, s)
	x.Warnings, x.Returned = p.warningsOf(&x.frame, s, "")
	x.Warned = warnedOf(s)
}

func (x *sheetOfLoads) alongRibbons() {
	from := x.At.Add(-ribbonSpan)
	x.From, x.To = from.Format("Mon 15:04"), x.At.Format("15:04")
	for h := 0; h <= 24; h += 6 {
		x.Hours = append(x.Hours, from.Add(time.Duration(h)*time.Hour).Format("15:04"))
	}
}

// warningsOf are those of a load, or all: that stand, and that have returned.
func (p *Page) warningsOf(f *frame, s *view.Snapshot, load string) (standing, returned []warning) {
	listed := s.Warnings.Listed()
	for i := range listed {
		l := &listed[i]
		if load != "" && l.Subject != load {
			continue
		}
		x := warning{Subject: l.Subject, Text: l.Text(p.Site.Zone), State: stateOf(l, p.Site.Zone)}
		if p.loadIndex(l.Subject) >= 0 {
			x.Href = f.LoadLink(l.Subject)
		}
		if l.State() == warn.Returned {
			returned = append(returned, x)
		} else {
			standing = append(standing, x)
		}
	}
	return standing, returned
}

// stateOf is where a warning stands with its operators.
func stateOf(l *warn.Listed, zone *time.Location) string {
	state := string(l.State())
	if l.Mark != nil {
		state += " by " + l.Mark.By
	}
	if l.Shelf != nil {
		state += ", shelved until " + time.Unix(0, l.Shelf.Until).In(zone).Format("Mon 15:04")
	}
	return state
}

// loadIndex finds a load of the site, -1 for none.
func (p *Page) loadIndex(name string) int {
	for i := range p.Site.Loads {
		if p.Site.Loads[i].Name == name {
			return i
		}
	}
	return -1
}

// faults are what keeps the agent from its work, what the broker had kept of tags that have
// said nothing since, and tags of which all was refused.
func faults(s *view.Snapshot) (all []string) {
	for _, b := range s.AllBrokers() {
		if !b.Connected {
			all = append(all, strings.TrimSuffix(b.Called()+" is not connected: "+b.Fault, ": "))
		}
	}
	if s.History.Fault != "" {
		all = append(all, "history: "+s.History.Fault)
	}
	all = append(all, kept(s.Tags)...)
	return append(all, refused(s.Tags)...)
}

// tagsTold is how many tags are named for one reason: with a wrong clock, or after a start, it is
// every tag of a plant.
const tagsTold = 5

// kept tells the tags that have sent nothing since the broker had kept something of them.
func kept(tags []view.Tag) (all []string) {
	more := 0
	for i := range tags {
		switch t := &tags[i]; {
		case t.Kept == "":
		case len(all) < tagsTold:
			all = append(all, t.Name+": the broker had kept "+t.Kept+", of an age that nobody knows; it is in no figure")
		default:
			more++
		}
	}
	if more > 0 {
		all = append(all, fmt.Sprintf("of %d more tags the broker had kept a reading", more))
	}
	return all
}

// refused tells the tags that have sent, but nothing that could be used.
func refused(tags []view.Tag) (all []string) {
	more := 0
	for i := range tags {
		t := &tags[i]
		if t.Newest != 0 || t.Accepted > 0 {
			continue
		}
		var reasons []string
		for _, r := range t.Refused {
			if r.Count > 0 {
				reasons = append(reasons, fmt.Sprintf("%d %s", r.Count, r.Reason))
			}
		}
		switch {
		case len(reasons) == 0:
		case len(all) < tagsTold:
			all = append(all, t.Name+": all that came was refused ("+strings.Join(reasons, ", ")+"); the log tells an example")
		default:
			more++
		}
	}
	if more > 0 {
		all = append(all, fmt.Sprintf("of %d more tags all that came was refused", more))
	}
	return all
}
