package bench

import (
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"testing"
	"time"

	"heatreeve/agent"
	"heatreeve/store"
)

// days is how long the history reaches back: a year, or a day in a short run.
func days() int {
	if testing.Short() {
		return 1
	}
	return 365
}

// BenchmarkStart tells how long it takes from the start of the program to the first scrape
// that shows the registers, with a year of history of 10 loads and 40 tags that read once in
// 10 s: after a clean stop, and after the process was killed ten minutes after the last checkpoint.
// ms-least is the quickest of the starts, ms-cpu the least that one of them used of the processor,
// MiB/file the length of the history's file.
func BenchmarkStart(b *testing.B) {
	p := newPlant(10)
	site := p.siteFile(b, freeAddress(b), "history: {size: 1 GiB}") // no broker is there
	closed, killed := filepath.Join(b.TempDir(), "closed.db"), filepath.Join(b.TempDir(), "killed.db")
	makeYear(b, site, closed, killed)
	for _, how := range []struct{ name, file string }{{"closed", closed}, {"killed", killed}} {
		b.Run(how.name, func(b *testing.B) {
			least, cpu := time.Duration(math.MaxInt64), time.Duration(math.MaxInt64)
			for b.Loop() {
				b.StopTimer()
				data, listen := b.TempDir(), freeAddress(b)
				copyFile(b, how.file, filepath.Join(data, agent.HistoryFile))
				b.StartTimer()
				begun := time.Now()
				p := launch(b, program(b, "heatreeve"), "run", "--site", site, "--data", data, "--listen", listen)
				awaitRegisters(b, listen)
				least, cpu = min(least, time.Since(begun)), min(cpu, p.cpu(b))
				b.StopTimer()
				p.end()
				if err := os.RemoveAll(data); err != nil {
					b.Fatal(err)
				}
				b.StartTimer()
			}
			b.ReportMetric(float64(least.Microseconds())/1e3, "ms-least")
			b.ReportMetric(float64(cpu.Microseconds())/1e3, "ms-cpu")
			info, err := os.Stat(how.file)
			if err != nil {
				b.Fatal(err)
			}
			b.ReportMetric(float64(info.Size())/(1<<20), "MiB/file")
		})
	}
}

func awaitRegisters(b *testing.B, listen string) {
	b.Helper()
	eventually(b, "a scrape with registers", func() bool {
		sums, ok := scrape(listen)
		_, shown := sums["heatreeve_load_heat_joules_total"]
		return ok && shown
	})
}

// makeYear writes the history as a clean stop leaves it, and as a kill does.
func makeYear(b *testing.B, site, closed, killed string) {
	b.Helper()
	data := b.TempDir()
	path := filepath.Join(data, agent.HistoryFile)
	runOnce(b, site, data, false) // for a checkpoint of the engine, which no one else can write
	w := openYear(b, path)
	for hour := range days() * 24 {
		w.commit(b, hour, 3600)
	}
	w.close(b)
	runOnce(b, site, data, true)
	copyFile(b, path, closed)
	w = openYear(b, path)
	for k := range 60 {
		w.beats(b, time.Now().Unix()+int64(10*k), 10)
	}
	copyFile(b, path, killed) // with what a Close would have added left out
	w.close(b)
}

// runOnce starts the agent on a history and stops it.
func runOnce(b *testing.B, site, data string, registers bool) {
	b.Helper()
	listen := freeAddress(b)
	p := launch(b, program(b, "heatreeve"), "run", "--site", site, "--data", data, "--listen", listen)
	eventually(b, "the agent serves", func() bool { _, ok := scrape(listen); return ok })
	if registers {
		awaitRegisters(b, listen)
	}
	p.stop(b)
}

// yearWriter writes what the agent would have, in the name of its tags and loads.
type yearWriter struct {
	db          *store.Store
	state       []byte
	tags, loads []uint32
	end         int64 // Unix
	walk        *drift
	rng         *rand.Rand
}

