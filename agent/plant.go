package agent

import (
	"heatreeve/agent/design"
	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/ingest"
	"heatreeve/thermo/unit"
)

// plantOf is the site as the engine sees it.
func plantOf(s *site.Site) loads.Config {
	cfg := loads.Config{Grid: int64(s.Timing.Grid)}
	for _, t := range s.Tags {
		cfg.Tags = append(cfg.Tags, loads.Tag{Name: t.Name, MaxAge: int64(t.MaxAge), Accuracy: loads.Accuracy(t.Accuracy)})
	}
	for _, l := range s.Loads {
		cfg.Loads = append(cfg.Loads, loads.Load{Name: l.Name, Stream: streamOf(l.Stream)})
	}
	tabulate(s, cfg.Loads)
	return cfg
}

func streamOf(s site.Stream) loads.Stream {
	return loads.Stream{
		Fluid: s.Fluid, Flow: loads.Source(s.Flow), FlowKind: flowKinds[s.FlowKind],
		Inlet: loads.Source(s.Inlet), Outlet: loads.Source(s.Outlet),
		Pressure: loads.Source(s.Pressure), OutletPressure: loads.Source(s.OutletPressure),
		Humidity: loads.Source(s.Humidity), HumidityKind: s.HumidityKind,
		Coil: loads.Source(s.Coil), HasCoil: s.HasCoil,
		MeterAtOutlet: s.MeterAtOutlet, Gives: s.Gives, Margin: s.Margin, IdleBelow: s.IdleBelow,
	}
}

var flowKinds = map[unit.Dimension]loads.FlowKind{
	unit.MassFlow: loads.MassFlow, unit.VolumeFlow: loads.VolumeFlow, unit.MolarFlow: loads.MolarFlow,
}

// targetsOf are the designs of the loads, in their order.
func targetsOf(s *site.Site) []design.Target {
	var targets []design.Target
	for _, l := range s.Loads {
		targets = append(targets, design.Target{Duty: l.Design.Duty, Allow: l.Design.Allow, Lasting: l.Design.Lasting})
	}
	return targets
}

// signalsOf are the tags as the session reads them.
func signalsOf(s *site.Site) []ingest.Tag {
	var tags []ingest.Tag
	for _, t := range s.Tags {
		tags = append(tags, ingest.Tag{
			Name: t.Name, Topic: t.Topic, Value: t.Value, Time: t.Time, TimeFormat: t.TimeFormat,
			Scale: t.Scale, Offset: t.Offset, Min: t.Min, Max: t.Max, QoS: t.QoS,
		})
	}
	return tags
}

func hasStamps(s *site.Site) bool {
	for _, t := range s.Tags {
		if t.Time != "" {
			return true
		}
	}
	return false
}
