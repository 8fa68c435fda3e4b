package agent

import (
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"time"

	"heatreeve/store"
)

// SalvageDir is the folder in a data folder that a salvaged history goes to unless
// another is named.
const SalvageDir = "salvaged"

// Salvaged tells what [Salvage] came to.
type Salvaged struct {
	Path  string   // of the new file
	Whole bool     // whether nothing is lost
	Lines []string // what is saved and what is lost, for people
}

// Salvage saves what can be read of the history in the folder data, or in the copy of its
// file data, to a new one in the folder into, which it makes if there is none. The damaged
// file stays as it is.
func Salvage(data, into string) (s Salvaged, err error) {
	info, err := os.Stat(data)
	if err != nil {
		return s, err
	}
	from, folder := data, filepath.Dir(data)
	if info.IsDir() {
		from, folder = filepath.Join(data, HistoryFile), data
	}
	if into == "" {
		into = filepath.Join(folder, SalvageDir)
	}
	if err := os.Mkdir(into, 0o700); err != nil && !errors.Is(err, fs.ErrExist) {
		return s, err
	}
	s.Path = filepath.Join(into, HistoryFile)
	r, err := store.Salvage(from, s.Path)
	s.Lines, s.Whole = salvageLines(&r), r.Whole()
	if err != nil {
		return s, err
	}
	if err := tellSalvage(s.Path, salvageEvent(&r, s.Lines, time.Now().UnixNano())); err != nil {
		return s, fmt.Errorf("note in the new history what was lost: %w", err)
	}
	return s, nil
}

// tellSalvage adds the event to the salvaged history at path, so that every later report
// over the time of the loss has it.
func tellSalvage(path string, e store.Event) (err error) {
	db, err := store.Open(path, store.Options{})
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, db.Close()) }()
	if e.Number, err = db.NextEvent(); err != nil {
		return err
	}
	return db.Commit(store.Batch{Events: []store.Event{e}})
}

// salvageEvent tells of a salvage at now what it lost, from the earliest loss whose time is
// known on.
func salvageEvent(r *store.Report, lines []string, now int64) store.Event {
	e := store.Event{At: now, Until: now, Kind: eventDamage, Text: "salvaged from another file, with nothing lost"}
	if r.Whole() {
		return e
	}
	newest := newestOf(r)
	for _, t := range []store.Tally{r.LostBatches, r.LostReadings, r.LostMinutes, r.DamagedMinutes, r.DamagedHours, r.DamagedEvents} {
		if t.Count > 0 && t.From > 0 && t.From <= newest {
			e.At = min(e.At, t.From)
		}
	}
	lost := slices.DeleteFunc(slices.Clone(lines), func(line string) bool {
		return !strings.HasPrefix(line, "lost") && !strings.HasPrefix(line, "damaged")
	})
	e.Text = "salvaged from a damaged file; " + strings.Join(lost, "; ")
	return e
}

// newestOf is the time of the newest record that is told of.
func newestOf(r *store.Report) int64 { return max(r.Batches.To, r.LostBatches.To, r.Hours.To) }

// salvageLines tells what is saved and what is lost.
func salvageLines(r *store.Report) (lines []string) {
	newest := newestOf(r)
	for _, part := range []struct {
		what string
		store.Tally
	}{
		{"saved: %d batches", r.Batches}, {"saved: %d readings", r.Readings}, {"saved: %d minutes", r.Minutes}, {"saved: %d hours", r.Hours}, {"saved: %d events", r.Events}, {"saved: %d site files", r.Sites},
		{"lost: %d batches", r.LostBatches}, {"lost: %d readings", r.LostReadings}, {"lost: %d minutes that hours tell of", r.LostMinutes},
		{"damaged: %d records of minutes", r.DamagedMinutes}, {"damaged: %d records of hours, built anew where there are minutes", r.DamagedHours}, {"damaged: %d events", r.DamagedEvents}, {"damaged: %d records of site files", r.DamagedSites},
	} {
		if part.Count > 0 {
			lines = append(lines, fmt.Sprintf(part.what, part.Count)+between(part.Tally, newest))
		}
	}
	switch {
	case r.Earlier > 0 && r.Unreadable > 0:
		lines = append(lines, fmt.Sprintf("lost, or removed before by age or size: %d batches before the first that is saved", r.Earlier))
	case r.Earlier > 0:
		lines = append(lines, fmt.Sprintf("removed before by age or size: %d batches", r.Earlier))
	}
	if r.Unreadable > 0 {
		lines = append(lines, fmt.Sprintf("damaged: %d places in pages of the file", r.Unreadable))
	}
	for _, part := range []struct {
		what  string
		saved bool
	}{{"names of tags and loads", r.Names}, {"registers", r.Registers}, {"state of the accounts, and where the plant is", r.State}} {
		word := "lost"
		if part.saved {
			word = "saved"
		}
		lines = append(lines, word+": "+part.what)
	}
	return lines
}

// between tells from when to when records lie. Those from before event time began have no
// time, and a damaged key may tell any: what is beyond the newest record by more than an
// hour is left open.
func between(t store.Tally, newest int64) string {
	at := func(ns int64) string { return time.Unix(0, ns).UTC().Format("2006-01-02 15:04:05 UTC") }
	begun, ended := t.From > 0, t.To <= newest+int64(time.Hour)
	switch {
	case begun && ended:
		return ", from " + at(t.From) + " to " + at(t.To)
	case ended:
		return ", up to " + at(t.To)
	case begun && t.From <= newest:
		return ", from " + at(t.From) + " on"
	}
	return ""
}

// salvageable adds to the error of a damaged history what saves the rest of it.
func salvageable(path string, err error) error {
	if !errors.Is(err, store.ErrDamaged) {
		return err
	}
	if filepath.Base(path) == HistoryFile {
		path = filepath.Dir(path)
	}
	return fmt.Errorf("%w; heatreeve salvage --data %s saves what can be read of it to a new file and tells what is lost", err, path)
}
