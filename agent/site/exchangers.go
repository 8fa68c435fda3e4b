package site

import (
	"math"
	"slices"
	"time"

	"heatreeve/agent/design/exchanger"
	"heatreeve/thermo"
	"heatreeve/thermo/unit"
)

// Exchanger is one of which both streams are loads of the file.
type Exchanger struct {
	Name      string
	Hot, Cold int     // indexes into Site.Loads
	Duty      float64 // that the hot side gives at the design point, W
	// HotDesign and ColdDesign are where the streams run at that point.
	HotDesign, ColdDesign StreamPoint
	// Model is the clean exchanger, by the data sheet or by what the file says of its
	// conductance at the design flows; Learned tells that the plant's own instruments told it.
	Model         exchanger.Model
	Learned       bool
	Uncertainty   float64       // standard, of the clean conductance, as a fraction; default 2.5 %
	Loss          float64       // W to the surroundings; default 0
	Fouling       float64       // K/W that may be lost to it; 0 for no allowance
	Lasting       time.Duration // how many minutes make a window; default 10 min
	FalseWarnings float64       // a year; 0 for the usual
}

// StreamPoint is where a stream runs.
type StreamPoint struct{ Flow, Inlet, Outlet float64 } // kg/s and K

// arrangements are how the streams of an exchanger may pass each other, in the order of
// [exchanger.Kind].
var arrangements = []string{"counterflow", "parallel", "shells", "crossflow", "hot mixed", "cold mixed"}

// usual are figures of an exchanger whose file tells none: common practice for plates in
// turbulent flow, no source.
const (
	usualUncertainty = 0.025
	usualFilm        = 0.4
	usualExponent    = 0.7
)

// sheet is the design point of an exchanger: temperatures, K, and what the file says of its
// conductance and of its films.
type sheet struct {
	hotIn, hotOut, coldIn, coldOut float64
	flows                          [2]float64 // kg/s; 0 where there is a fault
	conductance                    float64    // W/K; 0 for that which the temperatures come to
	films                          [2]float64 // parts of the resistance
	exponents                      [2]float64
	perKelvin                      float64
}

// readExchangers reads the optional block, after the loads.
func (r *reader) readExchangers(o object) {
	v, ok := o.get("exchangers")
	if !ok {
		return
	}
	seen := make(map[int]string)
	for _, e := range v.entries() {
		e.key.label(e.name)
		if slices.ContainsFunc(r.site.Loads, func(l HeatLoad) bool { return l.Name == e.name }) {
			e.key.fault("is the name of a load, and a warning must tell the two apart")
		}
		r.site.Exchangers = append(r.site.Exchangers, r.exchanger(e, seen))
	}
}

// readTellers holds the loads whose design is an exchanger's to tell to those that there are.
func (r *reader) readTellers() {
	var known []string
	for _, x := range r.site.Exchangers {
		known = append(known, x.Name)
	}
	for i := range r.site.Loads {
		name := r.site.Loads[i].Design.Exchanger
		if name == "" {
			continue
		}
		place := r.tellers[i]
		k := slices.IndexFunc(r.site.Exchangers, func(x Exchanger) bool { return x.Name == name })
		switch {
		case k < 0 && len(known) == 0:
			place.fault("exchanger %q is not declared; the file has no exchangers", clip(name))
		case k < 0:
			place.fault("exchanger %q is not declared%s; declared: %s", clip(name), nearOf(name, known), list(known))
		case r.site.Exchangers[k].Hot != i && r.site.Exchangers[k].Cold != i:
			place.fault("the load is no side of exchanger %q", name)
		}
	}
}

func (r *reader) exchanger(e entry, seen map[int]string) Exchanger {
	o := e.object("exchangers.*")
	x := Exchanger{Name: e.name, Uncertainty: usualUncertainty, Lasting: 10 * time.Minute}
	p := sheet{films: [2]float64{usualFilm, usualFilm}, exponents: [2]float64{usualExponent, usualExponent}}
	var okHot, okCold bool
	x.Hot, okHot = r.side(o, "hot", true, seen, e.name)
	x.Cold, okCold = r.side(o, "cold", false, seen, e.name)
	x.Model.Arrangement = o.arrangement()
	p.readFilms(o)
	design, ok := o.need("design", "the data sheet: duty, hot_inlet, hot_outlet, cold_inlet and cold_outlet")
	if ok {
		ok = r.dataSheet(design.object("exchangers.*.design"), &x, &p)
	}
	o.conductance(&x, &p)
	o.figures(&x)
	if ok && okHot && okCold && r.designFlows(o, &x, &p) {
		if err := p.size(&x); err != nil {
			design.fault("%v", err)
		}
	}
	return x
}

