package agent

import (
	"context"
	"errors"
	"fmt"
	"io"
	"iter"
	"math"
	"slices"
	"strings"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/loads"
	"heatreeve/ingest/quality"
	"heatreeve/store"
)

// export is one in the making.
type export struct {
	db       *store.Store
	what     string // as in "reading of tag ..."
	id       uint32
	of       string // reading of a tag, or minute or hour of a load
	json     bool
	columns  []string
	from, to int64
	through  int64 // how far the history goes
	zone     *time.Location
	note     string // what is to know about all of it; may be empty

	rows    int64
	damaged int   // parts that cannot be read
	damage  error // the first of them
}

// minuteColumns are those of a load's minutes.
func minuteColumns() []string {
	columns := []string{
		"start", "measured_s", "missing_s", "given_J", "taken_J",
		"duty_W", "lowest_duty_W", "highest_duty_W", "duty_uncertainty_W",
		"mass_flow_kg_per_s", "inlet_K", "outlet_K", "pressure_Pa", "content_K",
		"bridged_s", "bridged_given_J", "bridged_taken_J", "latent_s", "uncertain_s", "witness_counted_J", "witness_served_J",
		"random_variance_J2",
	}
	return slices.Concat(columns, systematicColumns(), expectedColumns())
}

// expectedColumns are those of what was expected, with its standard uncertainty by what lasts.
func expectedColumns() []string { return []string{"expected_duty_W", "expected_duty_uncertainty_W"} }

const (
	readingTime = "2006-01-02T15:04:05.000000000Z"
	minuteTime  = "2006-01-02T15:04:05Z"
)

// valueColumn names the values of a tag by their SI unit.
func valueColumn(unit string) string {
	switch unit {
	case "", changedUnit:
		return "value_SI" // the history does not say, or it is not always the same
	case "1":
		return "value_ratio"
	}
	return "value_" + strings.ReplaceAll(unit, "/", "_per_")
}

// export finds what s asks for.
func (h *history) export(s Selection) (*export, error) {
	if err := s.check(); err != nil {
		return nil, err
	}
	if s.Format == parquetFormat {
		return nil, answer.Wrongf("format %q: the agent's page gives csv and json; heatreeve export makes parquet of it", s.Format)
	}
	x := &export{db: h.db, of: s.of(), json: s.Format == "json", through: h.through(), zone: time.UTC}
	if h.zone != nil {
		x.zone = h.zone
	}
	kind, name := "load", s.Load
	switch x.of {
	case ofReading:
		kind, name = "tag", s.Tag
		x.columns = []string{"time", valueColumn(h.units[name]), truthColumn, qualityColumn, reasonColumn}
		if h.units[name] == changedUnit {
			x.note = fmt.Sprintf("tag %q has not always measured the same: the unit of its values changed with the site file", name)
		}
	case ofMinute:
		x.columns = minuteColumns()
	case ofHour:
		x.columns = hourColumns()
	}
	x.what = fmt.Sprintf("%s of %s %q", x.of, kind, name)
	ids, err := h.db.Names(kind)
	if err != nil {
		return nil, err
	}
	var ok bool
	if x.id, ok = ids[name]; !ok {
		return nil, unknown(kind, name, inOrder(ids))
	}
	x.from, x.to, err = s.span(h.zone)
	return x, err
}

// until is the end of what there can be to export.
func (x *export) until() time.Time { return time.Unix(0, min(x.to, x.through)).UTC() }

// write writes all rows to w, or as many as there are until ctx ends. What cannot be read
// is passed over, and counted.
func (x *export) write(ctx context.Context, w io.Writer) error {
	r := newRows(w, x.json, x.columns)
	var err error
	switch x.of {
	case ofReading:
		err = each(ctx, x, r, x.db.Readings(x.id, x.from, x.to), readingRow)
	case ofMinute:
		err = each(ctx, x, r, x.db.Minutes(x.id, x.from, x.to), minuteRow)
	case ofHour:
		err = each(ctx, x, r, x.db.Hours(x.id, x.from, x.to), hourRow)
	}
	err = errors.Join(err, r.flush())
	switch x.rows = r.count; {
	case err != nil:
		return err
	case x.rows == 0 && x.damaged == 0:
		return x.nothing()
	}
	return nil
}

// nothing says that there is no row.
func (x *export) nothing() error {
	at := func(ns int64) string { return wallClock(time.Unix(0, ns).In(x.zone)) }
	err := fmt.Errorf("%w: no %s", answer.ErrNoRecord, x.what)
	if x.from != math.MinInt64 {
		err = fmt.Errorf("%w from %s", err, at(x.from))
	}
	if x.to != math.MaxInt64 {
		err = fmt.Errorf("%w to %s", err, at(x.to))
	}
	return fmt.Errorf("%w; %s", err, upTo(time.Unix(0, x.through).In(x.zone)))
}

// whole is an error where not all could be read.
func (x *export) whole() error {
	if x.damaged == 0 {
		return nil
	}
	return fmt.Errorf("%d parts of the history cannot be read and are not in the export; the first: %w", x.damaged, x.damage)
}

// rowsALook is how many rows go out before ctx is looked at again.
const rowsALook = 256

func each[T any](ctx context.Context, x *export, r *rows, all iter.Seq2[T, error], add func(*rows, *T)) error {
	for v, err := range all {
		switch {
		case errors.Is(err, store.ErrDamaged):
			if x.damaged++; x.damage == nil {
				x.damage = err
			}
			continue
		case err != nil:
			return err
		}
		add(r, &v)
		if err := r.end(); err != nil {
			return err
		}
		if r.count%rowsALook == 1 && ctx.Err() != nil {
			return ctx.Err()
		}
	}
	return ctx.Err()
}

func readingRow(r *rows, v *store.Reading) {
	r.instant(v.At, readingTime)
	r.number(v.Value)
	r.truth(v.Stamped)
	mark := quality.Mark(v.Mark)
	r.word(mark.Quality().String())
	if mark == quality.None {
		r.none()
	} else {
		r.word(mark.String())
	}
}

// minuteRow leaves out the means of a minute in which nothing was measured, and
// temperatures and pressures that there are none of.
func minuteRow(r *rows, m *store.Minute) {
	r.instant(m.Start, minuteTime)
	for _, x := range [...]float64{m.Measured, m.Missing, m.Given, m.Taken} {
		r.number(x)
	}
	for _, x := range [...]float64{m.Duty, m.DutyMin, m.DutyMax, m.DutyUncertainty, m.Flow} {
		r.meanIf(m.Measured > 0, x)
	}
	for _, x := range [...]float64{m.Inlet, m.Outlet, m.Pressure, m.Content} {
		r.meanIf(m.Measured > 0 && x != 0, x)
	}
	for _, x := range [...]float64{m.Bridged, m.BridgedGiven, m.BridgedTaken, m.Latent, m.Uncertain, m.Witness, m.Compared, m.Random} {
		r.number(x)
	}
	for _, x := range m.Systematic[:loads.Parts] {
		r.number(x)
	}
	expectedRow(r, m.Expected, m.ExpectedError)
}

// expectedRow leaves out what there is none of.
func expectedRow(r *rows, duty, lasting float64) {
	expects := duty != 0 || lasting != 0
	r.meanIf(expects, duty)
	r.meanIf(expects, lasting)
}
