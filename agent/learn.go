package agent

import (
	"context"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/design/expect"
	"heatreeve/agent/learning"
	"heatreeve/agent/site"
)

// Lesson says what is to be learned of a load, and from when.
type Lesson struct {
	Load     string
	Against  []string // one to three tags
	From, To string   // as of a [Selection]
	Zone     string
	By       time.Duration // of a sample; a part of an hour
	Habit    string        // which hours are told apart: none, day or week; empty for what the samples tell
	Straight bool          // the first tag has no limit
}

// Learned is a baseline, and an account of how it was fitted.
type Learned struct {
	Baseline    expect.Baseline
	Fit         expect.Fit
	Block       string // of the site file
	First, Last time.Time
}

// Learn fits a baseline to the records of a load in a history: a data folder, or a copy of
// its file. Where an agent runs on the folder, it is asked. Units and time zone are those of
// the site. What is wrong with the lesson is a [*QueryError].
func Learn(ctx context.Context, data string, s *site.Site, l Lesson) (*Learned, error) {
	load, tags, err := l.check(s)
	if err != nil {
		return nil, err
	}
	minutes, err := l.minutes(ctx, data, s.Loads[load].Vessel != nil)
	if err != nil {
		return nil, err
	}
	steps := make([]learning.Steps, len(tags))
	o := expect.Options{Span: int64(l.By), Habit: habits[l.Habit], Straight: l.Straight}
	for k, tag := range tags {
		o.Scales = append(o.Scales, scaleOf(s, tag))
		steps[k].Hold = int64(s.Tags[tag].Holds())
		if err := l.readings(ctx, data, s.Tags[tag].Name, minutes[0].Start-int64(day), &steps[k]); err != nil {
			return nil, err
		}
	}
	x := &Learned{}
	x.Baseline, x.Fit, err = expect.Learn(learning.Samples(minutes, steps, int64(l.By), s.Zone), o)
	if err != nil {
		return nil, fmt.Errorf("load %q: %w", l.Load, err)
	}
	x.First = time.Unix(0, minutes[0].Start).In(s.Zone)
	x.Last = time.Unix(0, minutes[len(minutes)-1].Start+minute).In(s.Zone)
	const at = "2006-01-02 15:04"
	x.Block = learning.Block(&x.Baseline, x.Fit.Habit, s, tags, fmt.Sprintf("%s to %s", x.First.Format(at), x.Last.Format(at)))
	return x, nil
}

const day = 24 * time.Hour

var habits = map[string]expect.Habit{"": expect.AnyHabit, "none": expect.NoHabit, "day": expect.DayHabit, "week": expect.WeekHabit}

// check finds the load and the tags in the site.
func (l *Lesson) check(s *site.Site) (load int, tags []int, err error) {
	if load, err = loadIn(s, l.Load); err != nil {
		return 0, nil, answer.Wrongf("load %q is not in the site file", l.Load)
	}
	if l.By < time.Minute || l.By > time.Hour || time.Hour%l.By != 0 || l.By%time.Minute != 0 {
		return 0, nil, answer.Wrongf("by %v: allowed are whole minutes that divide an hour, such as 10m and 1h", l.By)
	}
	if _, ok := habits[l.Habit]; !ok {
		return 0, nil, answer.Wrongf("habit %q: allowed are none, day, week", l.Habit)
	}
	if n := len(l.Against); n < 1 || n > 3 {
		return 0, nil, answer.Wrongf("against: one to three tags are wanted, %d are given", n)
	}
	for _, name := range l.Against {
		i := slices.IndexFunc(s.Tags, func(t site.Tag) bool { return t.Name == name })
		if i < 0 || s.Tags[i].Counter != nil {
			return 0, nil, answer.Wrongf("against: %q is no tag of the site file, or one that counts; what a duty is told by is a reading", name)
		}
		tags = append(tags, i)
	}
	return load, tags, nil
}

