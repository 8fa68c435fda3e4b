package agent

import (
	"math"
	"slices"
	"time"

	"heatreeve/agent/design"
	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/agent/working"
)

// designOf is what the loads and exchangers of a site should do, in their order.
func designOf(s *site.Site) design.Config {
	var cfg design.Config
	for i := range s.Loads {
		cfg.Loads = append(cfg.Loads, targetOf(s, &s.Loads[i]))
	}
	for i := range s.Exchangers {
		x := &s.Exchangers[i]
		cfg.Exchangers = append(cfg.Exchangers, design.Exchanger{
			Name: x.Name, Hot: x.Hot, Cold: x.Cold, Model: x.Model, Uncertainty: x.Uncertainty, Calibrated: x.Learned,
			Loss: x.Loss, Allowance: x.Fouling, Lasting: x.Lasting, FalseWarnings: x.FalseWarnings,
		})
		byExchanger(&cfg.Loads[x.Hot], x.HotDesign, s.Loads[x.Hot].Design.Exchanger != "")
		byExchanger(&cfg.Loads[x.Cold], x.ColdDesign, s.Loads[x.Cold].Design.Exchanger != "")
	}
	return cfg
}

// byExchanger takes the design point of a side of an exchanger where its load has none, and
// what is expected of it where the exchanger tells.
func byExchanger(t *design.Target, p site.StreamPoint, tells bool) {
	t.ByExchanger = tells
	if t.Point.Flow == 0 {
		t.Point = design.Point(p)
	}
}

func targetOf(s *site.Site, l *site.HeatLoad) design.Target {
	d := &l.Design
	t := design.Target{Name: l.Name, Allow: d.Allow, Lasting: d.Lasting, FalseWarnings: d.FalseWarnings, Expect: expectationOf(s, d)}
	if st := l.Stream; st != nil {
		t.Tags = design.Tags{Flow: tagName(s, st.Flow), Inlet: tagName(s, st.Inlet), Outlet: tagName(s, st.Outlet)}
		t.Point = pointOf(l)
	}
	if l.HasWitness && l.Witness.Tag >= 0 {
		tag := &s.Tags[l.Witness.Tag]
		t.WitnessError, t.WitnessStep = tag.Accuracy.Rel/math.Sqrt(3), tag.Resolution
	}
	return t
}

func tagName(s *site.Site, from site.Source) string {
	if from.Constant() {
		return ""
	}
	return s.Tags[from.Tag].Name
}

// pointOf is where a stream should run. Its flow is that which moves the design duty between
// the design temperatures; it is not told where the fluid's enthalpies there are not.
func pointOf(l *site.HeatLoad) design.Point {
	d, p := &l.Design, l.Design.Pressure
	if p == 0 {
		p = l.Stream.Pressure.Value
	}
	x := design.Point{Inlet: d.Inlet, Outlet: d.Outlet}
	if d.Duty == 0 || d.Inlet == 0 || d.Outlet == 0 || p == 0 {
		return x
	}
	in, err := l.Stream.Fluid.At(d.Inlet, p)
	if err != nil {
		return x
	}
	out, err := l.Stream.Fluid.At(d.Outlet, p)
	if rise := math.Abs(in.Enthalpy - out.Enthalpy); err == nil && rise > 0 {
		x.Flow = math.Abs(d.Duty) / rise
	}
	return x
}

// wholeMinute is how much of a minute must be measured and flowing for it to
// count in a verdict.
const wholeMinute = 54 * time.Second

// minuteOf is a minute of a load as its verdict sees it.
func minuteOf(m *loads.Minute) design.Minute {
	lasting, random := m.Doubt()
	x := design.Minute{
		Start:       m.Start,
		Whole:       m.Measured-m.Idle >= int64(wholeMinute),
		Idle:        m.Idle >= int64(wholeMinute),
		Duty:        m.Duty,
		Uncertainty: lasting,
		Random:      random,
		Flow:        m.MassFlow, Inlet: m.Inlet, Outlet: m.Outlet,
		Counted: m.Witness, Served: m.Compared, Latent: m.Latent > 0,
		Drivers: slices.Clone(m.Drivers[:]), // m is the engine's, and of another minute soon
	}
	if m.By != "" {
		x.Doubt = working.Doubted(m.By, m.Mark)
	}
	if x.Whole {
		lastingErrors(&x, m)
	}
	return x
}

// lastingErrors tells from the shares of a minute's uncertainty what of its means lasts: a share is
// what the input's error does to the duty, which of the flow goes with Q/m and of a
// temperature with Q/(T1 − T2).
func lastingErrors(x *design.Minute, m *loads.Minute) {
	share := func(p loads.Part) float64 { return math.Abs(m.Systematic[p]) / (float64(m.Measured) / 1e9) }
	duty, apart := math.Abs(m.Duty), math.Abs(m.Inlet-m.Outlet)
	if !(duty > 0) || !(apart > 0) {
		return
	}
	x.FlowError = share(loads.PartFlow) / duty * m.MassFlow
	x.InletError, x.OutletError = share(loads.PartInlet)/duty*apart, share(loads.PartOutlet)/duty*apart
	x.CpError = share(loads.PartCp) / duty
}