// figures reads what the exchanger is watched by.
func (o object) figures(x *Exchanger) {
	if v, ok := o.get("loss"); ok {
		if x.Loss = notNegative(v, unit.Power); x.Duty > 0 && x.Loss >= x.Duty {
			v.fault("is as much as the duty")
			x.Loss = 0
		}
	}
	if v, ok := o.get("fouling_allowance"); ok {
		x.Fouling, _ = v.aboveZero(unit.HeatResistance)
	}
	if v, ok := o.get("uncertainty"); ok {
		x.Uncertainty, _ = v.part(1e-6, 1, "more than 0 % up to 100 %", "")
	}
	o.setDuration("lasting", &x.Lasting, 3*time.Minute, time.Hour, "3 min to 1 h")
	if v, ok := o.get("false_warnings"); ok {
		x.FalseWarnings = v.bareWithin(0.1, 52)
	}
}

// conductance reads that of the clean exchanger, by the data sheet or by the plant itself.
func (o object) conductance(x *Exchanger, p *sheet) {
	clean, isClean := o.get("clean")
	learned, isLearned := o.get("learned")
	switch {
	case isClean && isLearned:
		learned.fault("stands beside clean; keep the one that is to be compared with")
	case isClean:
		p.conductance, _ = clean.aboveZero(unit.Conductance)
	case isLearned:
		p.conductance, _ = learned.aboveZero(unit.Conductance)
		x.Learned = true
	}
}

// side reads the name of a load that is one side, and returns its index; false where there is
// a fault.
func (r *reader) side(o object, key string, gives bool, seen map[int]string, of string) (int, bool) {
	v, ok := o.need(key, "the name of the load on the "+key+" side")
	if !ok {
		return 0, false
	}
	s, ok := v.text()
	if !ok {
		return 0, false
	}
	i := slices.IndexFunc(r.site.Loads, func(l HeatLoad) bool { return l.Name == s })
	if i < 0 {
		known := make([]string, 0, len(r.site.Loads))
		for _, l := range r.site.Loads {
			known = append(known, l.Name)
		}
		v.fault("load %q is not declared%s; declared: %s", clip(s), nearOf(s, known), list(known))
		return 0, false
	}
	other, twice := seen[i]
	seen[i] = of
	switch l := &r.site.Loads[i]; {
	case l.Stream == nil:
		v.fault("load %q is a vessel, and a side of an exchanger is a stream", s)
	case l.Stream.Fluid == nil: // its own fault is told
	case l.Stream.Fluid.Phase() == thermo.Solid:
		v.fault("load %q is of a solid", s)
	case l.Stream.Gives != gives && gives:
		v.fault("load %q takes heat, and the hot side gives it", s)
	case l.Stream.Gives != gives:
		v.fault("load %q gives heat, and the cold side takes it", s)
	case twice:
		v.fault("load %q is a side of exchanger %q already", s, other)
	default:
		return i, true
	}
	return i, false
}

// arrangement reads how the streams pass each other.
func (o object) arrangement() exchanger.Arrangement {
	var a exchanger.Arrangement
	if v, ok := o.need("arrangement", "how the streams pass each other: "+list(arrangements)); ok {
		if s, ok := v.oneOf(arrangements...); ok {
			a.Kind = exchanger.Kind(slices.Index(arrangements, s))
		}
	}
	switch v, ok := o.get("shells"); {
	case !ok:
	case a.Kind != exchanger.Shells:
		v.fault("is how many shells stand in series where the arrangement is shells")
	default:
		o.setCount("shells", &a.Number, 1, 20)
	}
	return a
}

// readFilms reads how the resistance to heat is shared out.
func (p *sheet) readFilms(of object) {
	v, ok := of.get("films")
	if !ok {
		return
	}
	o := v.object("exchangers.*.films")
	for i, key := range [...]string{"hot", "cold"} {
		if v, ok := o.get(key); ok {
			p.films[i], _ = v.part(0, 1, "0 % to 100 %", "")
		}
		if v, ok := o.get(key + "_exponent"); ok {
			p.exponents[i] = v.bareWithin(0, 1)
		}
	}
	if v, ok := o.get("per_kelvin"); ok {
		p.perKelvin, _ = v.part(0, 0.1, "0 % to 10 %", "")
	}
	if sum := p.films[0] + p.films[1]; sum > 1 {
		v.fault("hot and cold come to %.4g %% of the resistance, and there is no more than 100 %%", 100*sum)
		p.films = [2]float64{usualFilm, usualFilm}
	}
}