// minutes are those of the load. One of a stream that has no inlet, or of a vessel that serves
// nothing, is idle.
func (l *Lesson) minutes(ctx context.Context, data string, vessel bool) (all []learning.Minute, err error) {
	sel := Selection{Load: l.Load, From: l.From, To: l.To, Zone: l.Zone}
	err = eachRow(ctx, data, sel, []string{"start", "measured_s", "duty_W", "inlet_K"}, func(at int64, x []string) error {
		m := learning.Minute{Start: at}
		if x[1] == "" {
			return nil // nothing was measured
		}
		var errs [2]error
		m.Measured, errs[0] = strconv.ParseFloat(x[0], 64)
		m.Duty, errs[1] = strconv.ParseFloat(x[1], 64)
		m.Idle = x[2] == "" && !vessel || vessel && m.Duty == 0
		all = append(all, m)
		return errors.Join(errs[:]...)
	})
	if err == nil && len(all) == 0 {
		err = fmt.Errorf("%w with a measured minute of load %q in that time", answer.ErrNoRecord, l.Load)
	}
	return all, err
}

// readings are those of a tag from the instant from on, so that what the first sample holds is
// known.
func (l *Lesson) readings(ctx context.Context, data, tag string, from int64, steps *learning.Steps) error {
	sel := Selection{Tag: tag, From: time.Unix(0, from-from%minute).UTC().Format(time.RFC3339), To: l.To, Zone: l.Zone}
	return eachRow(ctx, data, sel, []string{"time", "", "quality"}, func(at int64, x []string) error {
		v, err := strconv.ParseFloat(x[0], 64)
		if err != nil || x[1] == "bad" {
			steps.Add(at, math.NaN())
			return nil
		}
		steps.Add(at, v)
		return nil
	})
}

// eachRow reads an export row by row: its instant, and the fields of the other columns that
// are named, of which "" is the one beside the time.
func eachRow(ctx context.Context, data string, sel Selection, columns []string, take func(at int64, x []string) error) error {
	r, w := io.Pipe()
	ended := make(chan struct{})
	go func() {
		defer close(ended)
		w.CloseWithError(Extract(ctx, data, sel, w, func(Progress) {}))
	}()
	err := takeRows(csv.NewReader(r), columns, take)
	r.CloseWithError(err)
	<-ended
	return err
}

func takeRows(r *csv.Reader, columns []string, take func(at int64, x []string) error) error {
	r.ReuseRecord = true
	names, err := r.Read()
	if err != nil {
		return err
	}
	var where []int
	for _, c := range columns {
		i := slices.Index(names, c)
		if c == "" {
			i = 1
		}
		if i < 0 || i >= len(names) {
			return fmt.Errorf("export has no column %q", c)
		}
		where = append(where, i)
	}
	x := make([]string, len(columns)-1)
	for {
		row, err := r.Read()
		switch {
		case err == io.EOF:
			return nil
		case err != nil:
			return err
		}
		t, err := time.Parse(time.RFC3339, row[where[0]])
		if err != nil {
			return fmt.Errorf("export: %w", err)
		}
		for k, i := range where[1:] {
			x[k] = row[i]
		}
		if err := take(t.UnixNano(), x); err != nil {
			return err
		}
	}
}

// Account tells how the fit is.
func (x *Learned) Account() string {
	f, b := &x.Fit, &x.Baseline
	var w strings.Builder
	fmt.Fprintf(&w, "samples: %d of %g min, %d used, %d without a value, %d far off and left out\n", f.Given, b.Span, f.Used, f.Unusable, f.Excluded)
	fmt.Fprintf(&w, "fit: R2 %.3f, residual %.4g kW (%.3g %% of the mean), correlation of successive residuals %.2f, hours told apart: %v", f.R2, f.Residual/1e3, 100*f.Relative, f.Lag, f.Habit)
	if f.Excluded > f.Given/10 {
		w.WriteString("\nnote: more than a tenth lies far off: the load may have run in two ways; look at it before relying on this")
	}
	for k := range b.Terms {
		t := &b.Terms[k]
		fmt.Fprintf(&w, "\ntag %q: learned from %s to %s", t.Tag, t.Show(t.Low), t.Show(t.High))
		switch t.Bend {
		case expect.Below:
			fmt.Fprintf(&w, ", counts below %s", t.Show(t.Limit))
		case expect.Above:
			fmt.Fprintf(&w, ", counts above %s", t.Show(t.Limit))
		}
	}
	return w.String()
}
