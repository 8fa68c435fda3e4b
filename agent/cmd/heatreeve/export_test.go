package main

import (
	"context"
	"encoding/csv"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"slices"
	"strconv"
	"strings"
	"testing"
	"time"

	"heatreeve/agent"
	"heatreeve/agent/answer"
	"heatreeve/store"
)

func export(args ...string) (status int, stdout, stderr string) {
	return invoke(append([]string{"export"}, args...)...)
}

// column reads the numbers of a column, NaN where there is none.
func column(t *testing.T, text, name string) (all []float64) {
	t.Helper()
	records, err := csv.NewReader(strings.NewReader(text)).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	i := slices.Index(records[0], name)
	if i < 0 {
		t.Fatalf("no column %q in %q", name, records[0])
	}
	for _, f := range records[1:] {
		x := math.NaN()
		if f[i] != "" {
			if x, err = strconv.ParseFloat(f[i], 64); err != nil {
				t.Fatal(err)
			}
		}
		all = append(all, x)
	}
	return all
}

// The minutes of a load add up to what the report says of it.
func TestExportAgainstReport(t *testing.T) {
	data := keep(t)
	_, text, _ := report(t, "--data", data, "--from", "2026-10-24", "--to", "2026-10-26", "--load", "hot-water", "--format", "json")
	var r answer.Report
	if err := json.Unmarshal([]byte(text), &r); err != nil {
		t.Fatal(err)
	}
	status, text, errs := export("--data", data, "--from", "2026-10-24", "--to", "2026-10-26", "--load", "hot-water")
	if status != exitGood || errs != "" {
		t.Fatalf("status %d, %s", status, errs)
	}
	given := column(t, text, "given_J")
	sum := 0.0
	for _, x := range given {
		sum += x
	}
	if want := r.Loads[0].Total.Given; len(given) != 49*60-10 || math.Abs(sum-want) > 1e-12*want {
		t.Errorf("%d minutes add up to %v, the report says %v", len(given), sum, want)
	}
}

// All readings of a tag come, from the folder and from a copy without leave to write, and
// progress is told where it is wanted.
func TestExportOfATag(t *testing.T) {
	data := keep(t)
	copied := filepath.Join(t.TempDir(), "copy.db")
	b, err := os.ReadFile(filepath.Join(data, agent.HistoryFile))
	if err == nil {
		err = os.WriteFile(copied, b, 0o444)
	}
	if err != nil {
		t.Fatal(err)
	}
	var first string
	for _, from := range []string{data, copied} {
		status, text, errs := export("--data", from, "--tag", "TT-201", "--progress")
		values := column(t, text, "value_K")
		if status != exitGood || len(values) != 4*keptMinutes || math.Abs(slices.Min(values)-402.85) > 1e-9 || math.Abs(slices.Max(values)-403.45) > 1e-9 {
			t.Errorf("%s: status %d, %d values from %v to %v", from, status, len(values), slices.Min(values), slices.Max(values))
		}
		lines := strings.Split(strings.TrimSpace(errs), "\n")
		want := fmt.Sprintf("export: %d rows, up to 2026-10-27 06:59:45 UTC, 100 %%", 4*keptMinutes)
		if lines[len(lines)-1] != want || len(lines) < 2 {
			t.Errorf("%s: said %q, want ...%q", from, errs, want)
		}
		if first == "" {
			first = text
		}
		if text != first {
			t.Error("the copy gives something else")
		}
	}
	if after, err := os.ReadFile(copied); err != nil || string(after) != string(b) {
		t.Errorf("the copy is not as it was: %v", err)
	}
	if status, _, errs := export("--data", data, "--tag", "TT-201"); status != exitGood || errs != "" {
		t.Errorf("without --progress: status %d, %q", status, errs)
	}
}

