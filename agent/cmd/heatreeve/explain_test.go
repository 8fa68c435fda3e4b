package main

import (
	"context"
	"encoding/json"
	"fmt"
	"math"
	"path/filepath"
	"regexp"
	"slices"
	"strconv"
	"strings"
	"testing"
	"time"
	"unicode/utf8"

	"heatreeve/agent"
	"heatreeve/agent/figure"
	"heatreeve/agent/site"
	"heatreeve/agent/working"
	"heatreeve/ingest/quality"
	"heatreeve/store"
)

// calculator works what is printed between two =, by the rules of school.
type calculator struct {
	text string
	err  error
}

func (c *calculator) skip() { c.text = strings.TrimLeft(c.text, " ") }

func (c *calculator) eat(s string) bool {
	c.skip()
	rest, ok := strings.CutPrefix(c.text, s)
	if ok {
		c.text = rest
	}
	return ok
}

func (c *calculator) sum() float64 {
	x := c.product()
	for {
		switch {
		case c.eat("+"):
			x += c.product()
		case c.eat("−"):
			x -= c.product()
		default:
			return x
		}
	}
}

func (c *calculator) product() float64 {
	x := c.power()
	for {
		switch {
		case c.eat("×"):
			x *= c.power()
		case c.eat("/"):
			x /= c.power()
		default:
			return x
		}
	}
}

func (c *calculator) power() float64 {
	x := c.one()
	for c.eat("²") {
		x *= x
	}
	if c.eat("^") {
		return math.Pow(x, c.one())
	}
	return x
}

var numeral = regexp.MustCompile(`^-?[0-9]+(\.[0-9]+)?(e[0-9]+)?`)

func (c *calculator) one() float64 {
	switch {
	case c.eat("√("):
		x := c.sum()
		c.close()
		return math.Sqrt(x)
	case c.eat("exp("):
		x := c.sum()
		c.close()
		return math.Exp(x)
	case c.eat("("):
		x := c.sum()
		c.close()
		return x
	}
	c.skip()
	n := numeral.FindString(c.text)
	c.text = c.text[len(n):]
	x, err := strconv.ParseFloat(n, 64)
	if err != nil && c.err == nil {
		c.err = fmt.Errorf("no number at %q", c.text)
	}
	return x
}

func (c *calculator) close() {
	if !c.eat(")") && c.err == nil {
		c.err = fmt.Errorf("no bracket at %q", c.text)
	}
}

func calculated(text string) (float64, error) {
	c := calculator{text: text}
	x := c.sum()
	if c.skip(); c.err == nil && c.text != "" {
		c.err = fmt.Errorf("%q is left", c.text)
	}
	return x, c.err
}

func TestCalculator(t *testing.T) {
	for text, want := range map[string]float64{
		"1 + 2 × 3": 7, "(1 + 2) × 3": 9, "√(3² + 4²)": 5, "8 / 4 / 2": 1, "5 − (-2)": 7, "(-2)²": 4, "0.5 × √(16) − 1": 1, "6 / (8 / 2)^0.5 × exp(-1 × 0)": 3,
	} {
		if got, err := calculated(text); err != nil || got != want {
			t.Errorf("%s = %g, %v; want %g", text, got, err, want)
		}
	}
	for _, text := range []string{"", "1 +", "(1", "1 1", "√(4", "x"} {
		if x, err := calculated(text); err == nil {
			t.Errorf("%q is %g", text, x)
		}
	}
}

// printed is a line of a working as it was printed.
type printed struct {
	symbol, words, law, formula, value, unit string
}

