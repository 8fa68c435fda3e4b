package store

import (
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"testing"
	"time"

	bolt "go.etcd.io/bbolt"
)

// written is what bbolt has written so far: the pages that transactions have
// allocated, and one meta page a commit. It is counted by bbolt, not by the kernel.
func written(db *bolt.DB, commits int) int64 {
	stats := db.Stats().TxStats
	return stats.GetPageAlloc() + int64(commits)*int64(db.Info().PageSize)
}

// walk makes the readings of tags that wander in steps of 0.01, each read every
// 10 s, as they come in SI units: temperatures in K and volume flows in m³/s.
type walk struct {
	rng    *rand.Rand
	values []float64
	at     int64
}

func newWalk(tags int) *walk {
	w := &walk{rng: rand.New(rand.NewPCG(1, 2)), values: make([]float64, tags), at: 1_760_000_000 * second}
	for i := range w.values {
		w.values[i] = 40 + float64(i)
	}
	return w
}

func (w *walk) beats(seconds int) []Beat {
	beats := make([]Beat, seconds)
	for i := range beats {
		w.at += second
		beats[i].Through = w.at
		for tag := i % 10; tag < len(w.values); tag += 10 {
			w.values[tag] += float64(w.rng.IntN(7)-3) / 100
			v := math.Round(w.values[tag]*100) / 100
			if tag%3 == 0 {
				v /= 3600
			} else {
				v += 273.15
			}
			beats[i].Readings = append(beats[i].Readings, Reading{Tag: uint32(tag), At: w.at, Value: v, Stamped: true})
		}
	}
	return beats
}

// BenchmarkCommit tells how many bytes one reading costs on the disk, for 50
// tags read every 10 s, against one key for each reading. B/reading is the mean
// of a day and more of commits, B/kept what the file then holds of each.
func BenchmarkCommit(b *testing.B) {
	for _, seconds := range []int{10, 60} {
		commits := 86_400 / seconds
		b.Run(fmt.Sprintf("%ds/grouped", seconds), func(b *testing.B) {
			for b.Loop() {
				s := newStore(b, Options{})
				w := newWalk(50)
				before, used := written(s.db, 0), s.Bytes()
				for range commits {
					commit(b, s, Batch{Beats: w.beats(seconds)})
				}
				readings := float64(commits * seconds * 5)
				b.ReportMetric(float64(written(s.db, commits)-before)/readings, "B/reading")
				b.ReportMetric(float64(s.Bytes()-used)/readings, "B/kept")
			}
		})
		b.Run(fmt.Sprintf("%ds/with-loads", seconds), func(b *testing.B) {
			for b.Loop() {
				benchmarkWhole(b, commits, seconds)
			}
		})
		b.Run(fmt.Sprintf("%ds/one-key-each", seconds), func(b *testing.B) {
			for b.Loop() {
				benchmarkPlain(b, commits, seconds)
			}
		})
	}
}

// BenchmarkSeal commits a day of 50 tags each 10 s, and a quarter of an hour of 4,000
// tags each second, and then seals them as that many commits would. B/sealed is what the
// pages then hold of a reading; ns/reading and ms/worst are the time that it takes,
// of a reading and of the longest that one commit has to bear.
func BenchmarkSeal(b *testing.B) {
	for _, tt := range []struct {
		what        string
		tags, every int
		commits     int
	}{{"50-tags", 50, 10, 8640}, {"4000-tags", 4000, 1, 90}} {
		b.Run(tt.what, func(b *testing.B) {
			for b.Loop() {
				b.StopTimer()
				s := newStore(b, Options{MaxBytes: 1 << 30, BeatAge: math.MaxInt64})
				w := newDriftWalk(tt.tags, tt.every)
				for range tt.commits {
					commit(b, s, Batch{Beats: w.beats(10), Checkpoint: []byte{1}})
				}
				s.beatAge, s.sealing.notBefore = time.Minute, math.MinInt64
				b.StartTimer()
				var worst, took time.Duration
				for range tt.commits {
					start := time.Now()
					s.seal(10 * tt.tags / tt.every)
					took += time.Since(start)
					worst = max(worst, time.Since(start))
				}
				sealed := reportSealed(b, s)
				b.ReportMetric(float64(worst.Microseconds())/1e3, "ms/worst")
				b.ReportMetric(float64(took)/float64(sealed), "ns/reading")
			}
		})
	}
}

