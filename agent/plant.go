package agent

import (
	"fmt"

	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/ingest"
	"heatreeve/ingest/screen"
	"heatreeve/ingest/sparkplug"
	"heatreeve/thermo/unit"
)

// plantOf is the site as the engine sees it.
func plantOf(s *site.Site) loads.Config {
	cfg := loads.Config{Grid: int64(s.Timing.Grid), Bridge: int64(s.Timing.Bridge)}
	for i := range s.Tags {
		cfg.Tags = append(cfg.Tags, tagOf(&s.Tags[i]))
	}
	for i := range s.Loads {
		cfg.Loads = append(cfg.Loads, loadOf(&s.Loads[i]))
	}
	tabulate(s, cfg.Loads)
	return cfg
}

func tagOf(t *site.Tag) loads.Tag {
	tag := loads.Tag{
		Name: t.Name, MaxAge: int64(t.MaxAge), Accuracy: loads.Accuracy(t.Accuracy),
		Resolution: t.Resolution, Deadband: t.Deadband, OnChange: t.OnChange, Alive: t.Alive,
		Beside: t.Beside, HasBeside: t.HasBeside, Screen: screenOf(t),
		Meaning: meaning(t),
	}
	if c := t.Counter; c != nil {
		tag.Counter = &loads.Counter{Modulus: c.Modulus, Largest: c.Largest, Each: c.Each}
	}
	return tag
}

// screenOf is what the readings of a tag are tested against, nil for nothing.
func screenOf(t *site.Tag) *screen.Limits {
	s := t.Screen
	if s == nil {
		return nil
	}
	return &screen.Limits{
		Low: s.Low, High: s.High, HasRange: s.Low < s.High, Fastest: s.Fastest, StuckAfter: int64(s.Stuck), Spikes: s.Spikes,
		Resolution: t.Resolution, Gap: int64(t.Holds()),
	}
}

// meaning tells what the tag's numbers are of: in which unit, and whether they count. Gauge
// pressures are the same whatever the barometer that they stand on.
func meaning(t *site.Tag) string {
	kind := "reading"
	if t.Counter != nil {
		kind = "count"
		if t.Counter.Each {
			kind = "count since the last message"
		}
	}
	if t.Signal != nil {
		kind = t.Signal.Word
	}
	return fmt.Sprintf("%s in %s, %g x + %g, gauge %t", kind, t.Unit.Dimension.SI(), t.Scale, t.Unit.Offset, t.Unit.Gauge)
}

func loadOf(l *site.HeatLoad) loads.Load {
	load := loads.Load{Name: l.Name, Witness: loads.Source(l.Witness), HasWitness: l.HasWitness, Running: loads.Source(l.Running), HasRunning: l.HasRunning, Bypass: loads.Source(l.Bypass), HasBypass: l.HasBypass, Settles: int64(l.Settles), Drivers: driversOf(&l.Design)}
	if l.Vessel != nil {
		load.Vessel = vesselOf(l.Vessel)
	} else {
		load.Stream = streamOf(l.Stream)
	}
	return load
}

func vesselOf(v *site.Vessel) *loads.Vessel {
	return &loads.Vessel{
		Fluid: v.Fluid, Temperature: loads.Source(v.Temperature), Pressure: loads.Source(v.Pressure), Rigid: v.Rigid,
		Content: loads.Source(v.Content), ContentKind: contentKinds[v.ContentKind],
		Shell: v.Shell, Over: int64(v.Over), Still: v.Still, Gives: v.Gives, IdleBelow: v.IdleBelow, Margin: v.Margin,
	}
}

var contentKinds = map[unit.Dimension]loads.ContentKind{unit.Mass: loads.ContentMass, unit.Volume: loads.ContentVolume}

func streamOf(s *site.Stream) loads.Stream {
	return loads.Stream{
		Fluid: s.Fluid, Flow: loads.Source(s.Flow), FlowKind: flowKinds[s.FlowKind],
		Inlet: loads.Source(s.Inlet), Outlet: loads.Source(s.Outlet),
		Pressure: loads.Source(s.Pressure), OutletPressure: loads.Source(s.OutletPressure),
		Humidity: loads.Source(s.Humidity), HumidityKind: s.HumidityKind,
		Coil: loads.Source(s.Coil), HasCoil: s.HasCoil,
		MeterAtOutlet: s.MeterAtOutlet, CalibratedAt: s.CalibratedAt, Gives: s.Gives, BothWays: s.BothWays, Margin: s.Margin, IdleBelow: s.IdleBelow, Pair: s.Pair,
		Corrections: loads.Corrections{
			Pump: loads.Source(s.Pump), HasPump: s.HasPump, Hold: s.Hold, Stored: s.Stored, StoredOver: int64(s.StoredOver),
		},
	}
}

var flowKinds = map[unit.Dimension]loads.FlowKind{
	unit.MassFlow: loads.MassFlow, unit.VolumeFlow: loads.VolumeFlow, unit.MolarFlow: loads.MolarFlow,
}

// signalsOf are the tags as the session reads them.
func signalsOf(s *site.Site) []ingest.Tag {
	var tags []ingest.Tag
	for i := range s.Tags {
		t := &s.Tags[i]
		tag := ingest.Tag{
			Name: t.Name, Topic: t.Topic, Value: t.Value, Time: t.Time, TimeFormat: t.TimeFormat,
			UnitAt: t.UnitAt, Unit: t.Numbers, Quality: qualityOf(t.Quality), Samples: (*ingest.Samples)(t.Samples),
			Scale: t.Scale, Offset: t.Offset, Min: t.Min, Max: t.Max, QoS: t.QoS,
			Holds: t.OnChange || t.Counter != nil && t.Counter.Each,
		}
		if t.Signal != nil {
			rawSignal(t, &tag)
		}
		if l := t.Liveness; l != nil {
			tag.Liveness = &ingest.Liveness{Online: l.Online, Offline: l.Offline, Kept: l.Kept}
		}
		if m := t.Metric; m != nil {
			tag.Metric = &ingest.Metric{Source: sparkplug.Source{Group: m.Group, Node: m.Node, Device: m.Device}, Name: m.Name}
		}
		tags = append(tags, tag)
	}
	for i := range s.Loads {
		l := &s.Loads[i]
		for _, state := range []struct {
			site.Source
			has bool
		}{{l.Running, l.HasRunning}, {l.Bypass, l.HasBypass}} {
			if state.has {
				tags[state.Tag].Truth = tags[state.Tag].Signal == nil
			}
		}
	}
	return tags
}

// hasStamps tells whether a tag that the file declares is stamped at its source, as every
// Sparkplug metric is. A sign of life alone does not move event time.
func hasStamps(s *site.Site) bool {
	for _, t := range s.Tags[:s.Declared()] {
		if t.Time != "" || t.Metric != nil {
			return true
		}
	}
	return false
}