// lines takes the text of a working apart.
func linesOf(text string) (all []printed) {
	var whole []string
	for line := range strings.Lines(text) {
		line = strings.TrimRight(line, "\n")
		if strings.HasPrefix(line, "[") {
			break // the sources
		}
		n := len(line) - len(strings.TrimLeft(line, " "))
		if n >= 4 && len(whole) > 0 {
			whole[len(whole)-1] += " " + strings.TrimSpace(line)
			continue
		}
		whole = append(whole, line)
	}
	form := regexp.MustCompile(`^  (\S+) +(.*?): (.+?) = (.+) = (\S+)( [^\[]\S*( K\))?)?( \[\d+\])?$`)
	given := regexp.MustCompile(`^  (\S+) +([^=]*): (-?[0-9.e]+)( [^\[=]\S*( K\))?)?( from .*)?( \[\d+\])?$`)
	for _, line := range whole {
		if m := form.FindStringSubmatch(line); m != nil {
			all = append(all, printed{m[1], m[2], m[3], m[4], m[5], strings.TrimSpace(m[6])})
		} else if m := given.FindStringSubmatch(line); m != nil {
			all = append(all, printed{symbol: m[1], words: m[2], value: m[3], unit: strings.TrimSpace(m[4])})
		} else if strings.Contains(line, " = ") {
			all = append(all, printed{words: "cannot be read: " + line})
		}
	}
	return all
}

func explain(t *testing.T, args ...string) string {
	t.Helper()
	status, out, errs := invoke(append([]string{"explain"}, args...)...)
	if status != exitGood || errs != "" {
		t.Errorf("explain %q: status %d, %s", args, status, errs)
	}
	return out
}

// followed works each formula of a printed working again, and looks whether its numbers
// stand in the lines above, each under a symbol of its own.
func followed(t *testing.T, text string) (formulas int) {
	t.Helper()
	values := map[string]string{}
	for line := range strings.Lines(text) {
		if n := utf8.RuneCountInString(line); n > width+1 {
			t.Errorf("a line of %d columns: %s", n-1, line)
		}
	}
	for _, l := range linesOf(text) {
		if strings.HasPrefix(l.words, "cannot be read") {
			t.Error(l.words)
			continue
		}
		if l.formula != "" {
			formulas++
			x, err := calculated(l.formula)
			if err != nil || !sameDigits(x, l.value) {
				t.Errorf("%s = %s is printed, a calculator has %.12g (%v), in %s", l.formula, l.value, x, err, l.words)
			}
			sameNumbers(t, &l, values)
		}
		if before, twice := values[l.symbol]; twice {
			t.Errorf("%s is %s further up and %s, %s, here: two figures of one symbol", l.symbol, before, l.value, l.words)
		}
		values[l.symbol] = l.value
	}
	return formulas
}

// sameDigits tells whether x is the printed value in all digits of it.
func sameDigits(x float64, value string) bool {
	mantissa, exponent, _ := strings.Cut(value, "e")
	_, after, _ := strings.Cut(mantissa, ".")
	place := -float64(len(after))
	if exponent != "" {
		e, err := strconv.Atoi(exponent)
		if err != nil {
			return false
		}
		place += float64(e)
	}
	y, err := strconv.ParseFloat(value, 64)
	return err == nil && math.Abs(x-y) <= (0.5+1e-6)*math.Pow(10, place)
}

// sameNumbers holds the numbers of a formula against the values of the symbols in its law.
func sameNumbers(t *testing.T, l *printed, values map[string]string) {
	t.Helper()
	split := func(s string) []string {
		return strings.FieldsFunc(s, func(r rune) bool { return strings.ContainsRune(" ()+−×/√²^", r) })
	}
	law, numbers := split(l.law), split(l.formula)
	if len(law) != len(numbers) {
		t.Errorf("%s and %s have not the same parts", l.law, l.formula)
		return
	}
	for i, symbol := range law {
		if v, ok := values[symbol]; ok && v != numbers[i] {
			t.Errorf("%s is %s above, and %s in %s", symbol, v, numbers[i], l.formula)
		}
	}
}

// Of every load of every example, each line of the working can be followed with a
// calculator.
func TestEveryWorkingCanBeFollowed(t *testing.T) {
	met := map[figure.Figure]bool{}
	for _, file := range siteFiles(t) {
		p := play(t, file, nil)
		for i := range p.site.Loads {
			name := p.site.Loads[i].Name
			out := explain(t, name, "--data", p.data)
			n := followed(t, out)
			for _, l := range linesOf(out) {
				f, ok := figureOf(l.symbol)
				if f == figure.MassFlow && p.site.Loads[i].Vessel != nil {
					continue // a vessel has a mass and no such metric
				}
				if ok {
					same, known := met[f]
					met[f] = (same || !known) && strings.HasPrefix(l.words, f.Words)
				}
			}
			if name == "cooling coil" && !(strings.Contains(out, "enthalpy, the sensible part, at the inlet") && strings.Contains(out, "note: sensible part only: coil at 6.9")) {
				t.Errorf("the coil condenses, and nothing is said of it:\n%s", out)
			}
			if n < 10 || strings.Contains(out, "has no duty") {
				t.Errorf("%s: %d formulas:\n%s", name, n, out)
			}
		}
	}
	for _, f := range figure.All {
		if !met[f] {
			t.Errorf("no working has the line %q, %q, to which a metric leads, or some working calls it otherwise", f.Symbol, f.Words)
		}
	}
}

