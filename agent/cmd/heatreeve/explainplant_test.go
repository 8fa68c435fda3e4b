package main

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"hash/fnv"
	"io/fs"
	"log/slog"
	"math"
	"net"
	"path/filepath"
	"slices"
	"testing"
	"time"

	"heatreeve/agent"
	"heatreeve/agent/site"
	"heatreeve/configs"
	"heatreeve/store"
	"heatreeve/thermo"
	"heatreeve/thermo/unit"
)

// played is a plant of an example file whose instruments were heard for a while, and whose
// history lies in a folder.
type played struct {
	site *site.Site
	data string
	from time.Time // of the first readings
	to   time.Time // of the last
}

// playedFrom is on a minute, in winter.
var playedFrom = time.Date(2026, 12, 1, 9, 0, 0, 0, time.UTC)

const playedMinutes = 75

// siteFiles are the names of the example site files.
func siteFiles(t *testing.T) []string {
	t.Helper()
	names, err := fs.Glob(configs.Files, "*.yaml")
	if err != nil || len(names) < 4 {
		t.Fatalf("example site files: %q, %v", names, err)
	}
	return names
}

// play makes the history of an example plant: the agent runs on it once, so that it knows
// names and site file, and the readings come after that. What every says tells how often a
// tag is heard, s being seconds since the beginning; nil is each ten seconds. Those that are still
// show no flow, or one temperature.
func play(t *testing.T, file string, heard func(tag *site.Tag, s int) bool, still ...string) *played {
	t.Helper()
	text, err := configs.Files.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	s, err := site.Parse(file, text)
	if err != nil {
		t.Fatal(err)
	}
	p := &played{site: s, data: t.TempDir(), from: playedFrom, to: playedFrom.Add(playedMinutes * time.Minute)}
	runOnce(t, s, p.data)
	db, err := store.Open(filepath.Join(p.data, agent.HistoryFile), store.Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer db.Close()
	ids, err := db.Names("tag")
	if err != nil {
		t.Fatal(err)
	}
	values := p.values(t)
	for i := range s.Tags {
		if first := values[i](0); slices.Contains(still, s.Tags[i].Name) {
			if s.Tags[i].Unit.Dimension != unit.Temperature {
				first = 0
			}
			values[i] = func(int) float64 { return first }
		}
	}
	var beats []store.Beat
	for m := range playedMinutes {
		b := store.Beat{Through: p.from.Add(time.Duration(m+1) * time.Minute).UnixNano()}
		for sec := 60 * m; sec < 60*(m+1); sec++ {
			for i := range s.Tags {
				tag := &s.Tags[i]
				if heard == nil && sec%10 == i%10 || heard != nil && heard(tag, sec) {
					at := p.from.Add(time.Duration(sec)*time.Second + time.Duration(17*i%900)*time.Millisecond)
					b.Readings = append(b.Readings, store.Reading{Tag: ids[tag.Name], At: at.UnixNano(), Value: values[i](sec), Stamped: true})
				}
			}
		}
		beats = append(beats, b)
	}
	beats = append(beats, store.Beat{Through: p.to.UnixNano()})
	if err := db.Commit(store.Batch{Beats: beats}); err != nil {
		t.Fatal(err)
	}
	return p
}

// runOnce has the agent run on a data folder until it serves, without a broker.
func runOnce(t *testing.T, s *site.Site, data string) {
	t.Helper()
	quiet := *s
	quiet.Broker = site.Broker{URL: "mqtt://127.0.0.1:1", ClientID: "test"}
	quiet.Brokers = slices.Clone(s.Brokers) // tags name them
	for i := range quiet.Brokers {
		b := &quiet.Brokers[i]
		*b = site.Broker{Name: b.Name, URL: quiet.Broker.URL, ClientID: fmt.Sprintf("test-%d", i)}
	}
	ctx, cancel := context.WithCancel(t.Context())
	defer cancel()
	a, err := agent.New(&quiet, agent.Options{Data: data, Listen: "127.0.0.1:0", Log: slog.New(slog.DiscardHandler), Ready: func(net.Addr) { cancel() }})
	if err != nil {
		t.Fatal(err)
	}
	if err := a.Run(ctx); err != nil {
		t.Fatal(err)
	}
}

// values are what each tag reads, SI, after so many seconds: what its load is designed for,
// in the steps of its numbers, with a little noise.
func (p *played) values(t *testing.T) []func(s int) float64 {
	t.Helper()
	values := make([]func(int) float64, len(p.site.Tags))
	put := func(src site.Source, mean func(s float64) float64, noise float64) {
		if src.Tag < 0 || values[src.Tag] != nil {
			return
		}
		tag := &p.site.Tags[src.Tag]
		values[src.Tag] = func(s int) float64 { return inSteps(tag, mean(float64(s))+noise*jitter(tag.Name, s)) }
	}
	constant := func(x float64) func(float64) float64 { return func(float64) float64 { return x } }
	for i := range p.site.Loads {
		l := &p.site.Loads[i]
		if v := l.Vessel; v != nil {
			put(v.Temperature, func(s float64) float64 { return 333.15 + 0.006*s }, 0.02)
			put(v.Pressure, func(s float64) float64 { return 1.3e6 + 30*s }, 200)
			size := 1000.0
			if v.ContentKind == unit.Volume {
				size = 6
			}
			put(v.Content, constant(size), 1e-4*size)
			continue
		}
		s, d := l.Stream, l.Design
		put(s.Inlet, constant(d.Inlet), 0.05)
		put(s.Outlet, constant(d.Outlet), 0.05)
		put(s.Pressure, constant(max(d.Pressure, 3e5)), 500)
		put(s.OutletPressure, constant(max(d.Pressure, 3e5)), 500)
		put(s.Humidity, constant(0.55), 0.005)
		put(s.Coil, constant(280.15), 0.1)
		put(s.Pump, constant(2200), 5)
		put(l.Bypass, constant(0), 0)
		drivers(&d, put)
		if s.Flow.Tag >= 0 {
			tag := &p.site.Tags[s.Flow.Tag]
			if c := tag.Counter; c != nil {
				put(s.Flow, func(s float64) float64 { return math.Mod(c.Modulus-0.3+0.4*c.Largest*s, c.Modulus) }, 0)
			} else {
				put(s.Flow, constant(designFlow(t, s, &l.Design)), 1e-4*designFlow(t, s, &l.Design))
			}
		}
	}
	for i := range p.site.Tags {
		if t := &p.site.Tags[i]; t.HasBeside {
			values[t.Beside] = values[i]
		}
	}
	for i := range values {
		if values[i] == nil {
			values[i] = func(int) float64 { return 1 } // signs of life, and what no load reads
		}
	}
	return values
}

// drivers puts what tells the expected duty in the middle of what is known.
func drivers(d *site.Design, put func(site.Source, func(float64) float64, float64)) {
	if d.Table != nil {
		for k, tag := range d.Table.Against {
			at := d.Table.At[k]
			put(site.Source{Tag: tag}, func(float64) float64 { return (at[0] + at[len(at)-1]) / 2 }, 0)
		}
	}
	if d.Baseline != nil {
		for _, t := range d.Baseline.Terms {
			put(site.Source{Tag: t.Tag}, func(float64) float64 { return (t.From + t.To) / 2 }, 0)
		}
	}
}

// designFlow is the flow by which the stream moves its design duty, SI.
func designFlow(t *testing.T, s *site.Stream, d *site.Design) float64 {
	t.Helper()
	p := max(d.Pressure, s.Pressure.Value, 90e3)
	at := thermo.BalanceOf(s.Fluid)
	if air, ok := s.Fluid.(thermo.Humid); ok {
		wet, err := air.Carrying(thermo.Moisture{Kind: s.HumidityKind, Value: 0.55}, d.Inlet, p)
		if err != nil {
			t.Fatal(err)
		}
		at = func(T, p float64) (thermo.Balance, error) {
			x, err := wet.Sensible(T, p)
			return thermo.Balance{Enthalpy: x.Enthalpy, Density: x.Density}, err
		}
	}
	in, err1 := at(d.Inlet, p)
	out, err2 := at(d.Outlet, p)
	if err := errors.Join(err1, err2); err != nil {
		t.Fatal(err)
	}
	m := cmp.Or(d.Duty, 100e3) / math.Abs(in.Enthalpy-out.Enthalpy)
	switch {
	case s.FlowKind == unit.VolumeFlow && s.MeterAtOutlet:
		return m / out.Density
	case s.FlowKind == unit.VolumeFlow:
		return m / in.Density
	case s.FlowKind == unit.MolarFlow:
		return m / s.Fluid.MolarMass()
	}
	return m
}

// inSteps is x as a number with three decimals in the tag's unit becomes SI.
func inSteps(tag *site.Tag, x float64) float64 {
	if tag.Scale == 0 {
		return x
	}
	n := math.Round((x-tag.Offset)/tag.Scale*1000) / 1000
	return tag.Scale*n + tag.Offset
}

// jitter is some number between -1 and 1 that is always the same.
func jitter(name string, s int) float64 {
	h := fnv.New32a()
	h.Write([]byte(name))
	h.Write([]byte{byte(s), byte(s >> 8), byte(s >> 16)})
	return float64(h.Sum32())/(1<<31) - 1
}
