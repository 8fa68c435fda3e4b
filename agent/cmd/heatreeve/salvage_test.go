package main

import (
	"bytes"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"heatreeve/agent"
	"heatreeve/store"
)

// soundHistory is a folder with a history of 200 commits, and the bytes of its file.
func soundHistory(t *testing.T) (data string, whole []byte) {
	t.Helper()
	data = t.TempDir()
	path := filepath.Join(data, agent.HistoryFile)
	s, err := store.Open(path, store.Options{})
	if err != nil {
		t.Fatal(err)
	}
	for n := range int64(200) {
		b := store.Batch{Minutes: []store.Minute{{Load: 1, Start: n * 60e9, Measured: 60, Given: 5}}}
		for tag := range uint32(40) {
			at := n * 60e9
			b.Beats = append(b.Beats, store.Beat{Through: at, Readings: []store.Reading{{Tag: tag, At: at, Value: float64(n * int64(tag))}}})
		}
		if err := s.Commit(b); err != nil {
			t.Fatal(err)
		}
	}
	if err := s.Close(); err != nil {
		t.Fatal(err)
	}
	if whole, err = os.ReadFile(path); err != nil {
		t.Fatal(err)
	}
	return data, whole
}

// TestSalvage saves a sound history, and one that is cut off, which a reader refuses and
// names the command for.
func TestSalvage(t *testing.T) {
	data, whole := soundHistory(t)
	var out, fault bytes.Buffer
	if status := run(t.Context(), []string{"salvage", "--data", data}, &out, &fault); status != exitGood {
		t.Fatalf("status %d, %s", status, &fault)
	}
	for _, want := range []string{"saved: 200 batches, up to 1970-01-01 03:19:00 UTC", "saved: 8000 readings", "saved: 200 minutes", "saved: registers"} {
		if !strings.Contains(out.String(), want) {
			t.Errorf("it says\n%s\nand not %q", &out, want)
		}
	}
	path := filepath.Join(data, agent.HistoryFile)
	cut := whole[:len(bytes.TrimRight(whole, "\x00"))*2/3]
	if err := os.WriteFile(path, cut, 0o600); err != nil {
		t.Fatal(err)
	}
	fault.Reset()
	if status := run(t.Context(), []string{"report", "--data", data, "--from", "1970-01-01"}, &out, &fault); status != exitFailed || !strings.Contains(fault.String(), "heatreeve salvage --data "+data) {
		t.Errorf("a report on the damaged history: status %d, %s", status, &fault)
	}
	copied := filepath.Join(t.TempDir(), "copied.db")
	if err := os.WriteFile(copied, cut, 0o600); err != nil {
		t.Fatal(err)
	}
	fault.Reset()
	if status := run(t.Context(), []string{"report", "--data", copied, "--from", "1970-01-01"}, &out, &fault); status != exitFailed || !strings.Contains(fault.String(), "heatreeve salvage --data "+copied+" ") {
		t.Errorf("a report on a damaged copy: status %d, %s", status, &fault)
	}
	into := filepath.Join(data, "rest")
	out.Reset()
	if status := run(t.Context(), []string{"salvage", "--data", data, "--into", into}, &out, &fault); status != exitFailed || !strings.Contains(out.String(), "damaged: ") {
		t.Errorf("of the damaged history: status %d,\n%s", status, &out)
	}
	if now, err := os.ReadFile(path); err != nil || !bytes.Equal(now, cut) {
		t.Errorf("the damaged file was changed: %v", err)
	}
	if s, err := store.OpenReadOnly(filepath.Join(into, agent.HistoryFile)); err != nil {
		t.Error(err)
	} else if err := s.Close(); err != nil {
		t.Error(err)
	}
	if status := run(t.Context(), []string{"salvage"}, &out, &fault); status != exitWrong {
		t.Errorf("without --data: status %d", status)
	}
}