// figureOf is the figure of a symbol, if a metric has it too.
func figureOf(symbol string) (figure.Figure, bool) {
	i := slices.IndexFunc(figure.All, func(f figure.Figure) bool { return f.Symbol == symbol })
	if i < 0 {
		return figure.Figure{}, false
	}
	return figure.All[i], true
}

// A load without a duty is explained by what is missing, since when, and what was seen last;
// an idle one by its flow; and what can be followed can be.
func TestExplainWithoutADuty(t *testing.T) {
	p := play(t, "brackwater-creamery.yaml", func(tag *site.Tag, s int) bool {
		return s%10 == 0 && !(tag.Name == "FT-201" && s >= 3000) && !(tag.Name == "TT-302" && s >= 600 && s < 1200) && tag.Name != "TT-402"
	})
	at := func(s int) string { return p.from.Add(time.Duration(s) * time.Second).Format(time.RFC3339) }
	for _, tt := range []struct {
		load string
		at   string
		want []string
	}{
		{"hot-water", at(3031), []string{
			`stale: tag "FT-201": last reading is older than its max_age of 30 s`,
			`flow: tag "FT-201" last said `, " m3/h at 2026-12-01 09:49:50 +00:00; it holds for 30 s, and is missing since 2026-12-01 09:50:20 +00:00",
			"s old, good, not used: stale", "T1' inlet: ", "hot-water has no duty: stale. It is blind."}},
		{"chilled-glycol", at(900), []string{`outlet: tag "TT-302" last said`, "is missing since 2026-12-01 09:10:20 +00:00"}},
		{"dryer-air", "", []string{`no reading: tag "TT-402" has no reading yet`, `outlet: tag "TT-402" has no reading yet`}},
	} {
		args := []string{tt.load, "--data", p.data}
		if tt.at != "" {
			args = append(args, "--at", tt.at)
		}
		out := explain(t, args...)
		flat := strings.Join(strings.Fields(out), " ")
		for _, want := range tt.want {
			if !strings.Contains(flat, want) {
				t.Errorf("%s does not say %q:\n%s", tt.load, want, out)
			}
		}
		followed(t, out)
	}
	if out := explain(t, "chilled-glycol", "--data", p.data, "--at", at(1900)); followed(t, out) < 15 {
		t.Errorf("the past of a load that is back:\n%s", out)
	}
}

// So is one whose counter stands, whose flow is none, or whose content is at rest; and the
// record of a minute whose readings are gone.
func TestExplainAtRest(t *testing.T) {
	p := play(t, "ostrel-maltings.yaml", nil, "wash/total", "malt/feed", "stones/temperature", "kettle/temperature")
	for load, want := range map[string]string{
		"keg washer": "nothing was counted: the load is idle", "malt kiln": "nothing to speak of flows: the load is idle",
		"stone bed": "the content is at rest, and its duty is 0", "mash kettle": "is no more than idle_below: the content is at rest",
	} {
		out := explain(t, load, "--data", p.data)
		if flat := strings.Join(strings.Fields(out), " "); !strings.Contains(flat, want) || !strings.Contains(flat, load+" is idle; its duty is 0.") || !strings.Contains(flat, "Verdict: idle") {
			t.Errorf("%s does not say %q:\n%s", load, want, out)
		}
		if followed(t, out) == 0 {
			t.Errorf("%s: no formula:\n%s", load, out)
		}
	}
	out := explain(t, "hot-water", "--data", keep(t), "--at", "2026-10-25T12:00:10+00:00")
	if n := followed(t, out); n < 6 || !strings.Contains(out, "no longer in the history") {
		t.Errorf("of a record %d formulas:\n%s", n, out)
	}
}

