package main

import (
	"context"
	"log/slog"
	"math"
	"math/rand/v2"
	"net"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"heatreeve/agent"
	"heatreeve/agent/site"
	"heatreeve/store"
)

const halls = "../../../configs/quillmere-halls.yaml"

// wintered makes the data folder of a plant whose heating has given 50 kW and 20 kW for each
// kelvin below 12 °C for four weeks, less 60 kW in the night, with a scatter of 8 kW an hour.
func wintered(t *testing.T) string {
	t.Helper()
	dir := t.TempDir()
	s, err := site.Load(halls)
	if err != nil {
		t.Fatal(err)
	}
	s.Broker.URL = "mqtt://127.0.0.1:1" // where nobody answers
	ctx, cancel := context.WithCancel(t.Context())
	a, err := agent.New(s, agent.Options{Data: dir, Listen: "127.0.0.1:0", Log: slog.New(slog.DiscardHandler), Ready: func(net.Addr) { cancel() }})
	if err != nil {
		t.Fatal(err)
	}
	if err := a.Run(ctx); err != nil {
		t.Fatal(err)
	}
	db, err := store.Open(filepath.Join(dir, agent.HistoryFile), store.Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer db.Close()
	ids, err := db.Names("load")
	if err != nil {
		t.Fatal(err)
	}
	tags, err := db.Names("tag")
	if err != nil {
		t.Fatal(err)
	}
	from := time.Date(2026, 1, 5, 0, 0, 0, 0, time.UTC)
	b := store.Batch{Beats: []store.Beat{{Through: from.Add(4 * 7 * 24 * time.Hour).UnixNano()}}}
	r := rand.New(rand.NewPCG(1, 2))
	for h := range 4 * 7 * 24 {
		at := from.Add(time.Duration(h) * time.Hour)
		outdoor := 278.15 + 9*math.Sin(float64(h)/60) + 4*math.Sin(2*math.Pi*float64(h)/24)
		for k := range 6 {
			b.Beats[0].Readings = append(b.Beats[0].Readings, store.Reading{Tag: tags["outdoor"], At: at.Add(time.Duration(k) * 10 * time.Minute).UnixNano(), Value: outdoor, Stamped: true})
		}
		duty := 50e3 + 20e3*max(0, 285.15-outdoor) + 8e3*r.NormFloat64()
		if h%24 < 6 {
			duty -= 60e3
		}
		for k := range 60 {
			b.Minutes = append(b.Minutes, store.Minute{
				Load: ids["heating"], Start: at.Add(time.Duration(k) * time.Minute).UnixNano(), Measured: 60, Given: 60 * duty,
				Duty: duty, DutyMin: duty, DutyMax: duty, Flow: 3, Inlet: 353.15, Outlet: 333.15, Pressure: 4e5,
			})
		}
	}
	if err := db.Commit(b); err != nil {
		t.Fatal(err)
	}
	return dir
}

// What learn prints can be pasted into the site file, and says there what the plant did.
func TestLearnIntoTheSiteFile(t *testing.T) {
	data := wintered(t)
	status, block, account := invoke("learn", "--site", halls, "--data", data, "--load", "heating", "--against", "outdoor", "--from", "2026-01-05", "--to", "2026-02-02")
	if status != exitGood {
		t.Fatalf("status %d, %s", status, account)
	}
	for _, want := range []string{"samples: 672 of 60 min, ", "hours told apart: day", `tag "outdoor": learned from `, ", counts below 12", "R2 0.99"} {
		if !strings.Contains(account, want) {
			t.Errorf("the account does not say %q:\n%s", want, account)
		}
	}
	text, err := os.ReadFile(halls)
	if err != nil {
		t.Fatal(err)
	}
	begin, rest, _ := strings.Cut(string(text), "      baseline: # as")
	_, end, found := strings.Cut(rest, "\n      inlet: 80")
	if !found {
		t.Fatal("the example has no baseline to be replaced")
	}
	pasted := begin + indentedBlock(block, "      ") + "      inlet: 80" + end
	path := filepath.Join(t.TempDir(), "site.yaml")
	if err := os.WriteFile(path, []byte(pasted), 0o600); err != nil {
		t.Fatal(err)
	}
	if status, out, errs := invoke("check", path); status != exitGood || errs != "" {
		t.Fatalf("check: status %d, %s%s\n%s", status, out, errs, block)
	}
	s, err := site.Load(path)
	if err != nil {
		t.Fatal(err)
	}
	b := s.Loads[0].Design.Baseline
	term := b.Terms[0]
	if !term.Below || math.Abs(term.Limit-285.15) > 0.3 || math.Abs(term.Slope-20e3) > 3*term.Error || math.Abs(b.Residual-8e3) > 600 || b.Samples < 650 || b.Span != time.Hour {
		t.Errorf("learned %+v", b)
	}
	if night := b.Hours[3] - b.Hours[12]; math.Abs(night+60e3) > 6e3 {
		t.Errorf("a night is %g W less than a day, want 60 kW", -night)
	}
}

func indentedBlock(text, by string) string {
	var w strings.Builder
	for line := range strings.Lines(text) {
		w.WriteString(by + line)
	}
	return w.String()
}

func TestLearnRefuses(t *testing.T) {
	data := wintered(t)
	all := map[string]string{"--site": halls, "--data": data, "--load": "heating", "--against": "outdoor"}
	for _, tt := range []struct {
		option, value, want string
		status              int
	}{
		{"--load", "heatin", `--load "heatin" is not in the site file`, exitWrong},
		{"--load", "pool", "the history holds no record", exitFailed},
		{"--against", "outdor", `--against: "outdor" is no tag of the site file`, exitWrong},
		{"--against", "guests", "the history", exitFailed},
		{"--by", "7m", "--by 7m0s: allowed are whole minutes", exitWrong},
		{"--habit", "month", `--habit "month": allowed are none, day, week`, exitWrong},
		{"--to", "2026-01-06", "24 samples can be used: at least 30 are wanted", exitFailed},
		{"--site", "", "must be given", exitWrong},
	} {
		args := []string{"learn"}
		for k, v := range all {
			if k != tt.option {
				args = append(args, k, v)
			}
		}
		args = append(args, tt.option, tt.value)
		if status, out, errs := invoke(args...); status != tt.status || !strings.Contains(errs, tt.want) || out != "" {
			t.Errorf("%s %s: status %d, %q; want %d, %q", tt.option, tt.value, status, errs, tt.status, tt.want)
		}
	}
}
