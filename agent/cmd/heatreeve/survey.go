package main

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"strings"
	"time"

	"heatreeve/agent"
	"heatreeve/agent/site"
	"heatreeve/agent/survey"
)

// surveyHelp tells what a survey does and what not.
const surveyHelp = `It subscribes to the topics, as one more client that publishes nothing and
leaves nothing behind, and tells for each number that comes by: where it stands
in the payload, how often it comes, its values, what it probably measures, and
how its stamps lie against this machine's clock. What is guessed has a question
mark; the draft says why. A broker's access rules may hide topics.

A draft is a site file with the tags and the loads that names suggest. What only
you can know is ___ in it, and heatreeve check FILE tells what is left of that.
`

const (
	defaultListening = 30 * time.Second
	longestListening = 24 * time.Hour
)

func runSurvey(ctx context.Context, c *call) error {
	var b site.Broker
	var filters list
	c.brokerFlags(&b)
	length := c.flags.Duration("for", defaultListening, "listen for `DURATION`, such as 30s or 10m")
	c.flags.Var(&filters, "filter", "`TOPICS` to listen to, such as plant/#, may be given again; without it, all")
	draft := c.flags.String("draft", "", "write a draft of a site file to `FILE`, which must not be there yet; - for the output, in place of the table")
	format := c.flags.String("format", "table", "`table|json`")
	most := c.flags.Int("most", survey.DefaultTopics, "look into at most `N` topics")
	if err := c.parse(0, ""); err != nil {
		return err
	}
	switch {
	case b.URL == "":
		return wrongf("heatreeve survey: --broker must be given, such as mqtt://127.0.0.1:1883; see heatreeve survey --help")
	case *length < time.Second || *length > longestListening:
		return wrongf("heatreeve survey: --for %s: allowed are 1s to %s", *length, longestListening)
	case *format != "table" && *format != "json":
		return wrongf("heatreeve survey: --format %q: allowed are table, json", *format)
	case *most < 1:
		return wrongf("heatreeve survey: --most %d: at least 1", *most)
	}
	if len(filters) == 0 {
		filters = list{"#"}
	}
	if err := agent.CheckListening(b, filters); err != nil {
		return usageError{err}
	}
	if *draft != "" && *draft != "-" {
		if _, err := os.Lstat(*draft); err == nil {
			return wrongf("heatreeve survey: --draft %q is there already; give another name", *draft)
		}
	}
	s := survey.New(*most)
	heard, err := c.listen(ctx, b, filters, *length, s)
	if err != nil {
		return err
	}
	return c.tellSurvey(s, survey.Draft{Broker: b, At: time.Now(), For: heard}, *draft, *format)
}

// listen gathers what comes in for a while, and returns for how long it did: an interrupt
// ends it with what there is.
func (c *call) listen(ctx context.Context, b site.Broker, filters []string, length time.Duration, s *survey.Survey) (time.Duration, error) {
	listening, cancel := context.WithTimeout(ctx, length)
	defer cancel()
	begun := time.Now()
	stop := c.tellProgress(s, begun, length)
	err := agent.Listen(listening, b, filters, s)
	stop()
	return min(time.Since(begun), length).Round(time.Second), err
}

// tellProgress writes to stderr how far the survey is, until the end is told: on a terminal a line that
// is written over, elsewhere nothing.
func (c *call) tellProgress(s *survey.Survey, begun time.Time, length time.Duration) (end func()) {
	if _, shown := terminal(c.stderr); !shown {
		return func() {}
	}
	done, ended := make(chan struct{}), make(chan struct{})
	go func() {
		defer close(ended)
		ticker := time.NewTicker(time.Second)
		defer ticker.Stop()
		for {
			p := s.Progress()
			fmt.Fprintf(c.stderr, "\rsurvey: %v of %v, %d topics, %d messages\x1b[K", min(time.Since(begun), length).Round(time.Second), length, p.Topics, p.Messages)
			select {
			case <-ticker.C:
			case <-done:
				fmt.Fprint(c.stderr, "\r\x1b[K")
				return
			}
		}
	}()
	return func() { close(done); <-ended }
}

// tellSurvey writes what was found, and the draft where one is wanted.
func (c *call) tellSurvey(s *survey.Survey, d survey.Draft, draft, format string) error {
	d.Topics = s.Topics()
	if len(d.Topics) == 0 {
		return fmt.Errorf("%s: not one message in %v; check the topics and the access rules of the broker, or listen for longer", d.Broker.URL, d.For)
	}
	out := bufio.NewWriter(c.stdout)
	var err error
	switch {
	case draft == "-":
		err = d.Write(out)
	case format == "json":
		err = printJSON(out, surveyJSON(s, d))
	default:
		err = surveyTable(out, s, d)
	}
	if err = errors.Join(err, out.Flush()); err != nil || draft == "" || draft == "-" {
		return err
	}
	if err := writeNew(draft, d.Write); err != nil {
		return fmt.Errorf("draft: %w", err)
	}
	fmt.Fprintf(c.stderr, "The draft is in %s: fill in each %s, then heatreeve check %s\n", draft, survey.Blank, draft)
	return nil
}

// writeNew writes a file that was not there before.
func writeNew(path string, write func(io.Writer) error) (err error) {
	f, err := os.OpenFile(path, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o640)
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, f.Close()) }()
	return write(f)
}

// brokerFlags are the options that lead to a broker, in the words of a site file.
func (c *call) brokerFlags(b *site.Broker) {
	c.flags.StringVar(&b.URL, "broker", "", "`URL` of the broker: mqtt://host:port, or mqtts://host:port for TLS")
	c.flags.StringVar(&b.Username, "username", "", "`NAME` to log in with")
	c.flags.StringVar(&b.PasswordFile, "password-file", "", "`FILE` that holds the password")
	c.flags.StringVar(&b.PasswordEnv, "password-env", "", "environment `VARIABLE` that holds the password")
	c.flags.StringVar(&b.CAFile, "ca", "", "`FILE` of the authority's certificates in PEM, where the system's do not do")
	c.flags.StringVar(&b.CertFile, "certificate", "", "`FILE` of a client certificate in PEM")
	c.flags.StringVar(&b.KeyFile, "key", "", "`FILE` of its key")
	c.flags.StringVar(&b.ServerName, "server-name", "", "`NAME` in the broker's certificate, where it is not the host")
}

// list is an option that may be given again.
type list []string

func (l *list) String() string { return strings.Join(*l, " ") }

func (l *list) Set(s string) error {
	*l = append(*l, s)
	return nil
}
