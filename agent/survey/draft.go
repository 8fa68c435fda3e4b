package survey

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"
	"time"

	"heatreeve/agent/site"
)

// Blank stands in a draft where only an engineer knows; no site file that still has one
// passes a check.
const Blank = site.Blank

// Draft is what a draft of a site file is made from.
type Draft struct {
	Broker site.Broker
	Site   string // name of the plant; "": to be filled in
	Topics []Topic
	At     time.Time
	For    time.Duration // how long was listened
}

// Write writes the draft: the tags that are understood, those that are not as remarks, and
// the loads that names suggest. What an engineer must fill in is [Blank], and what was
// guessed says why in a remark. The error is that of w.
func (d Draft) Write(w io.Writer) error {
	b := bufio.NewWriter(w)
	d.head(b)
	fmt.Fprint(b, "tags:\n")
	d.tags(b)
	d.loads(b)
	return b.Flush()
}

func (d Draft) head(w io.Writer) {
	name := d.Site
	if name == "" {
		name = Blank
	}
	fmt.Fprintf(w, `# A draft, from what %s carried in %v before %s.
# Fill in each %s, check what is said to be guessed, and take out what you do not need;
# then: heatreeve check FILE
#
# Heatreeve informs; it is no safety function, no alarm of record and no billing meter.
# Site codes, the plant's own protection and licensed people come first.

site: %s
timezone: %s # such as Europe/Dublin
barometer: 101.325 kPa # guessed: that of sea level; at the plant, not reduced

broker: {%s}

`, oneLine(d.Broker.URL), d.For, d.At.UTC().Format("2006-01-02 15:04 UTC"), Blank, quoted(name), Blank, brokerKeys(d.Broker))
}

// brokerKeys are those that led to the broker.
func brokerKeys(b site.Broker) string {
	keys := []string{"url: " + quoted(b.URL)}
	for _, k := range [...][2]string{
		{"username", b.Username}, {"password_file", b.PasswordFile}, {"password_env", b.PasswordEnv},
		{"ca", b.CAFile}, {"certificate", b.CertFile}, {"key", b.KeyFile}, {"server_name", b.ServerName},
	} {
		if k[1] != "" {
			keys = append(keys, k[0]+": "+quoted(k[1]))
		}
	}
	return strings.Join(keys, ", ")
}

func (d Draft) tags(w io.Writer) {
	var states, rest []*Signal
	for i := range d.Topics {
		t := &d.Topics[i]
		for k := range t.Signals {
			switch s := &t.Signals[k]; {
			case s.Truth:
				states = append(states, s)
			case s.Guess.dimension == 0:
				rest = append(rest, s)
			default:
				fmt.Fprintf(w, "  %s: %s%s\n", quoted(s.Tag), s.keys(), remark(s))
			}
		}
	}
	out(w, "States, true or false, for running or bypass of a load; no other tag reads them:", states)
	out(w, "Nothing tells what these are:", rest)
	for _, hurdle := range Hurdles(d.Topics) {
		fmt.Fprintf(w, "  # Not read: %s\n", oneLine(hurdle))
	}
}

// out writes tags as remarks.
func out(w io.Writer, why string, all []*Signal) {
	if len(all) > 0 {
		fmt.Fprintf(w, "\n  # %s\n", why)
	}
	for _, s := range all {
		fmt.Fprintf(w, "  # %s: %s%s\n", quoted(s.Tag), s.keys(), remark(s))
	}
}

// keys is the declaration of a tag.
func (s *Signal) keys() string {
	keys := []string{"topic: " + quoted(s.Topic)}
	if s.Metric != "" {
		keys = []string{"sparkplug: " + quoted(s.Topic), "metric: " + quoted(s.Metric)}
	}
	add := func(key, value string) {
		if value != "" {
			keys = append(keys, key+": "+value)
		}
	}
	u := s.Guess.Unit
	if u == "" {
		u = Blank
	}
	add("unit", quoted(u))
	add("samples", pointer(s.Samples))
	add("value", pointer(s.Value))
	add("time", pointer(s.Time))
	if s.Truth {
		add("accuracy", "± 1 %") // a state is what it is; the key is asked for
	} else {
		add("accuracy", Blank)
	}
	if s.Guess.Counts {
		add("counts", "{}")
	} else if s.Metric == "" { // by Sparkplug the source's life tells
		add("max_age", maxAge(s.Gap, s.Clock))
	} else {
		add("reports", "on change")
	}
	return "{" + strings.Join(keys, ", ") + "}"
}

func pointer(p string) string {
	if p == "" {
		return ""
	}
	return quoted(p)
}

// ages are those that a draft gives.
var ages = []time.Duration{10 * time.Second, 30 * time.Second, time.Minute, 2 * time.Minute, 5 * time.Minute, 10 * time.Minute, 30 * time.Minute, time.Hour}

// mostBehind is how far behind stamps may lie, s, for a draft to allow for it: by more a clock
// is wrong, and is to be set.
const mostBehind = 60