func openYear(b *testing.B, path string) *yearWriter {
	b.Helper()
	db, err := store.Open(path, store.Options{MaxBytes: 1 << 30}) // all of the year
	if err != nil {
		b.Fatal(err)
	}
	w := &yearWriter{db: db, end: time.Now().Unix() / 3600 * 3600, walk: newDrift(), rng: rand.New(rand.NewPCG(5, 7))}
	var tags, loads []string
	for i := range 10 {
		loads = append(loads, fmt.Sprintf("load-%d", i))
		for _, kind := range []string{"F", "T", "R", "P"} {
			tags = append(tags, fmt.Sprintf("%s-%d", kind, i))
		}
	}
	if w.tags, err = db.IDs("tag", tags); err != nil {
		b.Fatal(err)
	}
	if w.loads, err = db.IDs("load", loads); err != nil {
		b.Fatal(err)
	}
	state, ok, err := db.Checkpoint()
	if err != nil || !ok {
		b.Fatalf("no checkpoint: %v", err)
	}
	w.state = append(state[:0:0], state...)
	return w
}

func (w *yearWriter) close(b *testing.B) {
	b.Helper()
	if err := w.db.Close(); err != nil {
		b.Fatal(err)
	}
}

// commit writes an hour: readings, minutes, registers and the checkpoint.
func (w *yearWriter) commit(b *testing.B, hour, seconds int) {
	b.Helper()
	from := w.end - int64(days()*24-hour)*3600
	batch := store.Batch{Beats: w.readings(from, seconds), Checkpoint: w.state}
	for k, load := range w.loads {
		for minute := range int64(60) {
			v := 640e3 + 1e3*w.walk.values[k] + 10*float64(minute)
			batch.Minutes = append(batch.Minutes, w.minute(load, (from+60*minute)*int64(time.Second), v))
		}
		batch.Registers = append(batch.Registers, store.Register{Load: load, Given: 640e3 * 3600 * float64(hour+1), Measured: 3600 * float64(hour+1)})
	}
	commit(b, w.db, batch)
}

// minute is one of a water circuit about a duty of v. Each of its figures wanders by itself, so
// that none can be told from the others, and the heat has digits to the last.
func (w *yearWriter) minute(load uint32, start int64, v float64) store.Minute {
	near := func(x, share float64) float64 { return x * (1 + share*w.rng.NormFloat64()) }
	v = near(v, 2e-3)
	flow, inlet := near(v/125_600, 1e-3), near(353.15, 1e-4)
	random := near(60*2e-3*v, 1e-2)
	m := store.Minute{
		Load: load, Start: start, Measured: 60, Given: 60 * v, Duty: v,
		DutyMin: v - math.Abs(near(1e-2*v, 0.3)), DutyMax: v + math.Abs(near(1e-2*v, 0.3)), DutyUncertainty: near(v/99, 1e-3),
		Flow: flow, Inlet: inlet, Outlet: near(inlet-v/flow/4190, 1e-5), Pressure: near(5.1e5, 1e-4), Random: random * random,
	}
	perKelvin := 60 * 4190 * flow
	for part, x := range map[int]float64{0: 0.005 * m.Given, 1: 0.2 * perKelvin, 2: -0.2 * perKelvin, 8: 0.05 * perKelvin, 9: 0.001 * m.Given, 10: 0.0003 * m.Given} {
		m.Systematic[part] = x
	}
	return m
}

// beats writes seconds of readings that no checkpoint stands for.
func (w *yearWriter) beats(b *testing.B, from int64, seconds int) {
	b.Helper()
	commit(b, w.db, store.Batch{Beats: w.readings(from, seconds)})
}

func (w *yearWriter) readings(from int64, seconds int) []store.Beat {
	beats := make([]store.Beat, 0, seconds/10)
	for s := int64(0); s < int64(seconds); s += 10 {
		at := (from + s) * int64(time.Second)
		beat := store.Beat{Through: at}
		w.walk.next(func(tag int, _ int64, celsius float64) {
			if tag < len(w.tags) {
				beat.Readings = append(beat.Readings, store.Reading{Tag: w.tags[tag], At: at, Value: [...]float64{celsius / 3600 / 10, celsius + 273.15, celsius + 250, celsius * 1e4}[tag%4], Stamped: true})
			}
		})
		beats = append(beats, beat)
	}
	return beats
}

func copyFile(b *testing.B, from, to string) {
	b.Helper()
	in, err := os.Open(from)
	if err != nil {
		b.Fatal(err)
	}
	defer in.Close()
	out, err := os.Create(to)
	if err != nil {
		b.Fatal(err)
	}
	if _, err := io.Copy(out, in); err != nil {
		b.Fatal(err)
	}
	if err := out.Close(); err != nil {
		b.Fatal(err)
	}
}