// What is asked wrongly is told with what there is.
func TestExplainRefuses(t *testing.T) {
	p := play(t, "brackwater-creamery.yaml", nil)
	for _, tt := range []struct {
		args   []string
		status int
		want   string
	}{
		{[]string{"--data", p.data}, exitWrong, "the load is missing"},
		{[]string{"hot-water"}, exitWrong, "--data must be given"},
		{[]string{"hot-watr", "--data", p.data}, exitWrong, `load "hot-watr" is not in the site file of then; did you mean "hot-water"?`},
		{[]string{"steam", "--data", p.data}, exitWrong, `there are: hot-water, chilled-glycol, dryer-air, milk`},
		{[]string{"hot-water", "--data", p.data, "--at", "noon"}, exitWrong, `--at "noon" is no date`},
		{[]string{"hot-water", "--data", p.data, "--at", "2027-01-01"}, exitWrong, "--at 2027-01-01: the history goes up to 2026-12-01 10:15:00 +00:00"},
		{[]string{"hot-water", "--data", p.data, "--at", "2026-11-01"}, exitFailed, `no record of load "hot-water" at 2026-11-01 00:00:00 +00:00, nor readings of its tags before`},
		{[]string{"hot-water", "--data", p.data, "--at", "2026-11-01", "--zone", "Mars"}, exitWrong, `--zone "Mars" is not known`},
		{[]string{"hot-water", "--data", t.TempDir()}, exitFailed, "no history in"},
	} {
		status, out, errs := invoke(append([]string{"explain"}, tt.args...)...)
		if status != tt.status || !strings.Contains(errs, tt.want) || out != "" {
			t.Errorf("explain %q: status %d, %q%q; want %d, %q", tt.args, status, out, errs, tt.status, tt.want)
		}
	}
}

// The JSON has the lines of the text, and the figure beside them.
func TestExplainAsJSON(t *testing.T) {
	p := play(t, "tarnholt-heat-works.yaml", nil)
	for i := range p.site.Loads {
		name := p.site.Loads[i].Name
		printed := linesOf(explain(t, name, "--data", p.data))
		w := askJSON[working.Working](t, "explain", name, "--data", p.data)
		var told []working.Line
		for _, s := range w.Sections {
			for _, l := range s.Lines {
				if l.Shown != "" {
					told = append(told, l)
				}
			}
		}
		if len(printed) != len(told) || len(printed) < 20 || w.Duty == nil || w.Site != p.site.Name || w.Quality != "good" {
			t.Fatalf("%s: %d lines printed, %d as JSON: %+v", name, len(printed), len(told), w)
		}
		for k, l := range printed {
			if l.symbol != told[k].Symbol || l.value != told[k].Shown || l.formula != told[k].Formula || l.law != told[k].Law {
				t.Errorf("%s: printed %+v, as JSON %+v", name, l, told[k])
			}
			if x, err := strconv.ParseFloat(l.value, 64); err != nil || !sameDigits(told[k].Value, l.value) {
				t.Errorf("%s: %s is printed as %s (%g, %v), and is %.12g", name, l.words, l.value, x, err, told[k].Value)
			}
		}
	}
}

