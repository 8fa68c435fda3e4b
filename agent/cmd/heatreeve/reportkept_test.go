package main

import (
	"context"
	"log/slog"
	"math"
	"net"
	"path/filepath"
	"slices"
	"testing"
	"time"

	"heatreeve/agent"
	"heatreeve/agent/demo"
	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/configs"
	"heatreeve/store"
)

// kept is where the README and the tests say that a plant keeps its history.
const kept = "/var/lib/heatreeve"

// keptFrom is where the history begins: local midnight of the day before the clock goes
// back in Dublin. It ends 80 hours later.
var keptFrom = time.Date(2026, 10, 23, 23, 0, 0, 0, time.UTC)

const keptMinutes = 80 * 60

// keep makes a data folder: one that the agent has run on, with what the demo's plant
// moves in 80 hours. An hour of each morning is cut short by five minutes, and one night is
// missing in the dryer's.
func keep(t *testing.T) string {
	t.Helper()
	return keepSince(t, keptFrom)
}

// keepSince is keep with another beginning.
func keepSince(t *testing.T, from time.Time) string {
	t.Helper()
	dir := t.TempDir()
	s, err := site.Parse(configs.DemoName, configs.Demo)
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
	plant, err := demo.NewPlant(s, 1)
	if err != nil {
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
	b := store.Batch{Beats: []store.Beat{{
		Through:  from.Add(keptMinutes*time.Minute + 30*time.Second).UnixNano(),
		Readings: append(keptReadings(tags["TT-201"], from), keptStream(tags, from)...),
	}}}
	for k := range keptMinutes {
		for i := range s.Loads {
			if m, ok := keptMinute(t, plant, &s.Loads[i], from, k); ok {
				m.Load = ids[s.Loads[i].Name]
				b.Minutes = append(b.Minutes, m)
			}
		}
	}
	if err := db.Commit(b); err != nil {
		t.Fatal(err)
	}
	return dir
}

// keptReadings are those of a temperature that swings by 0.3 K about 130 °C, four a minute.
func keptReadings(tag uint32, from time.Time) (all []store.Reading) {
	for k := range 4 * keptMinutes {
		at := from.Add(time.Duration(k)*15*time.Second + 250*time.Millisecond)
		all = append(all, store.Reading{Tag: tag, At: at.UnixNano(), Value: 403.15 + math.Round(30*math.Sin(float64(k)/7))/100, Stamped: k%500 != 499})
	}
	return all
}

// keptStream are the readings of the rest of the hot water in the last 70 minutes, four a
// minute.
func keptStream(tags map[string]uint32, from time.Time) (all []store.Reading) {
	for k := range 4 * 70 {
		at := from.Add((keptMinutes-70)*time.Minute + time.Duration(k)*15*time.Second)
		sway := func(period float64) float64 { return math.Round(100*math.Sin(float64(k)/period)) / 100 }
		for i, x := range []struct {
			tag   string
			value float64
		}{
			{"TT-202", 90.11 + 0.2*sway(5) + 273.15}, {"FT-201", (14.58 + 0.05*sway(3)) * (1.0 / 3600)}, {"PT-201", 1e5*(6.02+0.01*sway(4)) + 100.9e3},
		} {
			all = append(all, store.Reading{Tag: tags[x.tag], At: at.Add(time.Duration(i+1) * 1100 * time.Millisecond).UnixNano(), Value: x.value, Stamped: true})
		}
	}
	return all
}

// keptMinute is what a load moves in minute k, to the watt, at 0.8 % of standard
// uncertainty, and between which temperatures where it is the hot water.
func keptMinute(t *testing.T, plant *demo.Plant, l *site.HeatLoad, from time.Time, k int) (m store.Minute, ok bool) {
	t.Helper()
	at := from.Add(time.Duration(k) * time.Minute)
	duty, err := plant.Duty(l.Name, (at.Sub(from)+(24*time.Hour-5*time.Hour-30*time.Minute))%(24*time.Hour))
	if err != nil {
		t.Fatal(err)
	}
	duty = math.Round(duty)
	m = store.Minute{Start: at.UnixNano(), Measured: 60, Duty: duty, DutyMin: 0.99 * duty, DutyMax: 1.01 * duty, DutyUncertainty: 0.008 * duty}
	if l.Name == "hot-water" { // by 169.223 kJ/kg
		m.Flow, m.Inlet, m.Outlet, m.Pressure = math.Round(duty/169.223)/1000, 403.15, 363.15, 700e3
	}
	if l.Stream.Gives {
		m.Given = 60 * duty
	} else {
		m.Taken = 60 * duty
	}
	heat := 60 * duty // the shares of flow and outlet are 0.8 and 0.6 of what lasts
	m.Systematic[loads.PartFlow], m.Systematic[loads.PartOutlet] = 0.8*0.008*heat, -0.6*0.008*heat
	m.Random = 0.005 * heat * 0.005 * heat
	silent := k%1440 >= 500 && k%1440 < 505 || l.Name == "dryer-air" && k >= 1300 && k < 1900
	return m, !silent
}

// inHistory has a command line about /var/lib/heatreeve run on what keep makes.
func inHistory(t *testing.T, line []string) []string {
	t.Helper()
	if i := slices.Index(line, kept); i >= 0 {
		line = slices.Clone(line)
		line[i] = keep(t)
	}
	return line
}

func report(t *testing.T, args ...string) (status int, stdout, stderr string) {
	t.Helper()
	return invoke(append([]string{"report"}, args...)...)
}
