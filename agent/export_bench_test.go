package agent

import (
	"context"
	"fmt"
	"io"
	"path/filepath"
	"runtime"
	"slices"
	"testing"
	"time"

	"heatreeve/store"
)

// BenchmarkExport exports one of 50 tags, and one of 8 loads, from histories of one length
// and of ten times that. MB/heap is the most that is on the heap at any piece beyond what
// was there before: with a longer history it is the same.
func BenchmarkExport(b *testing.B) {
	for _, hours := range []int{24, 240} {
		path := filepath.Join(b.TempDir(), HistoryFile)
		plantHistory(b, path, hours)
		for _, s := range []Selection{{Tag: "T-7"}, {Tag: "T-7", Format: "json"}, {Tag: "T-7", Format: "parquet"}, {Load: "L-3"}, {Load: "L-3", Format: "parquet"}} {
			b.Run(fmt.Sprintf("%dh/%s%s%s", hours, s.Tag, s.Load, s.Format), func(b *testing.B) {
				db, err := store.OpenReadOnly(path)
				if err != nil {
					b.Fatal(err)
				}
				defer db.Close()
				h := history{db: db, through: week.UnixNano}
				var rows int64
				var most uint64
				for b.Loop() {
					b.StopTimer()
					before := heap(true)
					b.StartTimer()
					m := &meter{w: io.Discard, json: s.Format == "json"}
					m.tell = func(Progress) {
						now := heap(false)
						most = max(most, now-min(before, now))
					}
					if err := m.exportAs(s, func(s Selection) error { return m.read(b.Context(), h, s) }); err != nil {
						b.Fatal(err)
					}
					rows += m.Rows
				}
				b.ReportMetric(float64(most)/1e6, "MB/heap")
				b.ReportMetric(float64(b.Elapsed())/float64(rows), "ns/row")
				b.ReportMetric(float64(rows)/float64(b.N), "rows")
			})
		}
	}
}

// heap is what is on the heap, garbage too unless it is collected.
func heap(collect bool) uint64 {
	if collect {
		runtime.GC()
	}
	var m runtime.MemStats
	runtime.ReadMemStats(&m)
	return m.HeapAlloc
}

// plantHistory writes hours of 50 tags that read once in 2 s, and of 8 loads.
func plantHistory(b *testing.B, path string, hours int) {
	b.Helper()
	db, err := store.Open(path, store.Options{MaxBytes: 1 << 30})
	if err != nil {
		b.Fatal(err)
	}
	defer db.Close()
	p := newPlantWriter(b, db)
	for range hours * 60 {
		p.commit(b, 60)
	}
}

type plantWriter struct {
	db          *store.Store
	tags, loads []uint32
	second      int
}

func newPlantWriter(b *testing.B, db *store.Store) *plantWriter {
	b.Helper()
	name := func(kind, format string, n int) []uint32 {
		all := make([]string, n)
		for i := range all {
			all[i] = fmt.Sprintf(format, i)
		}
		ids, err := db.IDs(kind, all)
		if err != nil {
			b.Fatal(err)
		}
		return ids
	}
	return &plantWriter{db: db, tags: name("tag", "T-%d", 50), loads: name("load", "L-%d", 8)}
}

// commit commits some seconds, with the minutes that they begin.
func (p *plantWriter) commit(b *testing.B, seconds int) (took time.Duration) {
	b.Helper()
	var batch store.Batch
	for range seconds {
		at := week.UnixNano() + int64(p.second)*int64(time.Second)
		beat := store.Beat{Through: at}
		for i := p.second % 2; i < len(p.tags); i += 2 {
			beat.Readings = append(beat.Readings, store.Reading{Tag: p.tags[i], At: at, Value: 273.15 + float64((p.second*7+i*13)%900)/10, Stamped: true})
		}
		if p.second%60 == 0 {
			batch.Checkpoint = []byte{}
			for _, id := range p.loads {
				m, _ := ramp("", p.second/60%5000)
				m.Load, m.Start = id, at
				batch.Minutes = append(batch.Minutes, m)
			}
		}
		batch.Beats = append(batch.Beats, beat)
		p.second++
	}
	begin := time.Now()
	if err := p.db.Commit(batch); err != nil {
		b.Fatal(err)
	}
	return time.Since(begin)
}

// BenchmarkCommitBesideExport commits ten seconds of 50 tags, with nobody asking and while
// the agent's page gives out a tag's readings of two days over and over. It tells how long the
// middle commit and the slowest of a hundred take.
func BenchmarkCommitBesideExport(b *testing.B) {
	const hours = 48
	for _, beside := range []string{"nothing", "export"} {
		b.Run(beside, func(b *testing.B) {
			path := filepath.Join(b.TempDir(), HistoryFile)
			plantHistory(b, path, hours)
			db, err := store.Open(path, store.Options{MaxBytes: 1 << 30})
			if err != nil {
				b.Fatal(err)
			}
			defer db.Close()
			p := newPlantWriter(b, db)
			p.second = hours * 3600
			exports, stop := 0, func() {}
			if beside == "export" {
				stop = exportOverAndOver(b, db, &exports)
			}
			var took []time.Duration
			for b.Loop() {
				took = append(took, p.commit(b, 10))
			}
			stop()
			slices.Sort(took)
			b.ReportMetric(float64(took[len(took)/2].Microseconds())/1e3, "ms/median")
			b.ReportMetric(float64(took[len(took)*99/100].Microseconds())/1e3, "ms/p99")
			b.ReportMetric(float64(exports), "exports")
		})
	}
}

// exportOverAndOver asks a server for an export until stop is called.
func exportOverAndOver(b *testing.B, db *store.Store, n *int) (stop func()) {
	b.Helper()
	s := newExports(newReports(history{db: db, through: week.UnixNano}))
	server, at := own(s)
	ctx, cancel := context.WithCancel(b.Context())
	ended := make(chan error, 1)
	go func() {
		for {
			m := &meter{w: io.Discard, tell: func(Progress) {}}
			if err := m.ask(ctx, at, Selection{Tag: "T-7"}); err != nil {
				ended <- err
				return
			}
			*n++
		}
	}()
	return func() {
		cancel()
		if err := <-ended; ctx.Err() == nil {
			b.Error(err)
		}
		server.Close()
	}
}