// reportSealed tells what the pages of the blocks take of each reading in them, and
// returns how many these are.
func reportSealed(b *testing.B, s *Store) (readings int) {
	b.Helper()
	err := s.view(func(tx *bolt.Tx) error {
		c := tx.Bucket(bucketSealed).Cursor()
		for k, _ := c.First(); k != nil; k, _ = c.Next() {
			head, err := parseName(k)
			if err != nil {
				return err
			}
			readings += int(head.readings)
		}
		return nil
	})
	if err != nil {
		b.Fatal(err)
	}
	b.ReportMetric(float64(bucketBytes(b, s, bucketSealed))/float64(readings), "B/sealed")
	return readings
}

// driftWalk makes the readings of tags that drift by decimals 0.01 apart with normal
// steps, in K.
type driftWalk struct {
	rng    *rand.Rand
	values []float64
	every  int
	n      int
}

func newDriftWalk(tags, every int) *driftWalk {
	w := &driftWalk{rng: rand.New(rand.NewPCG(3, 4)), values: make([]float64, tags), every: every}
	for i := range w.values {
		w.values[i] = 40 + float64(i%50)
	}
	return w
}

func (w *driftWalk) beats(seconds int) []Beat {
	beats := make([]Beat, seconds)
	for i := range beats {
		at := int64(1_760_000_000+w.n) * second
		beats[i].Through = at
		for tag := w.n % w.every; tag < len(w.values); tag += w.every {
			w.values[tag] += 0.094 * w.rng.NormFloat64()
			v := math.Round(w.values[tag]*100)/100 + 273.15
			beats[i].Readings = append(beats[i].Readings, Reading{Tag: uint32(tag), At: at, Value: v, Stamped: true})
		}
		w.n++
	}
	return beats
}

// benchmarkWhole adds what 10 loads bring: registers with each commit, and each
// minute their records and 4 kB of state.
func benchmarkWhole(b *testing.B, commits, seconds int) {
	s := newStore(b, Options{})
	w := newWalk(50)
	before, used := written(s.db, 0), s.Bytes()
	for i := range commits {
		batch := Batch{Beats: w.beats(seconds)}
		for load := range uint32(10) {
			batch.Registers = append(batch.Registers, Register{Load: load, Given: 1e9 * float64(i), Measured: float64(i * seconds)})
			if i*seconds%60 == 0 {
				v := 1e5 / float64(i+3)
				batch.Minutes = append(batch.Minutes, Minute{Load: load, Start: w.at / (60 * second) * 60 * second, Measured: 60,
					Given: 60 * v, Duty: v, DutyMin: v * 0.99, DutyMax: v * 1.01, DutyUncertainty: v / 99, Flow: v / 12345,
					Inlet: 350.1 + v/9999, Outlet: 340.2 + v/9999, Pressure: 5.1e5 + v})
			}
		}
		if i*seconds%60 == 0 {
			batch.Checkpoint = make([]byte, 4000)
		}
		commit(b, s, batch)
	}
	readings := float64(commits * seconds * 5)
	b.ReportMetric(float64(written(s.db, commits)-before)/readings, "B/reading")
	b.ReportMetric(float64(s.Bytes()-used)/readings, "B/kept")
}

// benchmarkPlain puts each reading under a key of its own, by time and tag.
func benchmarkPlain(b *testing.B, commits, seconds int) {
	o := boltOptions(0)
	o.NoFreelistSync = false // as bbolt has it by default
	db, err := bolt.Open(filepath.Join(b.TempDir(), "plain.db"), fileMode, o)
	if err != nil {
		b.Fatal(err)
	}
	defer db.Close()
	w := newWalk(50)
	for range commits {
		err := db.Update(func(tx *bolt.Tx) error {
			bucket, err := tx.CreateBucketIfNotExists([]byte("readings"))
			if err != nil {
				return err
			}
			bucket.FillPercent = appendFill
			for _, beat := range w.beats(seconds) {
				for _, r := range beat.Readings {
					key := binary.BigEndian.AppendUint32(timeKey(r.At), r.Tag)
					if err := bucket.Put(key, binary.LittleEndian.AppendUint64(nil, math.Float64bits(r.Value))); err != nil {
						return err
					}
				}
			}
			return nil
		})
		if err != nil {
			b.Fatal(err)
		}
	}
	readings := float64(commits * seconds * 5)
	b.ReportMetric(float64(written(db, commits))/readings, "B/reading")
}

