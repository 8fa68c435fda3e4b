package main

import (
	"context"
	"fmt"
	"os"
	"strings"
	"time"

	"heatreeve/agent/site"
)

func runCheck(ctx context.Context, c *call) error {
	live := c.flags.Bool("live", false, "hold the site against its broker as well")
	length := c.flags.Duration("for", time.Minute, "listen for `DURATION`, such as 60s or 10m; with --live")
	if err := c.parse(1, "the site file"); err != nil {
		return err
	}
	switch {
	case !*live && len(c.given("live")) > 0:
		return wrongf("heatreeve check: --for is for --live")
	case *length < time.Second || *length > longestListening:
		return wrongf("heatreeve check: --for %s: allowed are 1s to %s", *length, longestListening)
	}
	s, err := load(c.operands[0])
	if err != nil {
		return err
	}
	fmt.Fprintf(c.stdout, "%s: good: %q, tags: %d, loads: %d\n", c.operands[0], s.Name, s.Declared(), len(s.Loads))
	for i := range s.Loads {
		fmt.Fprintln(c.stdout, set("  ", "      ", fields(described(s, &s.Loads[i]))))
	}
	for i, t := range s.Tags[s.Declared():] {
		fmt.Fprintln(c.stdout, set("  ", "      ", fields(fmt.Sprintf("%s: tells whether %s alive", t.Name, told(s, s.Declared()+i)))))
	}
	for _, note := range notes(s) {
		fmt.Fprintln(c.stdout, wrapped("note: "+note, "  "))
	}
	if *live {
		return c.checkLive(ctx, s, *length)
	}
	return nil
}

// described is a load in a line: what it is of, and what else it has.
func described(s *site.Site, l *site.HeatLoad) string {
	name, f := l.Fluid()
	is := name
	if l.Vessel != nil {
		is = "vessel of " + name
	}
	say := fmt.Sprintf("%s: %s, %s", l.Name, is, f.Source())
	if l.HasWitness {
		say += "; compared with " + s.Tags[l.Witness.Tag].Name
	}
	return say
}

// told names the tags whose source the tag i tells of.
func told(s *site.Site, i int) string {
	var all []string
	for _, t := range s.Tags {
		if t.OnChange && t.Alive == i {
			all = append(all, t.Name)
		}
	}
	if len(all) == 1 {
		return "the source of " + all[0] + " is"
	}
	return "the sources of " + strings.Join(all, ", ") + " are"
}

// load reads a site file; whatever is wrong with it is wrong usage, not failure.
func load(path string) (*site.Site, error) {
	s, err := site.Load(path)
	if err != nil {
		return nil, usageError{err}
	}
	return s, nil
}

// notes are what is no fault of the file, but may be one on the machine that the
// agent will run on, or an oversight.
func notes(s *site.Site) []string {
	var all []string
	for _, b := range s.AllBrokers() {
		all = append(all, notesOfBroker(&b)...)
	}
	all = append(append(all, idleTags(s)...), unstamped(s)...)
	return append(append(append(all, outlasting(s)...), boundless(s)...), uncorrected(s)...)
}

func notesOfBroker(b *site.Broker) []string {
	var all []string
	for _, f := range [...]struct{ key, path string }{
		{"ca", b.CAFile}, {"certificate", b.CertFile}, {"key", b.KeyFile}, {"password_file", b.PasswordFile},
	} {
		if f.path == "" {
			continue
		}
		if _, err := os.Stat(f.path); err != nil {
			all = append(all, fmt.Sprintf("%s.%s: %v; the agent needs it where it runs", b.Called(), f.key, err))
		}
	}
	if env := b.PasswordEnv; env != "" && os.Getenv(env) == "" {
		all = append(all, fmt.Sprintf("%s.password_env: %s is not set here; the agent needs it where it runs", b.Called(), env))
	}
	return all
}

// usualLists is how long the list of samples in a message is taken to be, at least.
const usualLists = 10 * time.Second

