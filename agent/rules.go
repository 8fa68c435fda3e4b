package agent

import (
	"crypto/sha256"
	"encoding/binary"
	"fmt"
	"hash"
	"math"

	"heatreeve/agent/loads"
	"heatreeve/thermo"
)

// bookkeeping is raised whenever the engine books the same readings otherwise than
// the one before it, for a reason that is not in the properties of a fluid.
const bookkeeping = 5

// rulesOf is a digest of all that heat is booked by: the site file, the engine, and
// the properties of the fluids to the last bit. Beats that were booked by other rules
// are not worked again: a total that has been seen may not fall because a later
// release, or another processor, knows a fluid a little differently.
func rulesOf(site [32]byte, cfg *loads.Config) [32]byte {
	h := sha256.New()
	h.Write(site[:])
	write(h, bookkeeping)
	for i := range cfg.Loads {
		probeLoad(h, &cfg.Loads[i])
	}
	return [32]byte(h.Sum(nil))
}

// rulesOfLoad is a digest of what a single load is booked by. Where only other parts of the
// site file have changed, it goes on with what it waits for.
func rulesOfLoad(cfg *loads.Config, load int) [32]byte {
	l := cfg.Loads[load]
	h := sha256.New()
	write(h, bookkeeping)
	probeLoad(h, &l)
	fmt.Fprintln(h, cfg.Grid, cfg.Bridge)
	var vessel loads.Vessel
	if l.Vessel != nil {
		vessel = *l.Vessel
		l.Vessel, vessel.Fluid = &vessel, nil
	}
	named(h, cfg.Tags, sourcesOf(&l))
	l.Vessel = nil
	fmt.Fprintf(h, "%+v\n", vessel)
	l.Stream.Fluid = nil
	fmt.Fprintf(h, "%+v\n", bookedBy(l))
	if l.HasBypass {
		fmt.Fprintln(h, "bypass", l.Bypass, l.Settles)
	}
	return [32]byte(h.Sum(nil))
}

// booked are the fields of a load that its heat is booked by: all but its drivers, and its bypass
// where it has one.
type booked struct {
	Name       string
	Stream     loads.Stream
	Vessel     *loads.Vessel
	Witness    loads.Source
	HasWitness bool
	Running    loads.Source
	HasRunning bool
}

func bookedBy(l loads.Load) booked {
	return booked{l.Name, l.Stream, l.Vessel, l.Witness, l.HasWitness, l.Running, l.HasRunning}
}

// sourcesOf returns all that the heat of a load is worked from.
func sourcesOf(l *loads.Load) (all []*loads.Source) {
	if l.HasWitness {
		all = append(all, &l.Witness)
	}
	if l.HasRunning {
		all = append(all, &l.Running)
	}
	if l.HasBypass {
		all = append(all, &l.Bypass)
	}
	if v := l.Vessel; v != nil {
		return append(all, &v.Temperature, &v.Pressure, &v.Content)
	}
	s := &l.Stream
	all = append(all, &s.Flow, &s.Inlet, &s.Outlet, &s.Pressure, &s.OutletPressure)
	for _, more := range [...]struct {
		has bool
		src *loads.Source
	}{{s.HasPump, &s.Pump}, {s.HasCoil, &s.Coil}, {s.HumidityKind != 0, &s.Humidity}} {
		if more.has {
			all = append(all, more.src)
		}
	}
	return all
}

// named writes the tags that sources read, and takes their indexes out of the sources, since
// these tell only where in the site file a tag stands.
func named(h hash.Hash, tags []loads.Tag, sources []*loads.Source) {
	for _, src := range sources {
		if src.Tag >= 0 {
			namedTag(h, tags, src.Tag)
			for i := range tags {
				if standBeside(tags, i, src.Tag) {
					namedTag(h, tags, i)
				}
			}
		}
		src.Tag = min(src.Tag, 0)
	}
}

// standBeside reports whether either of two tags names the other as the sensor beside it.
func standBeside(tags []loads.Tag, i, j int) bool {
	return tags[i].HasBeside && tags[i].Beside == j || tags[j].HasBeside && tags[j].Beside == i
}

// namedTag writes a tag, and that of its source's signs of life.
func namedTag(h hash.Hash, tags []loads.Tag, i int) {
	t := tags[i]
	if t.Counter != nil {
		fmt.Fprintf(h, "%+v ", *t.Counter)
	}
	if t.Screen != nil {
		fmt.Fprintf(h, "%+v ", *t.Screen)
	}
	alive := t.Alive
	t.Alive, t.Beside, t.Counter, t.Screen = 0, 0, nil, nil
	fmt.Fprintf(h, "%+v\n", t)
	if t.OnChange {
		namedTag(h, tags, alive)
	}
}

func probeLoad(h hash.Hash, l *loads.Load) {
	f := l.Stream.Fluid
	if l.Vessel != nil {
		f = l.Vessel.Fluid
	}
	probe(h, f)
	if air, ok := f.(thermo.Humid); ok {
		if carrying, err := air.Carrying(thermo.Moisture{Kind: thermo.RelativeHumidity, Value: 0.5}, 293.15, 100e3); err == nil {
			probe(h, carrying)
		}
	}
}

// probe writes the balances of states that most plants are near.
func probe(h hash.Hash, f thermo.Fluid) {
	balance, b := thermo.BalanceOf(f), f.Bounds()
	for _, p := range [...]float64{100e3, 400e3, 2e6} {
		lo, hi := f.Span(p)
		lo, hi = max(lo, b.MinT), min(hi, b.MaxT)
		for _, x := range [...]float64{0.03, 0.1, 0.3, 0.6, 0.9} {
			if s, err := balance(lo+x*(hi-lo), p); err == nil {
				write(h, s.Enthalpy)
				write(h, s.Density)
			}
		}
	}
}

func write(h hash.Hash, v float64) {
	h.Write(binary.LittleEndian.AppendUint64(nil, math.Float64bits(v)))
}
