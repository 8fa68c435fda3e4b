package main

import (
	"fmt"
	"io"
	"strconv"
	"strings"
	"time"

	"heatreeve/agent"
	"heatreeve/agent/survey"
)

// surveyed is a survey as --format json prints it.
type surveyed struct {
	Broker   string         `json:"broker"`
	Seconds  float64        `json:"listened_s"`
	Messages uint64         `json:"messages"`
	Beyond   uint64         `json:"messages_of_topics_not_looked_into"`
	Topics   []survey.Topic `json:"topics"`
}

func surveyJSON(s *survey.Survey, d survey.Draft) surveyed {
	p := s.Progress()
	return surveyed{d.Broker.URL, d.For.Seconds(), p.Messages, p.Beyond, d.Topics}
}

const surveyLegend = `at: JSON Pointer of the value; a bare number has none. ?: guessed. …: left out.
stamps: of the payload, against this machine's clock at arrival.
`

// surveyTable has a line for each number, and for each topic that carries none.
func surveyTable(w io.Writer, s *survey.Survey, d survey.Draft) error {
	p := s.Progress()
	fmt.Fprintf(w, "%s, %v: %d topics, %d messages\n\n", d.Broker.URL, d.For, p.Topics, p.Messages)
	t := newColumns(0)
	t.line("topic", "at", "every", "values", "likely", "stamps")
	for i := range d.Topics {
		topicLines(t, &d.Topics[i])
	}
	fmt.Fprint(w, t.String())
	if p.Beyond > 0 {
		fmt.Fprintf(w, "%d messages came on more topics than were looked into; give --filter, or --most.\n", p.Beyond)
	}
	if p.Unnamed > 0 {
		fmt.Fprintln(w, wrapped(fmt.Sprintf("note: %d times a Sparkplug metric came under an alias alone that no birth had told until then, and is left out. A node tells at its birth: where metrics are missing, let it be born again while a survey listens.", p.Unnamed), "  "))
	}
	if p.Malformed > 0 {
		fmt.Fprintf(w, "note: %d messages of the Sparkplug namespace could not be read.\n", p.Malformed)
	}
	for _, hurdle := range survey.Hurdles(d.Topics) {
		fmt.Fprintln(w, wrapped("note: "+legible(hurdle), "  "))
	}
	found, doubts := survey.Loads(d.Topics)
	if len(found) > 0 {
		fmt.Fprint(w, "\nLoads that names suggest:\n")
	}
	for _, l := range found {
		say := fmt.Sprintf("%s: flow %s, inlet %s, outlet %s", l.Name, l.Flow, l.Inlet, l.Outlet)
		if l.Witness != "" {
			say += ", witness " + l.Witness
		}
		fmt.Fprintln(w, indented(say, "  "))
	}
	for _, doubt := range doubts {
		fmt.Fprintln(w, wrapped("note: "+legible(doubt), "  "))
	}
	_, err := fmt.Fprintf(w, "\n%s%s\n", surveyLegend, agent.Safety)
	return err
}

func topicLines(t *columns, topic *survey.Topic) {
	name := middleOut(legible(topic.Name), 60)
	if len(topic.Signals) == 0 {
		t.line(name, "", every(topic.Every, topic.Retained == topic.Messages), middleOut(strings.TrimSpace(string(topic.Shape)+" "+textOf(topic)), 30), "", "")
		return
	}
	for i := range topic.Signals {
		s := &topic.Signals[i]
		at := middleOut(legible(s.Metric+listOf(s)+s.Value), 40)
		t.line(name, at, every(topic.Every, topic.Retained == topic.Messages), valuesOf(s), likely(s), stampsOf(s))
		name = ""
	}
}

// listOf is the pointer of any element of the list that a signal comes in.
func listOf(s *survey.Signal) string {
	switch s.Samples {
	case "":
		return ""
	case "whole":
		return "/*"
	}
	return s.Samples + "/*"
}

// textOf is the beginning of a topic's text.
func textOf(t *survey.Topic) string {
	if t.Shape != survey.Words {
		return ""
	}
	return strconv.Quote(t.Text)
}

// middleOut leaves out the middle of a text that is longer than most characters, so that
// one name does not stretch a table.
func middleOut(text string, most int) string {
	all := []rune(text)
	if len(all) <= most {
		return text
	}
	end := most / 2
	return string(all[:most-end-1]) + "…" + string(all[len(all)-end:])
}

// every is how often messages come; those that the broker had kept tell nothing of it.
func every(s float64, kept bool) string {
	switch d := time.Duration(s * float64(time.Second)); {
	case kept:
		return "kept"
	case s == 0:
		return "once"
	case d < 10*time.Second:
		return d.Round(100 * time.Millisecond).String()
	default:
		return d.Round(time.Second).String()
	}
}

func valuesOf(s *survey.Signal) string {
	if s.Truth {
		return survey.States(s)
	}
	low, high := fixed(s.Min, s.Decimals), fixed(s.Max, s.Decimals)
	if low == high {
		return low
	}
	return low + " to " + high
}

func fixed(x float64, n int) string {
	if x >= 1e9 || x <= -1e9 || n > 9 {
		return strconv.FormatFloat(x, 'g', 6, 64)
	}
	return strconv.FormatFloat(x, 'f', n, 64)
}

func likely(s *survey.Signal) string {
	g := s.Guess
	say := g.Unit
	switch {
	case s.Truth:
		return g.Quantity
	case g.Unit == "" && g.Quantity == "":
		say = ""
	case g.Unit == "":
		say = g.Quantity + ", unit?"
	case !g.Sure:
		say += "?"
	}
	if g.Counts {
		say = strings.TrimPrefix(say+", counts up", ", ")
	}
	return say
}

func stampsOf(s *survey.Signal) string {
	switch {
	case s.Metric != "" && s.Clock != nil:
		return survey.Lag(s.Clock)
	case s.Time == "":
		return "none"
	case s.Clock == nil:
		return s.Time
	}
	return s.Time + ", " + survey.Lag(s.Clock)
}

// legible is a text from elsewhere as a terminal may show it.
func legible(text string) string {
	if strings.ContainsFunc(text, func(r rune) bool { return !strconv.IsPrint(r) }) {
		return strconv.Quote(text)
	}
	return text
}