// outlasting are the tags whose samples wait longer at their source than event time does
// for them.
func outlasting(s *site.Site) []string {
	if s.Timing.Lateness >= usualLists {
		return nil
	}
	var names []string
	for _, t := range s.Tags {
		if t.Samples != nil {
			names = append(names, t.Name)
		}
	}
	if names == nil {
		return nil
	}
	return []string{fmt.Sprintf("tags.%s: %s in lists of samples, and timing.lateness is %v; what a list has of the time before that, where other tags are heard meanwhile, is late. Let it be longer than the time that a list spans",
		strings.Join(names, ", "), one(names, "comes", "come"), s.Timing.Lateness)}
}

func one(names []string, is, are string) string {
	if len(names) == 1 {
		return is
	}
	return are
}

// boundless are the counters of a flow of which no rise is too great to be believed.
func boundless(s *site.Site) []string {
	var names []string
	flows := make([]bool, len(s.Tags))
	for i := range s.Loads {
		if x := s.Loads[i].Stream; x != nil && !x.Flow.Constant() {
			flows[x.Flow.Tag] = true
		}
	}
	for i, t := range s.Tags {
		if t.Counter != nil && t.Counter.Largest <= 0 && flows[i] {
			names = append(names, t.Name)
		}
	}
	if names == nil {
		return nil
	}
	return []string{fmt.Sprintf("tags.%s: %s without the largest flow that can be; where the register jumps, such as after its exchange, that is booked as if it had passed. Let counts tell it, such as largest: 40 m3/h",
		strings.Join(names, ", "), one(names, "counts", "count"))}
}

// uncorrected are the loads whose flow is a root of a pressure, and whose density nobody
// corrects unless the transmitter does.
func uncorrected(s *site.Site) []string {
	var all []string
	for i := range s.Loads {
		x := s.Loads[i].Stream
		if x == nil || x.Flow.Constant() || x.CalibratedAt > 0 {
			continue
		}
		if t := &s.Tags[x.Flow.Tag]; t.Signal != nil && t.Signal.Root {
			all = append(all, fmt.Sprintf("loads.%s: %s is the root of a pressure, and without calibrated_at its flow is taken to be corrected for density at its source. If it is not, tell the density that the meter was reckoned for", s.Loads[i].Name, t.Name))
		}
	}
	return all
}

// unstamped are the tags that report on change whose time nobody knows once a message has
// waited at the broker. Those by Sparkplug have the time of their metric.
func unstamped(s *site.Site) []string {
	var all []string
	for _, t := range s.Tags {
		if t.OnChange && t.Time == "" && t.Metric == nil {
			all = append(all, fmt.Sprintf("tags.%s: reports on change without a time of its own; what the broker has kept of it is refused, so after a start nothing is known until it changes", t.Name))
		}
	}
	for _, t := range s.Tags {
		if t.Counter != nil && t.Counter.Each && t.Time == "" {
			all = append(all, fmt.Sprintf("tags.%s: counts since its last message, without a time of its own; what the broker delivers a second time, as it may after an outage, is counted a second time. Give the message a stamp, and the tag its time", t.Name))
		}
	}
	for i, t := range s.Tags {
		if l := t.Liveness; l != nil && !l.Kept && t.Time == "" && t.Metric == nil {
			all = append(all, fmt.Sprintf("%s: has no time of its own; after an outage of the broker or the agent %s taken to have been dead meanwhile", t.Name, told(s, i)))
		}
	}
	return all
}

// idleTags are the tags that no load reads.
func idleTags(s *site.Site) []string {
	used := make([]bool, len(s.Tags))
	for i := range s.Loads {
		for _, src := range s.Loads[i].Sources() {
			if !src.Constant() {
				used[src.Tag] = true
			}
		}
	}
	for i, t := range s.Tags {
		if t.HasBeside && used[i] {
			used[t.Beside] = true // it is the test of one that is read
		}
	}
	var all []string
	for i, t := range s.Tags[:s.Declared()] {
		if !used[i] {
			all = append(all, fmt.Sprintf("tags.%s: no load reads it; its readings are only stored", t.Name))
		}
	}
	return all
}
