package store

import (
	"bufio"
	"crypto/sha256"
	"encoding/binary"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strconv"
	"testing"
)

// childPath names the variable that makes the test binary commit until killed.
const childPath = "HEATREEVE_STORE_CHILD"

func TestMain(m *testing.M) {
	if path := os.Getenv(childPath); path != "" {
		fmt.Fprintln(os.Stderr, commitForEver(path))
		os.Exit(1)
	}
	os.Exit(m.Run())
}

// numbered is the batch with number n: one beat that reads n, a minute and the
// register of all numbers up to n, and with each seventh the number as state.
func numbered(n uint64) Batch {
	at := int64(n) * second
	b := Batch{
		Beats:     []Beat{{Through: at, Readings: []Reading{{Tag: 1, At: at, Value: float64(n), Mark: markNumber(n)}}}},
		Minutes:   []Minute{{Load: 1, Start: at * 60, Given: float64(n), Duty: float64(n), Uncertain: float64(n % 3)}},
		Registers: []Register{{Load: 1, Given: float64(n * (n + 1) / 2), Uncertain: float64(n)}},
	}
	for tag := range uint32(n % 50) { // to make the batches differ in size
		b.Beats[0].Readings = append(b.Beats[0].Readings, Reading{Tag: 2 + tag, At: at, Value: math.Sqrt(float64(n)), Mark: markNumber(n / 5)})
	}
	if e, ok := eventOf(n); ok {
		b.Events = []Event{e}
	}
	if f, ok := siteOf(n); ok {
		b.Site = &f
	}
	if n%7 == 0 {
		b.Checkpoint = binary.LittleEndian.AppendUint64(nil, n)
	}
	return b
}

// markNumber is the mark of the reading in batch n: three of thirteen have one.
func markNumber(n uint64) uint8 { return []uint8{0, 65, 65, 130, 12: 0}[n%13] }

// eventOf is the event in batch n: every eleventh begins one, which the third after that ends.
func eventOf(n uint64) (e Event, ok bool) {
	begun := n - n%11
	e = Event{At: int64(begun) * second, Number: begun, Kind: "test", Subject: "P-1", Text: fmt.Sprintf("number %d", begun)}
	if n%11 == 3 {
		e.Until = int64(n) * second
	}
	return e, begun > 0 && (n%11 == 0 || n%11 == 3)
}

// siteOf is the site file in batch n, of which each thirteenth has one: another from then on
// in each thirty-ninth, and else the one that is in force already.
func siteOf(n uint64) (f SiteFile, ok bool) {
	text := fmt.Appendf(nil, "site: number %d\n", n/39)
	return SiteFile{From: int64(n) * second, Text: text, Digest: sha256.Sum256(text)}, n%13 == 0
}

// testSites compares the site files in s with those of the numbers up to n.
func testSites(t *testing.T, s *Store, n uint64) {
	t.Helper()
	all, err := s.Sites()
	if err != nil {
		t.Fatal(err)
	}
	var want []SiteFile
	for i := uint64(1); i <= n; i++ {
		if f, ok := siteOf(i); ok && (i == 13 || i%39 == 0) {
			want = append(want, f)
		}
	}
	if len(all) != len(want) {
		t.Fatalf("%d site files after number %d, want %d", len(all), n, len(want))
	}
	for i, f := range all {
		text, err := s.SiteText(f.Digest)
		if err != nil || f.From != want[i].From || f.Digest != want[i].Digest || string(text) != string(want[i].Text) {
			t.Errorf("site file %d: %+v, %q, %v; want %+v", i, f, text, err, want[i])
		}
	}
}

// testEvents compares all events in s with those of the numbers 1 to n.
func testEvents(t *testing.T, s *Store, n uint64) {
	t.Helper()
	var want []Event
	for i := range n {
		if e, ok := eventOf(i + 1); ok && e.Until == 0 {
			want = append(want, e)
		} else if ok {
			want[len(want)-1] = e
		}
	}
	if got := drain(t, s.Events(math.MinInt64, math.MaxInt64)); !slices.Equal(got, want) {
		t.Errorf("%d events after number %d, want %d:\n%+v\n%+v", len(got), n, len(want), got, want)
	}
	next, err := s.NextEvent()
	if err != nil || next != n-n%11+1 {
		t.Errorf("NextEvent() = %d, %v after number %d", next, err, n)
	}
}

// commitForEver goes on where the history ends, and tells each number once its commit
// has returned.
func commitForEver(path string) error {
	s, err := Open(path, Options{})
	if err != nil {
		return err
	}
	s.groupBytes, s.sealing.enough, s.beatAge = 4000, 2000, 10*second
	s.minuteSealing.after = 0
	n, err := lastNumber(s)
	if err != nil {
		return err
	}
	for n++; ; n++ {
		if err := s.Commit(numbered(n)); err != nil {
			return err
		}
		fmt.Println(n)
		if n%500 == 0 {
			if _, err := s.Trim(int64(n) * second); err != nil {
				return err
			}
		}
	}
}