// year is a file with what a bound leaves of a year of minutes of 10 loads and of the
// last weeks of 50 tags.
func year(b *testing.B, bound int64) (path string, end int64) {
	b.Helper()
	path = filepath.Join(b.TempDir(), "history.db")
	s, err := Open(path, Options{MaxBytes: bound})
	if err != nil {
		b.Fatal(err)
	}
	const start = 20_000 * day
	w := newWalk(50)
	w.at = start
	for hour := range int64(365 * 24) {
		at := start + hour*3600*second
		batch := Batch{Checkpoint: make([]byte, 4000)}
		if hour >= 300*24 {
			w.at = at
			batch.Beats = w.beats(3600)
		}
		for minute := range int64(60) {
			for load := range uint32(10) {
				v := 1e5 / (float64(load) + math.Sqrt(float64(hour*60+minute+3)))
				batch.Minutes = append(batch.Minutes, Minute{Load: load, Start: at + minute*60*second, Measured: 60,
					Given: 60 * v, Duty: v, DutyMin: v * 0.99, DutyMax: v * 1.01, DutyUncertainty: v / 99, Flow: v / 12345,
					Inlet: 350.1 + v/9999, Outlet: 340.2 + v/9999, Pressure: 5.1e5 + v})
			}
		}
		commit(b, s, batch)
		if hour%24 == 0 {
			if _, err := s.Trim(at); err != nil {
				b.Fatal(err)
			}
		}
	}
	if err := s.Close(); err != nil {
		b.Fatal(err)
	}
	return path, start + 365*day
}

// bucketBytes is what the pages of a bucket take.
func bucketBytes(b *testing.B, s *Store, name []byte) (n int) {
	b.Helper()
	err := s.db.View(func(tx *bolt.Tx) error {
		stats := tx.Bucket(name).Stats()
		n = stats.BranchAlloc + stats.LeafAlloc
		return nil
	})
	if err != nil {
		b.Fatal(err)
	}
	return n
}

// BenchmarkBuildHours brings a year of minutes without hours to hours, as the
// commits after an upgrade do. ms/worst is the longest of them.
func BenchmarkBuildHours(b *testing.B) {
	path, end := year(b, 1<<30)
	s := openStore(b, path, Options{MaxBytes: 1 << 30})
	for b.Loop() {
		if err := s.db.Update(func(tx *bolt.Tx) error { return putHourMark(tx, unbuilt) }); err != nil {
			b.Fatal(err)
		}
		start := time.Now()
		if n := len(drain(b, s.Hours(3, end-30*day, end))); n != 30*24 {
			b.Fatalf("%d hours", n)
		}
		b.ReportMetric(float64(time.Since(start).Microseconds())/1e3, "ms/query-before")
		worst, commits := time.Duration(0), 0
		for built := int64(0); built < end-hourNanos; commits++ {
			start := time.Now()
			commit(b, s, Batch{})
			worst = max(worst, time.Since(start))
			err := s.view(func(tx *bolt.Tx) error {
				mark, _ := readHourMark(tx)
				built = mark.built
				return nil
			})
			if err != nil {
				b.Fatal(err)
			}
		}
		b.ReportMetric(float64(worst.Microseconds())/1e3, "ms/worst")
		b.ReportMetric(float64(commits), "commits")
	}
}

// BenchmarkOpen opens a file with a year in it, as large as all of it and as the default
// bound leaves it, after a Close and as a process leaves it that is killed after a
// commit.
func BenchmarkOpen(b *testing.B) {
	for _, bound := range []int64{1 << 30, defaultBytes} {
		path, _ := year(b, bound)
		for _, tt := range []struct {
			what string
			end  func(*Store) error
		}{
			{"closed", (*Store).Close},
			{"killed", func(s *Store) error { return errors.Join(s.Commit(Batch{}), s.db.Close()) }},
		} {
			b.Run(fmt.Sprintf("%dMiB/%s", bound>>20, tt.what), func(b *testing.B) {
				for b.Loop() {
					s, err := Open(path, Options{MaxBytes: bound})
					if err != nil {
						b.Fatal(err)
					}
					b.StopTimer()
					b.ReportMetric(float64(s.Bytes()), "B/file")
					if err := tt.end(s); err != nil {
						b.Fatal(err)
					}
					b.StartTimer()
				}
			})
		}
	}
}

