package agent

import (
	"context"
	"errors"
	"fmt"
	"slices"
	"time"

	"heatreeve/agent/account"
	"heatreeve/agent/answer"
	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/agent/working"
	"heatreeve/store"
	"heatreeve/thermo/unit/near"
)

// instant is what q asks for: the beginning of an interval of the grid. The newest is the
// last that is accounted for.
func (h *history) instant(q answer.Explanation) (at int64, err error) {
	through := h.through()
	if through <= 0 {
		return 0, fmt.Errorf("%w yet; ask again once the first readings are committed", answer.ErrNoRecord)
	}
	if q.At == "" {
		return through - 1, nil
	}
	zone, err := placeOf(q.Zone, h.zone)
	if err != nil {
		return 0, err
	}
	if at, err = account.Moment(q.At, zone); err != nil {
		return 0, answer.Wrongf("at %v", err)
	}
	if at >= through {
		return 0, answer.Wrongf("at %s: the history goes up to %s", q.At, exactly(time.Unix(0, through).In(zone)))
	}
	return at, nil
}

func exactly(t time.Time) string { return t.Format("2006-01-02 15:04:05 -07:00") }

// explain answers q from what is stored.
func (h *history) explain(ctx context.Context, q answer.Explanation) (*working.Working, error) {
	at, err := h.instant(q)
	if err != nil {
		return nil, err
	}
	s, note, err := h.siteAt(at)
	if err != nil {
		return nil, err
	}
	load, err := loadIn(s, q.Load)
	if err != nil {
		return nil, err
	}
	g := at - at%int64(s.Timing.Grid)
	if q.At == "" && g+int64(s.Timing.Grid) > h.through() {
		g -= int64(s.Timing.Grid)
	}
	r := newReplay(h.db, s, load)
	if err := r.collect(g); err != nil {
		return nil, err
	}
	x, err := r.run(ctx, g)
	if err != nil {
		return nil, err
	}
	minute, found, err := h.minuteOf(q.Load, g)
	if err != nil {
		return nil, err
	}
	if !found && len(r.readings) == 0 {
		return nil, h.nothing(q.Load, g, s)
	}
	measured := x.Basis.Figure.Measured()
	if found && !measured && (len(r.readings) == 0 || minute.Measured == 60) {
		w := working.OfRecord(working.Record{Site: s.Name, Load: q.Load, Zone: s.Zone, Minute: loadsMinute(&minute)})
		w.Notes = append(w.Notes, note...)
		return w, nil
	}
	x.Notes = append(append(x.Notes, note...), h.beside(q.Load, &x, minute, found)...)
	return working.Of(x), nil
}

// siteAt is the site file that was in force, with a note where it is not known for sure.
func (h *history) siteAt(at int64) (s *site.Site, notes []string, err error) {
	all, err := h.db.Sites()
	if len(all) == 0 {
		return nil, nil, errors.Join(errors.New("the history has no site file, which tells what its readings are of; start the agent once on it, which keeps it there"), err)
	}
	if err != nil {
		notes = append(notes, fmt.Sprintf("which site files were in force is damaged in the history: %v", err))
	}
	i := slices.IndexFunc(all, func(f store.SiteFile) bool { return f.From > at }) - 1
	switch {
	case i == -2:
		i = len(all) - 1
	case i == -1:
		i = 0
		notes = append(notes, fmt.Sprintf("which site file was in force then is not known: this is by the one that is since %s", exactly(time.Unix(0, all[0].From).UTC())))
	}
	text, err := h.db.SiteText(all[i].Digest)
	if err != nil {
		return nil, nil, err
	}
	s, err = site.Parse("site file "+shortDigest(all[i].Digest), text)
	if err != nil {
		return nil, nil, fmt.Errorf("the site file that the history keeps is not one for this version: %w", err)
	}
	return s, notes, nil
}

// loadIn finds a load of a site.
func loadIn(s *site.Site, name string) (int, error) {
	all := names(s.Loads, func(l site.HeatLoad) string { return l.Name })
	i := slices.Index(all, name)
	if i >= 0 {
		return i, nil
	}
	if guess := near.Names(name, all); len(guess) > 0 {
		return 0, answer.Wrongf("load %q is not in the site file of then; did you mean %q?", name, guess[0])
	}
	return 0, answer.Wrongf("load %q is not in the site file of then; there are: %s", name, listed(all))
}

