package agent

import (
	"cmp"
	"context"
	"encoding/hex"
	"errors"
	"fmt"
	"maps"
	"slices"
	"strings"
	"time"

	"heatreeve/agent/account"
	"heatreeve/agent/answer"
	"heatreeve/store"
	"heatreeve/thermo/unit/near"
)

// mostPeriods bounds the answer to a query, and with it the memory that it takes: a year of
// hours of one load, or a month of hours of sixteen.
const mostPeriods = 12_000

// history is what reports are made from.
type history struct {
	db      *store.Store
	site    string            // its name; may be empty
	zone    *time.Location    // of the site; nil where it is not known
	through func() int64      // event time as committed
	current []string          // loads that are accounted for now; others have been once
	units   map[string]string // SI unit of a tag's readings, where it is known
}

// report answers q, or gives up when ctx ends.
func (h *history) report(ctx context.Context, q answer.Query) (*answer.Report, error) {
	zone, err := placeOf(q.Zone, h.zone)
	if err != nil {
		return nil, err
	}
	plan, err := planOf(q, zone, h.through())
	if err != nil {
		return nil, err
	}
	ids, err := h.db.Names("load")
	if err != nil {
		return nil, err
	}
	chosen, err := choose(ids, q.Loads)
	if err != nil {
		return nil, err
	}
	at := func(ns int64) time.Time { return time.Unix(0, ns).In(zone) }
	r := &answer.Report{Site: h.site, Zone: zone.String(), By: plan.By.String(), From: at(plan.From), To: at(plan.To), Demand: plan.Demand.Seconds(), Factor: answer.CoverageFactor, Accounted: at(plan.Accounted())}
	if plan.From >= plan.Until() {
		return nil, noRecord(r, chosen)
	}
	if err := h.fill(ctx, r, q, plan, ids, chosen); err != nil {
		return nil, err
	}
	h.addEvents(r, plan)
	h.addSiteFiles(r, plan)
	return r, h.addRegisters(r, ids, plan)
}

// fill puts the chosen loads into the report.
func (h *history) fill(ctx context.Context, r *answer.Report, q answer.Query, plan account.Plan, ids map[string]uint32, chosen []string) error {
	periods := 0
	for _, name := range chosen {
		source := &records{db: h.db, load: ids[name], plan: plan, brief: q.Demand == 0}
		l, err := h.load(ctx, name, source, mostPeriods-periods)
		if err != nil {
			return err
		}
		r.Notes = append(r.Notes, l.notes...)
		r.Unused += l.unused
		if l.worthTelling(len(q.Loads) > 0 || slices.Contains(h.current, name)) {
			r.Loads = append(r.Loads, l.LoadReport)
			periods += len(l.Periods)
		}
	}
	if len(r.Loads) == 0 {
		return noRecord(r, chosen)
	}
	return nil
}

func noRecord(r *answer.Report, chosen []string) error {
	end := "to " + wallClock(r.To)
	if !r.To.After(r.From) { // no end was given, and the history has ended before
		end = "on"
	}
	return fmt.Errorf("%w of %s from %s %s; %s",
		answer.ErrNoRecord, strings.Join(chosen, ", "), wallClock(r.From), end, upTo(r.Accounted))
}

// upTo tells how far a history goes.
func upTo(t time.Time) string {
	if t.UnixNano() <= 0 {
		return "its time has not begun: no reading that tells it has been committed yet"
	}
	return "it goes up to " + wallClock(t)
}

func wallClock(t time.Time) string { return t.Format("2006-01-02 15:04 -07:00") }

// choose returns the wanted loads, or all, in the order in which they were first known.
func choose(ids map[string]uint32, wanted []string) ([]string, error) {
	known := inOrder(ids)
	if len(known) == 0 {
		return nil, errors.New("the history knows no load yet")
	}
	if len(wanted) == 0 {
		return known, nil
	}
	for _, name := range wanted {
		if _, ok := ids[name]; !ok {
			return nil, unknown("load", name, known)
		}
	}
	return slices.DeleteFunc(known, func(name string) bool { return !slices.Contains(wanted, name) }), nil
}

// inOrder returns the names in the order in which they were first known.
func inOrder(ids map[string]uint32) []string {
	return slices.SortedFunc(maps.Keys(ids), func(a, b string) int { return cmp.Compare(ids[a], ids[b]) })
}

// mostNames is how many known names an error lists.
const mostNames = 20

// unknown says that a name is not in the history, and what may have been meant.
func unknown(kind, name string, known []string) error {
	if guess := near.Names(name, known); len(guess) > 0 {
		return answer.Wrongf("%s %q is not in the history; did you mean %q?", kind, name, guess[0])
	}
	return answer.Wrongf("%s %q is not in the history; there are: %s", kind, name, listed(known))
}

// listed are names in a row, the first of many.
func listed(names []string) string {
	list := strings.Join(names[:min(len(names), mostNames)], ", ")
	if more := len(names) - mostNames; more > 0 {
		list += fmt.Sprintf(" and %d more", more)
	}
	return list
}

