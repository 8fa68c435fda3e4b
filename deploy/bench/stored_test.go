package bench

import (
	"encoding/binary"
	"math"
	"math/rand/v2"
	"path/filepath"
	"testing"
	"time"

	"github.com/prometheus/prometheus/tsdb/chunkenc"
	bolt "go.etcd.io/bbolt"

	"heatreeve/store"
)

// drift makes the readings of 50 tags, each once in 10 s: temperatures in °C that drift by
// decimals 0.01 apart with normal steps of 0.094.
type drift struct {
	rng    *rand.Rand
	values [50]float64
	second int64 // Unix
}

func newDrift() *drift {
	d := &drift{rng: rand.New(rand.NewPCG(3, 4)), second: 1_760_000_000}
	for i := range d.values {
		d.values[i] = 40 + float64(i)
	}
	return d
}

// next goes on 10 s and gives the readings.
func (d *drift) next(reading func(tag int, second int64, celsius float64)) {
	d.second += 10
	for i := range d.values {
		d.values[i] += 0.094 * d.rng.NormFloat64()
		reading(i, d.second, math.Round(d.values[i]*100)/100)
	}
}

// rounds is how many times each tag is read: a week, or a day in a short run.
func rounds() int {
	if testing.Short() {
		return 8640
	}
	return 7 * 8640
}

// inOneCommit is how many rounds one transaction stores: an hour of them, since only the room
// that they take counts here.
const inOneCommit = 360

// BenchmarkStored tells what a reading takes when it is stored: in the agent's history, all of
// the file that is in use, the hours that are not sealed yet included; in chunks of 120 by the
// XOR scheme as Prometheus has it, in °C and in K; and under a key of its own in bbolt.
func BenchmarkStored(b *testing.B) {
	for _, way := range []struct {
		name  string
		store func(b *testing.B) (bytes int64)
	}{
		{"history", inHistory},
		{"xor-celsius", func(b *testing.B) int64 { return inChunks(b, 0) }},
		{"xor-kelvin", func(b *testing.B) int64 { return inChunks(b, 273.15) }},
		{"plain-keys", underKeys},
	} {
		b.Run(way.name, func(b *testing.B) {
			for b.Loop() {
				b.ReportMetric(float64(way.store(b))/float64(rounds()*50), "B/sample")
			}
		})
	}
}

func inHistory(b *testing.B) (bytes int64) {
	s, err := store.Open(filepath.Join(b.TempDir(), "history.db"), store.Options{})
	if err != nil {
		b.Fatal(err)
	}
	defer s.Close()
	before, d := s.Bytes(), newDrift()
	var batch store.Batch
	for range rounds() {
		var beat store.Beat
		d.next(func(tag int, second int64, celsius float64) {
			beat.Through = second * int64(time.Second)
			beat.Readings = append(beat.Readings, store.Reading{Tag: uint32(tag), At: beat.Through, Value: celsius + 273.15, Stamped: true})
		})
		batch.Beats, batch.Checkpoint = append(batch.Beats, beat), []byte{}
		if len(batch.Beats) == inOneCommit {
			commit(b, s, batch)
			batch.Beats = batch.Beats[:0]
		}
	}
	return s.Bytes() - before
}

func commit(b *testing.B, s *store.Store, batch store.Batch) {
	b.Helper()
	if err := s.Commit(batch); err != nil {
		b.Fatal(err)
	}
}

func inChunks(b *testing.B, offset float64) (bytes int64) {
	var chunks [50]*chunkenc.XORChunk
	var appenders [50]chunkenc.Appender
	d := newDrift()
	for range rounds() {
		d.next(func(tag int, second int64, celsius float64) {
			if c := chunks[tag]; c == nil || c.NumSamples() == 120 {
				if c != nil {
					bytes += int64(len(c.Bytes()))
				}
				chunks[tag] = chunkenc.NewXORChunk()
				var err error
				if appenders[tag], err = chunks[tag].Appender(); err != nil {
					b.Fatal(err)
				}
			}
			appenders[tag].Append(0, second*1000, celsius+offset)
		})
	}
	for _, c := range chunks {
		bytes += int64(len(c.Bytes()))
	}
	return bytes
}

// underKeys has keys by time and tag, so that pages fill up.
func underKeys(b *testing.B) (bytes int64) {
	db, err := bolt.Open(filepath.Join(b.TempDir(), "plain.db"), 0o600, nil)
	if err != nil {
		b.Fatal(err)
	}
	defer db.Close()
	d := newDrift()
	for range rounds() / inOneCommit {
		err := db.Update(func(tx *bolt.Tx) error {
			bucket, err := tx.CreateBucketIfNotExists([]byte("readings"))
			if err != nil {
				return err
			}
			bucket.FillPercent = 0.95
			for range inOneCommit {
				d.next(func(tag int, second int64, celsius float64) {
					key := binary.BigEndian.AppendUint32(binary.BigEndian.AppendUint64(nil, uint64(second)), uint32(tag))
					if err == nil {
						err = bucket.Put(key, binary.LittleEndian.AppendUint64(nil, math.Float64bits(celsius)))
					}
				})
			}
			return err
		})
		if err != nil {
			b.Fatal(err)
		}
	}
	err = db.View(func(tx *bolt.Tx) error {
		s := tx.Bucket([]byte("readings")).Stats()
		bytes = int64(s.BranchAlloc + s.LeafAlloc)
		return nil
	})
	if err != nil {
		b.Fatal(err)
	}
	return bytes
}
