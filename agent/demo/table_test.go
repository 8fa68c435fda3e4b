package demo

import (
	"bytes"
	"flag"
	"os"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"
	"testing/synctest"
	"time"
	"unicode/utf8"

	"heatreeve/agent/design"
	"heatreeve/agent/loads"
	"heatreeve/agent/view"
)

var update = flag.Bool("update", false, "write the golden tables anew; read them before they are committed")

const notice = "Heatreeve informs. It is no safety function, interlock or alarm of record, and no billing meter. Site codes, the plant's own protection and licensed people come first."

// picture is a plant with a load of each kind.
func picture() *view.Snapshot {
	const u = 5.2e3 // W: shown as ± 10 kW
	figure := loads.Figure{Duty: 638.24e3, Uncertainty: u, MassFlow: 3.7792, Inlet: 403.17, Outlet: 363.06}
	means := [3]loads.Mean{{Duty: 638e3, Coverage: 1}, {Duty: 636.9e3, Coverage: 0.98}, {Duty: 620e3, Coverage: 0.997}}
	return &view.Snapshot{
		Site: "Brackwater Creamery",
		At:   morning.Add(2*time.Hour + 31*time.Minute + 7*time.Second).UnixNano(),
		Loads: []view.Load{
			{Name: "hot-water", Figure: figure, Means: means, Booked: loads.Totals{Given: 1.5234e6 * 3600}, Design: 640e3, Allow: 0.08, Verdict: design.Holding},
			{Name: "chilled-glycol", Figure: loads.Figure{Idle: true}, Booked: loads.Totals{Taken: 412.06e3 * 3600}, Means: [3]loads.Mean{{}, {Duty: 121e3, Coverage: 1}, {Duty: 160e3, Coverage: 1}}, Design: 180e3, Verdict: design.Idle},
			{Name: "dryer-air", Figure: loads.Figure{Fault: loads.Stale, Reason: `tag "TT-402": last reading is older than its max_age of 30 s`}, Design: 480e3, Verdict: design.Blind},
			{Name: "tower", Figure: loads.Figure{Duty: -2.3456e3, Uncertainty: 21, MassFlow: 120.5, Inlet: 300.15, Outlet: 299.95}, Verdict: design.Undecided},
		},
		Tags: []view.Tag{
			{Name: "TT-201", Accepted: 9067, Refused: []view.Refusal{{Reason: "empty"}, {Reason: "not a number", Count: 12}}},
			{Name: "TT-202", Accepted: 9066, Late: 1},
		},
		Broker: view.Broker{Connected: true},
	}
}