// BenchmarkYear reads 30 days of minutes and of hours of one load of ten, and one day
// of one tag of fifty, from a file with a year in it.
func BenchmarkYear(b *testing.B) {
	path, end := year(b, 1<<30)
	s := openStore(b, path, Options{MaxBytes: 1 << 30})
	b.Run("minutes", func(b *testing.B) {
		for b.Loop() {
			n := 0
			for _, err := range s.Minutes(3, end-30*day, end) {
				if n++; err != nil {
					b.Fatal(err)
				}
			}
			if n != 30*1440 {
				b.Fatalf("%d minutes", n)
			}
		}
	})
	b.Run("hours", func(b *testing.B) {
		for b.Loop() {
			if n := len(drain(b, s.Hours(3, end-30*day, end))); n != 30*24 {
				b.Fatalf("%d hours", n)
			}
		}
		b.ReportMetric(float64(bucketBytes(b, s, bucketHours)), "B/year-of-10")
	})
	b.Run("year-by-day", func(b *testing.B) {
		for b.Loop() {
			days := map[int64]*Hour{}
			for _, h := range drain(b, s.Hours(3, end-365*day, end)) {
				if days[h.Start/day] == nil {
					days[h.Start/day] = &Hour{}
				}
				days[h.Start/day].Add(h)
			}
			if len(days) != 365 {
				b.Fatalf("%d days", len(days))
			}
		}
		b.ReportMetric(float64(b.Elapsed().Microseconds())/1e3/float64(b.N), "ms")
	})
	b.Run("readings", func(b *testing.B) {
		for b.Loop() {
			if n := len(drain(b, s.Readings(3, end-30*day, end-29*day))); n != 8640 {
				b.Fatalf("%d readings", n)
			}
		}
	})
}

// BenchmarkHourEnds commits an hour's minutes of 1,000 loads and then the first of the
// next hour, which builds the hour. ms/minute is the mean commit without, ms/hour the one
// with it.
func BenchmarkHourEnds(b *testing.B) {
	for b.Loop() {
		b.StopTimer()
		s := newStore(b, Options{})
		var took [2]time.Duration
		for minute := range int64(61) {
			var batch Batch
			for load := range uint32(1000) {
				m := wave(load, 480_000*hourNanos+minute*60*second)
				m.Given, m.Inlet = math.Sqrt(m.Given+float64(load)), m.Inlet+1/float64(load+3)
				batch.Minutes = append(batch.Minutes, m)
			}
			start := time.Now()
			commit(b, s, batch)
			took[minute/60] += time.Since(start)
		}
		b.ReportMetric(float64(took[0].Microseconds())/60e3, "ms/minute")
		b.ReportMetric(float64(took[1].Microseconds())/1e3, "ms/hour")
		b.StartTimer()
	}
}

// BenchmarkSalvage salvages a year of minutes of 10 loads and weeks of readings of 50
// tags, of which the root page is wiped, so that every page is looked at.
func BenchmarkSalvage(b *testing.B) {
	path, _ := year(b, defaultBytes)
	whole, err := os.ReadFile(path)
	if err != nil {
		b.Fatal(err)
	}
	raw := openRaw(bytes.NewReader(whole), int64(len(whole)))
	for _, m := range raw.metas {
		clear(whole[int64(m.root)*raw.pageSize:][:raw.pageSize])
	}
	if err := os.WriteFile(path, whole, fileMode); err != nil {
		b.Fatal(err)
	}
	for b.Loop() {
		to := filepath.Join(b.TempDir(), "to.db")
		r, err := Salvage(path, to)
		if err != nil || r.Minutes.Count < 365*24*60*9 || r.Readings.Count == 0 { // the bound may have taken the first days
			b.Fatalf("%+v, %v", r, err)
		}
		b.ReportMetric(float64(len(whole)), "B/file")
		b.ReportMetric(float64(r.Readings.Count), "readings")
	}
}