// dataSheet reads the design point; false where there is a fault.
func (r *reader) dataSheet(o object, x *Exchanger, p *sheet) (ok bool) {
	ok = true
	for _, t := range []struct {
		key string
		d   unit.Dimension
		to  *float64
	}{
		{"duty", unit.Power, &x.Duty},
		{"hot_inlet", unit.Temperature, &p.hotIn}, {"hot_outlet", unit.Temperature, &p.hotOut},
		{"cold_inlet", unit.Temperature, &p.coldIn}, {"cold_outlet", unit.Temperature, &p.coldOut},
	} {
		if v, given := o.need(t.key, "as on the data sheet"); given {
			*t.to = r.constant(v, t.d)
		}
		ok = ok && *t.to > 0
	}
	if !ok {
		return false
	}
	hotOut, coldOut := o.has["hot_outlet"], o.has["cold_outlet"]
	switch {
	case p.hotIn <= p.hotOut:
		hotOut.fault("the hot side gives heat, and its outlet at %s is not colder than its inlet at %s", celsius(p.hotOut), celsius(p.hotIn))
	case p.coldOut <= p.coldIn:
		coldOut.fault("the cold side takes heat, and its outlet at %s is not warmer than its inlet at %s", celsius(p.coldOut), celsius(p.coldIn))
	case p.hotOut <= p.coldIn:
		hotOut.fault("%s is not above the inlet of the cold side at %s", celsius(p.hotOut), celsius(p.coldIn))
	case p.coldOut >= p.hotIn:
		coldOut.fault("%s is not below the inlet of the hot side at %s", celsius(p.coldOut), celsius(p.hotIn))
	default:
		return true
	}
	return false
}

// designFlows finds the mass flows that the data sheet comes to, by the enthalpies of the two
// fluids at the pressures of their loads; false where there is a fault.
func (r *reader) designFlows(o object, x *Exchanger, p *sheet) (ok bool) {
	ok = true
	for i, side := range [...]struct {
		load          int
		in, out, duty float64
	}{{x.Hot, p.hotIn, p.hotOut, x.Duty}, {x.Cold, p.coldIn, p.coldOut, x.Duty - x.Loss}} {
		l := &r.site.Loads[side.load]
		rise, err := rise(l.Stream.Fluid, side.in, side.out, r.amid(l.Design.Pressure, l.Stream.Pressure))
		if err != nil {
			o.has["design"].fault("load %q: %v", l.Name, err)
			ok = false
			continue
		}
		p.flows[i] = side.duty / math.Abs(rise)
	}
	return ok
}

// rise is that of the enthalpy from one temperature to another, J/kg.
func rise(f thermo.Fluid, from, to, pressure float64) (float64, error) {
	a, err := f.At(from, pressure)
	if err != nil {
		return 0, err
	}
	b, err := f.At(to, pressure)
	return b.Enthalpy - a.Enthalpy, err
}

// size makes the model of the data sheet.
func (p *sheet) size(x *Exchanger) error {
	s := exchanger.State{
		Hot:  exchanger.Stream{Flow: p.flows[0], Inlet: p.hotIn, Outlet: p.hotOut},
		Cold: exchanger.Stream{Flow: p.flows[1], Inlet: p.coldIn, Outlet: p.coldOut},
	}
	s.Hot.Cp = x.Duty / p.flows[0] / (p.hotIn - p.hotOut)
	s.Cold.Cp = (x.Duty - x.Loss) / p.flows[1] / (p.coldOut - p.coldIn)
	x.HotDesign, x.ColdDesign = StreamPoint{p.flows[0], p.hotIn, p.hotOut}, StreamPoint{p.flows[1], p.coldIn, p.coldOut}
	m := &x.Model
	m.Hot = exchanger.Film{Flow: p.flows[0], Exponent: p.exponents[0], PerKelvin: p.perKelvin, Temperature: (p.hotIn + p.hotOut) / 2}
	m.Cold = exchanger.Film{Flow: p.flows[1], Exponent: p.exponents[1], PerKelvin: p.perKelvin, Temperature: (p.coldIn + p.coldOut) / 2}
	m.Wall = 1 // any; a clean one is not wanted yet
	if p.conductance == 0 {
		at, err := m.Observe(&s, 0, x.Loss)
		if err != nil {
			return err
		}
		p.conductance = at.Conductance
	}
	m.Hot.Resistance, m.Cold.Resistance = p.films[0]/p.conductance, p.films[1]/p.conductance
	m.Wall = (1 - p.films[0] - p.films[1]) / p.conductance
	return nil
}
