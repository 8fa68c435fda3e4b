package main

import (
	"context"
	"fmt"
	"io"
	"math"
	"strings"
	"time"

	"heatreeve/agent"
	"heatreeve/agent/loads"
	"heatreeve/agent/proving"
	"heatreeve/agent/site"
)

// checkHelp tells what a check of a live plant looks at.
const checkHelp = `With --live it listens to the broker of the site for a while as well, as one
more client that publishes nothing and leaves nothing behind, and tells tag by
tag what is heard, how often, the last value in the tag's unit and in SI, and
how its stamps lie against this machine's clock; and load by load a first duty
with its working, and what looks like a mistake: inlet and outlet swapped, a
flow in another unit, a gauge pressure taken for absolute, a meter in the other
pipe, a flow that does not read zero. A fault ends it with status 1; a note may
be as it should be.
`

// checkLive holds the site against its broker and tells what was found.
func (c *call) checkLive(ctx context.Context, s *site.Site, length time.Duration) error {
	var from []string
	for _, b := range s.AllBrokers() {
		from = append(from, b.URL)
	}
	fmt.Fprintf(c.stdout, "\n%s\n", wrapped(fmt.Sprintf("listening to %s for %v", strings.Join(from, ", "), length), "  "))
	r, err := agent.Prove(ctx, s, length, c.tellReadings(length))
	if err != nil {
		return err
	}
	if _, shown := terminal(c.stderr); shown {
		fmt.Fprint(c.stderr, "\r\x1b[K")
	}
	fmt.Fprint(c.stdout, "\n"+provenTags(s, r)+"\n")
	for i := range r.Loads {
		st := s.Loads[i].Stream
		provenLoad(c.stdout, &r.Loads[i], st != nil && st.Gives)
	}
	faults, all := r.Faults(), 0
	for i := range r.Tags {
		all += len(r.Tags[i].Findings)
	}
	for i := range r.Loads {
		all += len(r.Loads[i].Findings)
	}
	fmt.Fprintf(c.stdout, "\nfaults: %d, notes: %d\n%s\n", faults, all-faults, agent.Safety)
	if faults > 0 {
		return fmt.Errorf("%s does not stand the trial: faults: %d", c.operands[0], faults)
	}
	return nil
}

// tellReadings tells on a terminal how far a trial is.
func (c *call) tellReadings(length time.Duration) func(int) {
	if _, shown := terminal(c.stderr); !shown {
		return nil
	}
	begun, told := time.Now(), time.Time{}
	return func(readings int) {
		if now := time.Now(); now.Sub(told) >= time.Second {
			told = now
			fmt.Fprintf(c.stderr, "\rcheck: %v of %v, %d readings\x1b[K", min(now.Sub(begun), length).Round(time.Second), length, readings)
		}
	}
}

// provenTags has a line for each tag, and its findings below.
func provenTags(s *site.Site, r *proving.Result) string {
	t := newColumns(0)
	t.line("tag", "heard", "every", "value", "SI", "stamps behind")
	var findings []string
	for i := range r.Tags {
		tag := &r.Tags[i]
		name := legible(tag.Name)
		value, si, behind := "", "", ""
		if tag.Has {
			value, si = tag.Shown, fmt.Sprintf("%.6g %s", tag.Value, s.Tags[i].Unit.Dimension.SI())
			behind = "none"
		}
		if tag.Doubtful() {
			value += ", " + tag.Mark.Quality().String()
		}
		if tag.Stamped && tag.Live > 0 {
			behind = fmt.Sprintf("%.1f s ± %.1f s", tag.Behind, tag.Jitter)
		}
		pace := ""
		if tag.Has {
			pace = every(tag.Every, tag.Live == 0)
		}
		t.line(name, heardOf(tag), pace, value, si, behind)
		for _, f := range tag.Findings {
			findings = append(findings, wrapped(finding(f)+name+": "+legible(f.Text), "  "))
		}
	}
	text := t.String()
	for _, f := range findings {
		text += f + "\n"
	}
	return text
}

func heardOf(t *proving.Tag) string {
	if t.Kept > 0 {
		return fmt.Sprintf("%d + %d kept", t.Live, t.Kept)
	}
	return fmt.Sprint(t.Live)
}

func finding(f proving.Finding) string {
	if f.Level == proving.Fault {
		return "FAULT "
	}
	return "note: "
}

// provenLoad is a load's first duty, with its working, and the findings.
func provenLoad(w io.Writer, l *proving.Load, gives bool) {
	f := &l.Figure
	switch {
	case !f.Measured():
		fmt.Fprintf(w, "%s: no duty\n", l.Name)
	case f.Idle:
		fmt.Fprintf(w, "%s: idle\n", l.Name)
	default:
		places := meant(2 * f.Uncertainty / 1e3)
		fmt.Fprintf(w, "%s: %s ± %s kW%s\n", l.Name, decimals(f.Duty/1e3, places), decimals(2*f.Uncertainty/1e3, places), ofDesign(l))
		dutyWorking(w, l, gives)
	}
	for _, x := range l.Findings {
		fmt.Fprintln(w, indented(finding(x)+legible(x.Text), "  "))
	}
}

func ofDesign(l *proving.Load) string {
	if l.Design == 0 {
		return ""
	}
	return fmt.Sprintf(", design %s kW", figures(l.Design/1e3, 4))
}

// dutyWorking is the duty of a stream in a line.
func dutyWorking(w io.Writer, l *proving.Load, gives bool) {
	s := l.Basis.Stream
	if s == nil {
		return
	}
	from, less := s.Result.Outlet.Enthalpy/1e3, s.Result.Inlet.Enthalpy/1e3
	if gives {
		from, less = less, from
	}
	n := max(1, 3-int(math.Floor(math.Log10(math.Max(math.Abs(from-less), 1e-3)))))
	fmt.Fprintf(w, "  %s °C to %s °C; %s kg/s × (%s − %s) kJ/kg%s\n", celsius(l.Figure.Inlet), celsius(l.Figure.Outlet),
		figures(s.Result.MassFlow, 6), decimals(from, n), subtrahend(decimals(less, n)), corrected(s))
}

func corrected(s *loads.StreamBasis) string {
	if s.Correction == 0 {
		return ""
	}
	return fmt.Sprintf(", and %s kW by its corrections", figures(s.Correction/1e3, 4))
}