func draw(t *testing.T, s *view.Snapshot, o TableOptions) string {
	t.Helper()
	var b bytes.Buffer
	if err := write(&b, tableLines(s, o)); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

// The golden tables are regression guards: drawn by this code and read by hand.
func TestTables(t *testing.T) {
	humid := picture()
	humid.Loads[3].Figure.Remark = loads.Remark{Latent: true, Note: "sensible part only: coil at 6.00 °C is below the dew point at 10.00 °C (101.3 kPa absolute), and what condenses is not in the duty"}
	away := picture()
	away.Broker = view.Broker{Fault: "dial tcp 127.0.0.1:1883:\nconnection refused", Losses: 2}
	away.History.Fault = "no space left on device"
	away.At = 0
	for name, tt := range map[string]struct {
		s *view.Snapshot
		o TableOptions
	}{
		"table-80":     {picture(), TableOptions{Width: 80, Notice: notice}},
		"table-120":    {picture(), TableOptions{Width: 120, Notice: notice, Zone: time.FixedZone("IST", 3600)}},
		"table-40":     {picture(), TableOptions{Width: 40, Notice: notice}},
		"table-colour": {picture(), TableOptions{Width: 80, Notice: notice, Colour: true}},
		"table-remark": {humid, TableOptions{Width: 80, Notice: notice}},
		"table-away":   {away, TableOptions{Width: 100, Notice: notice}},
	} {
		got := draw(t, tt.s, tt.o)
		path := filepath.Join("testdata", name+".txt")
		if *update {
			if err := os.WriteFile(path, []byte(got), 0o644); err != nil {
				t.Fatal(err)
			}
		}
		want, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		if got != string(want) {
			t.Errorf("%s: got\n%s\nwant\n%s", name, got, want)
		}
	}
}

var colourCode = regexp.MustCompile("\x1b\\[[0-9;]*m")

// Whatever the width: no line is wider, each load has its line with its verdict
// as a word, and colour changes nothing but colour.
func TestTableFitsEveryWidth(t *testing.T) {
	for width := 34; width <= 200; width++ {
		plain := draw(t, picture(), TableOptions{Width: width, Notice: notice})
		for line := range strings.Lines(plain) {
			if n := utf8.RuneCountInString(strings.TrimSuffix(line, "\n")); n > width {
				t.Errorf("width %d: a line of %d: %q", width, n, line)
			}
		}
		for _, l := range picture().Loads {
			line := regexp.MustCompile(`(?m)^` + l.Name + ` +` + l.Verdict.String() + ".*$").FindString(plain)
			if line == "" || width >= 41 && strings.Contains(line, "…") {
				t.Errorf("width %d: load %s has line %q, want its verdict %q, and columns left out before one is cut", width, l.Name, line, l.Verdict)
			}
		}
		if words := strings.Fields(plain); !strings.Contains(strings.Join(words, " "), notice) {
			t.Errorf("width %d: the notice is not whole", width)
		}
		coloured := draw(t, picture(), TableOptions{Width: width, Notice: notice, Colour: true})
		if colourCode.ReplaceAllString(coloured, "") != plain {
			t.Errorf("width %d: the coloured table says something else", width)
		}
	}
}

// JCGM 100:2008, 7.2.6: an uncertainty of two digits, and the figure rounded to
// the same place; its example is 10.057 62 Ohm with 27 mOhm, given as 10.058 Ohm
// (from memory).
func TestFiguresFollowTheUncertainty(t *testing.T) {
	for _, tt := range []struct {
		duty, u float64 // W
		want    string  // kW
	}{
		{10.05762e3, 13.5, "10.058 ± 0.027"},
		{638.24e3, 5.2e3, "638 ± 10"},
		{638.24e3, 4.9e3, "638.2 ± 9.8"},
		{63824e3, 520e3, "63800 ± 1000"},
		{63824e3, 5200e3, "64000 ± 10000"},
		{-2.3456e3, 21, "-2.346 ± 0.042"},
		{0, 1e-9, "0.000000 ± 0.000000"},
	} {
		l := view.Load{Figure: loads.Figure{Duty: tt.duty, Uncertainty: tt.u}}
		if got := dutyCell(&l); got != tt.want {
			t.Errorf("%g W, u = %g W: %q, want %q", tt.duty, tt.u, got, tt.want)
		}
	}
	for J, want := range map[float64]string{0: "0.0 kWh", 3.6e6: "1.0 kWh", 3.6e9: "1.000 MWh", 3.5999e9: "1000.0 kWh"} {
		if got := energy(J); got != want {
			t.Errorf("%g J: %q, want %q", J, got, want)
		}
	}
	if got := celsius(273.13); got != "0.0" {
		t.Errorf("273.13 K: %q, want 0.0 without a sign", got)
	}
	if got := percent(0.999); got != "99 %" {
		t.Errorf("99.9 %% of the hour: %q, want 99 %%, for 100 %% is all of it", got)
	}
}

func TestDisplayDrawsOverTheLastTable(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		var b bytes.Buffer
		d := NewDisplay(&b, DisplayOptions{Terminal: true})
		show := func() string {
			b.Reset()
			if err := d.Show(picture()); err != nil {
				t.Fatal(err)
			}
			return b.String()
		}
		first := show()
		if strings.Contains(first, "\x1b") {
			t.Errorf("the first table moves the cursor: %q", first)
		}
		if again := show(); again != "" {
			t.Errorf("a table at once after the first: %q", again)
		}
		<-time.After(200 * time.Millisecond)
		up := "\x1b[" + strconv.Itoa(strings.Count(first, "\n")) + "A\r\x1b[J"
		if second := show(); second != up+first {
			t.Errorf("second table %q, want the way up %q and the table", second, up)
		}
	})
}

func TestDisplayOfAFileHasNoCodes(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		var b bytes.Buffer
		d := NewDisplay(&b, DisplayOptions{Width: func() int { return 100 }})
		for range 21 { // a beat a second: at 0, 10 and 20 s
			if err := d.Show(picture()); err != nil {
				t.Fatal(err)
			}
			<-time.After(time.Second)
		}
		one := draw(t, picture(), TableOptions{Width: 100}) + "\n"
		if got := b.String(); got != one+one+one {
			t.Errorf("after 21 beats: %q, want three tables", got)
		}
	})
}