// While an agent runs it is asked, for the newest figure and for the past; afterwards the
// file tells the same of the past.
func TestExplainWhileTheDemoRuns(t *testing.T) {
	data := t.TempDir()
	ctx, cancel := context.WithCancel(t.Context())
	defer cancel()
	var out, errs heard
	ended := make(chan int, 1)
	go func() {
		ended <- run(ctx, []string{"demo", "--data", data, "--listen", "127.0.0.1:0", "--speed", "600"}, &out, &errs)
	}()
	newest := awaitExplanation(t, ended, "explain", "hot-water", "--data", data)
	if followed(t, newest) < 15 {
		t.Errorf("of the running demo:\n%s", newest)
	}
	var w working.Working
	_, text, _ := invoke("explain", "hot-water", "--data", data, "--json")
	if err := json.Unmarshal([]byte(text), &w); err != nil {
		t.Fatal(err)
	}
	past := []string{"explain", "hot-water", "--data", data, "--at", w.At.Format(time.RFC3339)}
	before := awaitExplanation(t, ended, past...) // once it is committed
	if followed(t, before) < 15 {
		t.Errorf("the past while the demo runs:\n%s", before)
	}
	if status, _, said := invoke("explain", "hot-watre", "--data", data); status != exitWrong || !strings.Contains(said, `did you mean "hot-water"?`) {
		t.Errorf("a wrong load: status %d, %s", status, said)
	}
	cancel()
	if status := <-ended; status != exitGood {
		t.Fatalf("demo: status %d, %s%s", status, &out, &errs)
	}
	if status, after, said := invoke(past...); status != exitGood || after != before {
		t.Errorf("after the end: status %d, %s\n%s\nwas\n%s", status, said, after, before)
	}
}

// awaitExplanation asks until the hot water has a duty.
func awaitExplanation(t *testing.T, ended <-chan int, args ...string) string {
	t.Helper()
	ticker, deadline := time.NewTicker(100*time.Millisecond), time.After(60*time.Second)
	defer ticker.Stop()
	for {
		select {
		case status := <-ended:
			t.Fatalf("the demo has ended with status %d", status)
		case <-deadline:
			_, text, errs := invoke(args...)
			t.Fatalf("no explanation within 60 s: %s%s", text, errs)
		case <-ticker.C:
			if status, text, _ := invoke(args...); status == exitGood && strings.Contains(text, "hot-water serves") {
				return text
			}
		}
	}
}

// hear adds a reading of a tag a second after the end, and lets ten seconds go by.
func (p *played) hear(t *testing.T, tag string, value float64, m quality.Mark) {
	t.Helper()
	db, err := store.Open(filepath.Join(p.data, agent.HistoryFile), store.Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer db.Close()
	ids, err := db.Names("tag")
	if err != nil {
		t.Fatal(err)
	}
	r := store.Reading{Tag: ids[tag], At: p.to.Add(time.Second).UnixNano(), Value: value, Mark: uint8(m), Stamped: true}
	if err := db.Commit(store.Batch{Beats: []store.Beat{{Through: p.to.Add(10 * time.Second).UnixNano(), Readings: []store.Reading{r}}}}); err != nil {
		t.Fatal(err)
	}
}

// What the source has no number for has none in the working either, as text and as JSON.
func TestExplainABadReading(t *testing.T) {
	p := play(t, "brackwater-creamery.yaml", nil)
	p.hear(t, "FT-201", math.NaN(), quality.NoValue)
	out := strings.Join(strings.Fields(explain(t, "hot-water", "--data", p.data)), " ")
	for _, want := range []string{
		`No duty bad reading: tag "FT-201" is bad: no-value flow: tag "FT-201" had no number at 2026-12-01 10:15:01 +00:00; tag "FT-201" is bad: no-value`,
		"V' flow, without a number: from FT-201 at 10:15:01.000, 8 s old, bad (no-value), not used: bad reading",
		"hot-water has no duty: bad reading. It is blind.",
	} {
		if !strings.Contains(out, want) {
			t.Errorf("it does not say %q:\n%s", want, out)
		}
	}
	var w working.Working
	if text := explain(t, "hot-water", "--data", p.data, "--json"); json.Unmarshal([]byte(text), &w) != nil || w.Fault != "bad reading" || w.Sections[1].Lines[0].Reading.Reason != "no-value" {
		t.Errorf("as JSON: %s", text)
	}
}

// A reading that was set aside is told of where the value before it is used.
func TestExplainASpike(t *testing.T) {
	p := play(t, "tarnholt-heat-works.yaml", nil)
	p.hear(t, "network/supply temperature", 380, quality.None)
	out := explain(t, "network", "--data", p.data)
	want := "T1' inlet, from before what has been set aside: 94.969 °C from network/supply temperature at 11:15:01.000, 8 s old, uncertain (spike)"
	if flat := strings.Join(strings.Fields(out), " "); !strings.Contains(flat, want) || followed(t, out) < 20 {
		t.Errorf("it does not say %q:\n%s", want, out)
	}
}