// lastNumber reads state and journal as an engine does after a restart.
func lastNumber(s *Store) (n uint64, err error) {
	state, ok, err := s.Checkpoint()
	if err != nil {
		return 0, err
	}
	if ok {
		n = binary.LittleEndian.Uint64(state)
	}
	for b, err := range s.Since() {
		if err != nil {
			return 0, err
		}
		if got := b.Readings[0].Value; got != float64(n+1) {
			return 0, fmt.Errorf("beat %v follows number %d", got, n)
		}
		n++
	}
	return n, nil
}

// TestKill kills a process while it commits, twenty times. Each time the file holds
// every batch that the process had been told was committed, each of them whole.
func TestKill(t *testing.T) {
	path := filepath.Join(t.TempDir(), "history.db")
	rng := rand.New(rand.NewPCG(7, 7))
	var last uint64
	for round := range 20 {
		acknowledged := killedAfter(t, path, 1+rng.IntN(60))
		s, err := Open(path, Options{})
		if err != nil {
			t.Fatalf("round %d: %v", round, err)
		}
		n, err := lastNumber(s)
		if err != nil || n < acknowledged || n <= last {
			t.Fatalf("round %d: the history ends with %d, %v; %d was acknowledged, %d the round before", round, n, err, acknowledged, last)
		}
		last = n
		testNumbered(t, s, n)
		testMarks(t, s, n)
		testEvents(t, s, n)
		testSites(t, s, n)
		if err := s.Close(); err != nil {
			t.Fatal(err)
		}
		boltCheck(t, path)
	}
}

// killedAfter starts the child, kills it after some acknowledgements, and
// returns the last one that it gave.
func killedAfter(t *testing.T, path string, acks int) (last uint64) {
	t.Helper()
	cmd := exec.Command(os.Args[0])
	cmd.Env = append(os.Environ(), childPath+"="+path)
	cmd.Stderr = os.Stderr
	out, err := cmd.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	lines := bufio.NewScanner(out)
	for lines.Scan() {
		if last, err = strconv.ParseUint(lines.Text(), 10, 64); err != nil {
			t.Error(err)
		}
		if acks--; acks == 0 {
			if err := cmd.Process.Kill(); err != nil {
				t.Error(err)
			}
		}
	}
	if acks > 0 {
		t.Errorf("the child ended by itself, %d acknowledgements too early", acks)
	}
	if err := cmd.Wait(); err == nil {
		t.Error("the child was not killed")
	}
	return last
}

// testNumbered compares everything in s with the numbers 1 to n.
func testNumbered(t *testing.T, s *Store, n uint64) {
	t.Helper()
	for _, b := range []struct {
		what string
		got  []float64
	}{
		{"readings", values(drain(t, s.Readings(1, 0, math.MaxInt64)), func(r Reading) float64 { return r.Value })},
		{"minutes", values(drain(t, s.Minutes(1, 0, math.MaxInt64)), func(m Minute) float64 { return m.Duty })},
	} {
		if uint64(len(b.got)) != n {
			t.Errorf("%d %s, want %d", len(b.got), b.what, n)
		}
		for i, v := range b.got {
			if v != float64(i+1) {
				t.Fatalf("%s: %v in place %d", b.what, v, i)
			}
		}
	}
	var hours Hour
	for _, h := range drain(t, s.Hours(1, 0, math.MaxInt64)) {
		hours.Add(h)
	}
	if want := float64(n * (n + 1) / 2); uint64(hours.Minutes) != n || hours.Given != want {
		t.Errorf("hours of %d minutes hold %v J, want %d and %v", hours.Minutes, hours.Given, n, want)
	}
	registers, err := s.Registers()
	if want := float64(n * (n + 1) / 2); err != nil || len(registers) != 1 || registers[0].Given != want {
		t.Errorf("Registers() = %v, %v; want one that is %v", registers, err, want)
	}
}

// testMarks compares the marks and the uncertain time that are there with those of their
// numbers, up to n; histories of earlier layouts have none.
func testMarks(t *testing.T, s *Store, n uint64) {
	t.Helper()
	for _, r := range drain(t, s.Readings(1, 0, math.MaxInt64)) {
		if want := markNumber(uint64(r.Value)); r.Mark != want {
			t.Fatalf("reading %+v, want mark %d", r, want)
		}
	}
	for _, m := range drain(t, s.Minutes(1, 0, math.MaxInt64)) {
		if want := float64(uint64(m.Duty) % 3); m.Uncertain != want {
			t.Fatalf("minute %+v, want %v uncertain", m, want)
		}
	}
	if all, err := s.Registers(); err != nil || len(all) != 1 || all[0].Uncertain != float64(n) {
		t.Errorf("registers %+v, %v; want %d uncertain", all, err, n)
	}
}

func values[T any](all []T, f func(T) float64) (v []float64) {
	for _, x := range all {
		v = append(v, f(x))
	}
	return v
}