// loadAccount is a [LoadReport] in the making.
type loadAccount struct {
	answer.LoadReport
	begun  bool // the load has a record from before the end of the report
	notes  []string
	unused int // records that cannot be used
}

// worthTelling tells whether the load belongs in the report: one that has begun, and has
// something measured, unless it is missing by name.
func (l *loadAccount) worthTelling(byName bool) bool {
	return l.begun && (byName || l.Total.Measured > 0)
}

// load adds up the records of one load.
func (h *history) load(ctx context.Context, name string, source *records, most int) (l loadAccount, err error) {
	l.Load = name
	plan := source.plan
	if l.begun, err = anyBefore(h.db, source.load, plan.From); err != nil {
		return l, err
	}
	early := l.begun
	var total account.Total
	var faults []error
	for p, err := range account.Periods(plan, source.all(ctx)) {
		if err != nil {
			faults = append(faults, err)
			continue
		}
		if err := h.sharpen(ctx, &p.Demand, plan, source.load); err != nil {
			return l, err
		}
		total.Add(p)
		if l.begun = l.begun || p.Begun(); !l.begun {
			continue
		}
		if len(l.Periods) == most {
			return l, answer.Wrongf("by %s there are more than %d periods; ask for a shorter time, longer periods or fewer loads", plan.By, mostPeriods)
		}
		l.Periods = append(l.Periods, periodReport(&p, &plan))
	}
	if source.err != nil {
		return l, source.err
	}
	sum := total.Period()
	l.Total = periodReport(&sum, &plan)
	if begins := source.begins(); !early && l.begun && begins > plan.From {
		at := time.Unix(0, begins).In(plan.Zone)
		l.Begins = &at
	}
	l.note(source, faults)
	return l, nil
}

// sharpen finds the window of a peak that so far is known to the hour only, where the
// minutes of that hour are left and can be read.
func (h *history) sharpen(ctx context.Context, d *account.Demand, plan account.Plan, id uint32) error {
	if d.PeakEnd-d.PeakStart <= int64(plan.Demand) {
		return nil
	}
	plan.From, plan.To = d.PeakStart, d.PeakEnd
	source := &records{db: h.db, load: id, plan: plan, fine: true}
	for p, err := range account.Periods(plan, source.all(ctx)) {
		if fine := p.Demand; err == nil && source.whole == 0 && fine.PeakEnd > fine.PeakStart {
			d.Peak, d.PeakStart, d.PeakEnd, d.PeakCoverage = fine.Peak, fine.PeakStart, fine.PeakEnd, fine.PeakCoverage
		}
	}
	return source.err
}

// note adds what is remarkable about the records.
func (l *loadAccount) note(source *records, faults []error) {
	if l.unused = len(faults); l.unused > 0 {
		l.notes = append(l.notes, fmt.Sprintf("%s: %d records cannot be used and are missing; the first: %v", l.Load, len(faults), faults[0]))
	}
	if source.cut > 0 {
		l.notes = append(l.notes, l.cutNote(source))
	}
	if source.mute > 0 && source.plan.Demand != 0 {
		l.notes = append(l.notes, fmt.Sprintf("%s: of %d hours not all minutes are left; their heat counts, their demand is not known", l.Load, source.mute))
	}
}

// cutNote tells what hours were divided.
func (l *loadAccount) cutNote(source *records) string {
	by, zone := source.plan.By, source.plan.Zone
	text := fmt.Sprintf("%s: of %d hours by UTC that reach over the end of a local %s, or of the report, not all minutes are left; their heat is divided by time, which is an estimate", l.Load, source.cut, by)
	if by == account.Hour {
		text += fmt.Sprintf(": hours by the clock of %s are known only as long as there are minutes", zone)
	}
	return text
}

// addSiteFiles tells which site files were in force in the time of the report.
func (h *history) addSiteFiles(r *answer.Report, plan account.Plan) {
	all, err := h.db.Sites()
	if err != nil {
		r.Notes = append(r.Notes, fmt.Sprintf("which site files were in force is damaged in the history: %v", err))
	}
	for i, f := range all {
		if over := i+1 < len(all) && all[i+1].From <= plan.From; !over && f.From < plan.Until() {
			r.SiteFiles = append(r.SiteFiles, answer.SiteFile{From: time.Unix(0, f.From).In(plan.Zone), SHA256: hex.EncodeToString(f.Digest[:])})
		}
	}
}

// addRegisters puts the registers beside the sums where the report goes as far as the
// history.
func (h *history) addRegisters(r *answer.Report, ids map[string]uint32, plan account.Plan) error {
	if plan.To < plan.Accounted() {
		return nil
	}
	all, err := h.db.Registers()
	if err != nil {
		return err
	}
	for i := range r.Loads {
		for _, x := range all {
			if x.Load == ids[r.Loads[i].Load] {
				r.Loads[i].Register = registerOf(x)
			}
		}
	}
	return nil
}