// maxAge allows for two messages that do not come, and for stamps that lie behind; "" where
// the default of a minute does, or too few came to tell.
func maxAge(gap float64, c *Clock) string {
	want := time.Duration(3 * gap * float64(time.Second))
	if c != nil && want > 0 && c.Behind > 0 && c.Behind <= mostBehind {
		want += time.Duration((c.Behind + c.Jitter) * float64(time.Second))
	}
	if want <= 0 {
		return ""
	}
	for _, age := range ages {
		if want <= age {
			if age == time.Minute {
				return ""
			}
			return words(age)
		}
	}
	return ""
}

func words(d time.Duration) string {
	switch {
	case d%time.Hour == 0:
		return strconv.Itoa(int(d/time.Hour)) + " h"
	case d%time.Minute == 0:
		return strconv.Itoa(int(d/time.Minute)) + " min"
	}
	return strconv.Itoa(int(d/time.Second)) + " s"
}

// remark tells what was seen, and on what grounds the unit stands there.
func remark(s *Signal) string {
	said := number(s.Min)
	if s.Max != s.Min {
		said += " to " + number(s.Max)
	}
	g := s.Guess
	switch {
	case s.Truth:
		said = States(s)
	case g.Unit == "" && g.Quantity != "":
		said += "; " + g.Quantity + ", unit to fill in: " + g.Why
	case g.Unit == "":
		if g.Why != "" {
			said += "; " + g.Why
		}
	case g.Sure:
		said += "; " + g.Why
	default:
		said += "; guessed: " + g.Why
	}
	if s.Clock != nil && math.Abs(s.Clock.Behind) > 5 {
		said += "; stamps " + Lag(s.Clock)
	}
	if s.Kept {
		said += "; only of a message that the broker had kept: nothing tells whether it is still sent"
	}
	return " # " + oneLine(said)
}

// States tells which of true and false came.
func States(s *Signal) string {
	switch {
	case s.Min != s.Max:
		return "false and true"
	case s.Min == 1:
		return "true"
	}
	return "false"
}

// Lag tells how stamps lie.
func Lag(c *Clock) string {
	side, behind := "behind", c.Behind
	if behind < 0 {
		side, behind = "ahead", -behind
	}
	digits := func(s float64) string {
		return time.Duration(s * float64(time.Second)).Round(10 * time.Millisecond).String()
	}
	said := fmt.Sprintf("%s %s ± %s", digits(behind), side, digits(c.Jitter))
	if quarters := math.Round(behind / 900); quarters >= 1 && behind < 15*3600 && math.Abs(behind-900*quarters) < 30 && c.Jitter < 30 {
		said += ", as of another time zone"
	}
	return said
}

func (d Draft) loads(w io.Writer) {
	found, doubts := Loads(d.Topics)
	fmt.Fprint(w, "\nloads:\n")
	for _, l := range found {
		keys := []string{"fluid: " + Blank, "flow: " + quoted(l.Flow), "inlet: " + quoted(l.Inlet), "outlet: " + quoted(l.Outlet)}
		pressure := Blank
		if l.Pressure != "" {
			pressure = quoted(l.Pressure)
		}
		keys = append(keys, "pressure: "+pressure)
		if l.ByVolume {
			keys = append(keys, "meter_at: "+Blank)
		}
		way := "takes: heat"
		if l.Gives {
			way = "gives: heat"
		}
		fmt.Fprintf(w, "  # inlet and outlet %s\n  %s:\n    stream: {%s, %s}\n", oneLine(l.Why), quoted(l.Name), strings.Join(keys, ", "), way)
		if l.Witness != "" {
			fmt.Fprintf(w, "    witness: %s # its own count of the heat, shown beside ours\n", quoted(l.Witness))
		}
	}
	if len(found) == 0 {
		fmt.Fprintf(w, "  # No two temperatures and a flow have names that belong together.\n  %s:\n    stream: {fluid: %[1]s, flow: %[1]s, inlet: %[1]s, outlet: %[1]s, pressure: %[1]s, gives: heat}\n", Blank)
	}
	for _, doubt := range doubts {
		fmt.Fprintf(w, "  # %s\n", oneLine(doubt))
	}
}

// quoted writes text as a scalar of YAML 1.2: plain where nothing in it can be taken for
// anything else, in double quotes otherwise.
func quoted(text string) string {
	odd := func(r rune) bool {
		return !(r == '/' || r == '-' || r == '_' || r == '.' || r == '°' || r == '%' || r >= '0' && r <= '9' || r >= 'a' && r <= 'z' || r >= 'A' && r <= 'Z')
	}
	switch {
	case text == Blank:
		return text
	case text == "" || strings.ContainsFunc(text, odd), strings.ContainsAny(text[:1], "-.%0123456789"), isWord(text):
		return strconv.Quote(text)
	}
	return text
}

// isWord tells whether a plain scalar would be no text.
func isWord(text string) bool {
	switch strings.ToLower(text) {
	case "true", "false", "null", "yes", "no", "on", "off", "y", "n":
		return true
	}
	return false
}

// oneLine leaves out what would end a remark.
func oneLine(text string) string {
	return strings.Map(func(r rune) rune {
		if r < ' ' || r == 0x7f || r == 0x85 || r == 0x2028 || r == 0x2029 {
			return ' '
		}
		return r
	}, text)
}