func TestExportRefusals(t *testing.T) {
	data, dir := keep(t), t.TempDir()
	for _, tt := range []struct {
		args   string
		status int
		err    string
	}{
		{"", exitWrong, "--data and --tag or --load must be given"},
		{"--data " + data, exitWrong, "--data and --tag or --load must be given"},
		{"--data " + data + " --tag TT-201 extra", exitWrong, `unexpected "extra"`},
		{"--data " + data + " --tag TT-201 --load hot-water", exitWrong, `--tag "TT-201" and load "hot-water": an export is of one of them`},
		{"--data " + data + " --tag TT-201 --by hour", exitWrong, `--by "hour": readings are exported one by one`},
		{"--data " + data + " --load hot-water --by day", exitWrong, `--by "day": allowed are minute, hour`},
		{"--data " + data + " --tag TT-201 --format orc", exitWrong, `heatreeve export: --format "orc": allowed are csv, json, parquet`},
		{"--data " + data + " --tag TT-210", exitWrong, `--tag "TT-210" is not in the history; did you mean "TT-201"?`},
		{"--data " + data + " --load hot-watre", exitWrong, `--load "hot-watre" is not in the history; did you mean "hot-water"?`},
		{"--data " + data + " --tag TT-201 --from 24.10.2026", exitWrong, `--from "24.10.2026" is no date`},
		{"--data " + data + " --tag TT-201 --from 2026-10-25 --to 2026-10-25", exitWrong, "--to 2026-10-25 is not after from 2026-10-25"},
		{"--data " + data + " --tag TT-201 --zone Dublin", exitWrong, `--zone "Dublin" is not known`},
		{"--data " + data + " --tag TT-201 --from 2026-12-01", exitFailed, `no reading of tag "TT-201" from 2026-12-01 00:00 +00:00; it goes up to 2026-10-27 07:00 +00:00`},
		{"--data " + data + " --tag TT-302", exitFailed, `no reading of tag "TT-302"; it goes up to`},
		{"--data " + dir + " --tag TT-201", exitFailed, "no history in"},
		{"--data " + dir + "/nowhere --tag TT-201", exitFailed, "nowhere"},
	} {
		status, out, errs := export(strings.Fields(tt.args)...)
		if status != tt.status || !strings.Contains(errs, tt.err) || out != "" {
			t.Errorf("%s: status %d, said %q, printed %d bytes; want %d, ...%q...", tt.args, status, errs, len(out), tt.status, tt.err)
		}
	}
	db, err := store.Open(filepath.Join(data, agent.HistoryFile), store.Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer db.Close()
	if status, _, errs := export("--data", data, "--tag", "TT-201"); status != exitFailed || !strings.Contains(errs, "file is locked") || !strings.Contains(errs, "on a copy of the file") {
		t.Errorf("a file that another program has open: status %d, %s", status, errs)
	}
}

// The columns of a minute that the README tells are those that there are.
func TestReadmeNamesTheMinuteColumns(t *testing.T) {
	_, rest, ok := strings.Cut(strings.Join(strings.Fields(readme(t)), " "), "Its columns: ")
	list, _, closed := strings.Cut(rest, "as it stands.")
	if !ok || !closed {
		t.Fatal("the README tells no columns")
	}
	var said []string
	for _, m := range regexp.MustCompile("`(\\w+)`").FindAllStringSubmatch(list, -1) {
		said = append(said, m[1])
	}
	status, text, errs := export("--data", keep(t), "--load", "hot-water", "--to", "2026-10-24T01:00")
	header, _, _ := strings.Cut(text, "\r\n")
	have := strings.Split(header, ",")
	slices.Sort(said)
	slices.Sort(have)
	if status != exitGood || !slices.Equal(said, have) {
		t.Errorf("status %d, %s: the program has %v,\nthe README tells %v", status, errs, have, said)
	}
}

// The columns of an hour that the README tells are those that there are: a minute's but for some.
func TestReadmeNamesTheHourColumns(t *testing.T) {
	_, rest, ok := strings.Cut(strings.Join(strings.Fields(readme(t)), " "), "Its columns are those of a minute but for ")
	list, _, closed := strings.Cut(rest, "The hour under way")
	if !ok || !closed {
		t.Fatal("the README tells no columns")
	}
	header := func(by string) []string {
		status, text, errs := export("--data", keep(t), "--load", "hot-water", "--to", "2026-10-24T01:00", "--by", by)
		if status != exitGood {
			t.Fatalf("status %d, %s", status, errs)
		}
		names, _, _ := strings.Cut(text, "\r\n")
		return strings.Split(names, ",")
	}
	minute, hour := header("minute"), header("hour")
	for _, name := range hour {
		if told := strings.Contains(list, "`"+name+"`"); !slices.Contains(minute, name) && !told {
			t.Errorf("the README does not tell %s", name)
		}
	}
	for _, name := range minute {
		if told := strings.Contains(list, "for `"+name+"`"); slices.Contains(hour, name) == told {
			t.Errorf("%s of a minute: in an hour %v, and told to be left out %v", name, slices.Contains(hour, name), told)
		}
	}
}

// Hours and minutes of a load add up to the same, and to what the report says; the
// report's uncertainty of an hour is that of the export.
func TestExportOfHoursAgainstReport(t *testing.T) {
	data := keep(t)
	span := []string{"--data", data, "--from", "2026-10-24T02:00Z", "--to", "2026-10-25T02:00Z", "--load", "hot-water"}
	_, text, _ := report(t, append(span, "--by", "hour", "--format", "json")...)
	var r answer.Report
	if err := json.Unmarshal([]byte(text), &r); err != nil {
		t.Fatal(err)
	}
	status, text, errs := export(append(span, "--by", "hour")...)
	if status != exitGood || errs != "" {
		t.Fatalf("status %d, %s", status, errs)
	}
	given, u, measured := column(t, text, "given_J"), column(t, text, "uncertainty_J"), column(t, text, "measured_s")
	if len(given) != 24 || len(r.Loads[0].Periods) != 24 {
		t.Fatalf("%d hours, and the report has %d; want 24", len(given), len(r.Loads[0].Periods))
	}
	for i, p := range r.Loads[0].Periods {
		if math.Abs(given[i]-p.Given) > 1e-9*p.Given || math.Abs(u[i]-p.Uncertainty) > 1e-9*p.Uncertainty || measured[i] != p.Measured || !(p.Given > 0 && p.Uncertainty > 0) {
			t.Errorf("hour %d: %v J ± %v in %v s, the report says %v ± %v in %v", i, given[i], u[i], measured[i], p.Given, p.Uncertainty, p.Measured)
		}
	}
}

// stopper ends its context once something has been written.
type stopper struct {
	io.Writer
	stop func()
}

func (s stopper) Write(p []byte) (int, error) {
	s.stop()
	return s.Writer.Write(p)
}

// An export that is stopped ends with status 1 and says that it is not the whole.
func TestExportIsStopped(t *testing.T) {
	ctx, cancel := context.WithCancel(t.Context())
	defer cancel()
	var out, errs strings.Builder
	status := run(ctx, []string{"export", "--data", keep(t), "--tag", "TT-201"}, stopper{&out, cancel}, &errs)
	if n := strings.Count(out.String(), "\n"); status != exitFailed || !strings.Contains(errs.String(), "rows, what was written is not the whole") || n == 0 || n > 2*keptMinutes {
		t.Errorf("status %d, %d lines, %s", status, n, &errs)
	}
}

// The export of a demo that runs comes from the agent, goes on while it commits, and
// begins as that of the file after its end does.
func TestExportWhileTheDemoRuns(t *testing.T) {
	data := t.TempDir()
	ctx, cancel := context.WithCancel(t.Context())
	defer cancel()
	var out, errs heard
	ended := make(chan int, 1)
	go func() {
		ended <- run(ctx, []string{"demo", "--data", data, "--listen", "127.0.0.1:0", "--speed", "60"}, &out, &errs)
	}()
	tag := []string{"--data", data, "--tag", "TT-201"}
	load := []string{"--data", data, "--load", "hot-water", "--format", "json"}
	tagLive, loadLive := awaitExport(t, ended, tag, 300), awaitExport(t, ended, load, 20)
	cancel()
	if status := <-ended; status != exitGood {
		t.Fatalf("demo: status %d, %s%s", status, &out, &errs)
	}
	for _, x := range []struct {
		args []string
		live string
	}{{tag, tagLive}, {load, loadLive}} {
		status, after, said := export(x.args...)
		if status != exitGood || !strings.HasPrefix(after, x.live) {
			t.Errorf("%v: after the end status %d, %s; %d bytes that do not begin with the %d before", x.args, status, said, len(after), len(x.live))
		}
	}
	if !strings.HasPrefix(tagLive, "time,value_K,stamped,quality,reason\r\n") || !strings.HasPrefix(loadLive, `{"start":"`) {
		t.Errorf("they begin with %.60q and %.60q", tagLive, loadLive)
	}
}

// awaitExport exports until there are so many lines.
func awaitExport(t *testing.T, ended <-chan int, args []string, lines int) string {
	t.Helper()
	ticker, deadline := time.NewTicker(100*time.Millisecond), time.After(60*time.Second)
	defer ticker.Stop()
	for {
		select {
		case status := <-ended:
			t.Fatalf("the demo has ended with status %d", status)
		case <-deadline:
			_, _, errs := export(args...)
			t.Fatalf("no export of %d lines within 60 s: %s", lines, errs)
		case <-ticker.C:
			if status, text, _ := export(args...); status == exitGood && strings.Count(text, "\n") >= lines {
				return text
			}
		}
	}
}

// The telling of progress never claims to be at the end before it is there.
func TestExportShare(t *testing.T) {
	at := time.Date(2026, 10, 24, 0, 0, 0, 0, time.UTC)
	for _, tt := range []struct {
		passed, all time.Duration
		want        string
	}{{0, time.Hour, "0 %"}, {30 * time.Minute, time.Hour, "50 %"}, {2 * time.Hour, time.Hour, "99 %"}, {-time.Hour, time.Hour, "0 %"}, {0, 0, "99 %"}, {time.Hour, math.MaxInt64, "0 %"}} {
		if got := share(agent.Progress{First: at, At: at.Add(tt.passed), Until: at.Add(tt.all)}); got != tt.want {
			t.Errorf("%v of %v: %s, want %s", tt.passed, tt.all, got, tt.want)
		}
	}
	failed := newProgressLine(&call{stderr: io.Discard, stdout: io.Discard}, true)
	failed.end(errors.New("at once"))
	if failed.w.Buffered() != 0 {
		t.Error("something is told of an export that has failed at once")
	}
}