// minuteOf reads the record of the minute that g lies in.
func (h *history) minuteOf(load string, g int64) (m store.Minute, found bool, err error) {
	ids, err := h.db.Names("load")
	if err != nil {
		return m, false, err
	}
	id, ok := ids[load]
	if !ok {
		return m, false, nil
	}
	start := g - g%int64(time.Minute)
	for x, err := range h.db.Minutes(id, start, start+1) {
		if err != nil {
			return m, false, err
		}
		return x, true, nil
	}
	return m, false, nil
}

// nothing says that neither readings nor a record are left.
func (h *history) nothing(load string, g int64, s *site.Site) error {
	err := fmt.Errorf("%w of load %q at %s, nor readings of its tags before", answer.ErrNoRecord, load, exactly(time.Unix(0, g).In(s.Zone)))
	ids, bad := h.db.Names("load")
	if bad != nil {
		return errors.Join(err, bad)
	}
	hour := g - g%int64(time.Hour)
	for range h.db.Minutes(ids[load], hour, hour+int64(time.Hour)) {
		return err // of that hour there are others
	}
	for x, bad := range h.db.Hours(ids[load], hour, hour+1) {
		if bad == nil && x.Measured > 0 {
			return fmt.Errorf("%w; of that hour only the sums are left: heatreeve report --by hour tells them", err)
		}
	}
	return err
}

// beside tells what the record of the minute adds, or how it differs.
func (h *history) beside(load string, x *working.Subject, m store.Minute, found bool) (notes []string) {
	f := &x.Basis.Figure
	if found && m.Bridged > 0 {
		notes = append(notes, fmt.Sprintf("%g s of this minute are bridged in the accounts, by a straight line between the duties before and after", m.Bridged))
	}
	const rounding = 1e-6 // of a float32
	if slack := rounding * (abs(m.DutyMin) + abs(m.DutyMax)); found && f.Measured() && !x.Basis.Count.Counted && (f.Duty < m.DutyMin-slack || f.Duty > m.DutyMax+slack) {
		notes = append(notes, fmt.Sprintf("the record of this minute has duties of %.6g kW to %.6g kW: it was worked from other readings, or by other rules", m.DutyMin/1e3, m.DutyMax/1e3))
	}
	if !f.Measured() {
		if last, ok := h.lastMeasured(load, f.At); ok {
			notes = append(notes, fmt.Sprintf("the last minute with a duty began at %s, with a mean of %.6g kW", exactly(time.Unix(0, last.Start).In(x.Site.Zone)), last.Duty/1e3))
		}
	}
	return notes
}

func abs(x float64) float64 { return max(x, -x) }

// lastMeasured finds the last minute before at in which a load had a duty, a month back at
// most.
func (h *history) lastMeasured(load string, at int64) (last store.Minute, ok bool) {
	ids, err := h.db.Names("load")
	if err != nil {
		return last, false
	}
	id, known := ids[load]
	if !known {
		return last, false
	}
	for _, span := range replaySpans {
		for m, err := range h.db.Minutes(id, at-span, at) {
			if err == nil && m.Measured > 0 {
				last, ok = m, true
			}
		}
		if ok {
			return last, true
		}
	}
	return last, false
}

// loadsMinute is a stored minute as the engine has it.
func loadsMinute(m *store.Minute) loads.Minute {
	x := loads.Minute{
		Start: m.Start, Measured: nanoseconds(m.Measured), Bridged: nanoseconds(m.Bridged), Missing: nanoseconds(m.Missing), Uncertain: nanoseconds(m.Uncertain),
		Given: m.Given, Taken: m.Taken, Duty: m.Duty, DutyMin: m.DutyMin, DutyMax: m.DutyMax, Uncertainty: m.DutyUncertainty,
		Random: m.Random, MassFlow: m.Flow, Inlet: m.Inlet, Outlet: m.Outlet, Pressure: m.Pressure, Content: m.Content,
	}
	copy(x.Systematic[:], m.Systematic[:])
	return x
}
