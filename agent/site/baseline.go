package site

import (
	"slices"
	"time"

	"heatreeve/thermo/unit"
)

// Baseline is what was learned of a load: a regression of its duty on tags.
type Baseline struct {
	Learned     string  // from what, in words
	Duty        float64 // at the centres, W
	Terms       []Term
	Correlation []float64            // of the slopes: of the first with the second, with the third, of the second with the third
	Residual    float64              // standard deviation of the residuals, W
	Lag         float64              // autocorrelation of successive ones
	Samples     int                  // learned from
	Fewest      int                  // of an hour that is told apart; Samples without Hours
	Span        time.Duration        // of a sample
	Hours       *[HoursAWeek]float64 // W added in each hour of the week; nil for none
}

// Term is what one tag adds. What counts of it is its value, or how far it is below or above
// a limit.
type Term struct {
	Tag          int
	From, To     float64 // between which it was learned, SI
	Below, Above bool    // of Limit, SI
	Limit        float64
	Centre       float64 // of what counts of it, SI
	Slope, Error float64 // W a unit of it, and its standard uncertainty
}

// mostTerms is how many tags a baseline may go by.
const mostTerms = 3

// baseline reads what learn has written; nil where there is a fault.
func (r *reader) baseline(o object) *Baseline {
	before := len(o.faults)
	b := &Baseline{}
	if v, ok := o.get("learned"); ok {
		b.Learned, _ = v.text()
	}
	b.Duty = o.power("duty", "the duty at the centres, such as 118 kW")
	if v, ok := o.need("against", "the tags, each with what it adds"); ok {
		r.terms(v, b)
	}
	b.Residual = o.power("residual", "the standard deviation of the residuals, such as 6 kW")
	if v, ok := o.get("residual"); ok && b.Residual <= 0 && len(o.faults) == before {
		v.fault("must be above zero")
	}
	o.correlations(b)
	if v, ok := o.get("lag"); ok {
		b.Lag = v.bareWithin(-0.99, 0.99)
	}
	b.Samples = o.count("samples")
	b.Fewest = b.Samples
	if v, ok := o.need("span", "the time of a sample, such as 10 min"); ok {
		b.Span, _ = v.duration(time.Minute, day, "1 min to 1 d")
	}
	if v, ok := o.get("hours"); ok {
		b.Hours = v.week("loads.*.design.baseline.hours")
		b.Fewest = o.count("fewest")
		if v, ok := o.get("fewest"); ok && b.Fewest > b.Samples && len(o.faults) == before {
			v.fault("%d are more than the %d samples", b.Fewest, b.Samples)
		}
	} else if v, ok := o.get("fewest"); ok {
		v.fault("stands without hours; it is of one of them")
	}
	if len(o.faults) > before {
		return nil
	}
	return b
}

// power reads one that must be there, of any sign.
func (o object) power(key, say string) float64 {
	v, ok := o.need(key, say)
	if !ok {
		return 0
	}
	q, _ := v.quantity(unit.Power)
	return q.SI()
}

// count reads a number of samples.
func (o object) count(key string) int {
	v, ok := o.need(key, "how many samples, such as 1400")
	if !ok {
		return 0
	}
	x := v.bareWithin(1, 1e9)
	if x != float64(int(x)) {
		v.fault("%g is no whole number", x)
	}
	return int(x)
}

// correlations reads those of the slopes of two tags or three.
func (o object) correlations(b *Baseline) {
	want := len(b.Terms) * (len(b.Terms) - 1) / 2
	v, ok := o.get("correlation")
	if !ok {
		if want > 0 {
			o.need("correlation", "that of the slopes of each two tags, such as [0.3]")
		}
		return
	}
	items := v.items()
	if items != nil && len(items) != want {
		v.fault("want %d numbers, one for each two tags, found %d", want, len(items))
	}
	for _, x := range items {
		b.Correlation = append(b.Correlation, x.bareWithin(-1, 1))
	}
}

func (r *reader) terms(v value, b *Baseline) {
	es := v.entries()
	if v.emptyMapping("a tag or more"); len(es) > mostTerms {
		v.fault("has %d tags; at most %d", len(es), mostTerms)
	}
	for _, e := range es {
		t := Term{}
		var ok bool
		o := e.object("loads.*.design.baseline.against.*")
		if t.Tag, ok = r.driverNamed(e.key, e.name); !ok {
			continue
		}
		if slices.ContainsFunc(b.Terms, func(u Term) bool { return u.Tag == t.Tag }) {
			e.key.fault("stands twice")
		}
		r.term(o, &t)
		b.Terms = append(b.Terms, t)
	}
}

func (r *reader) term(o object, t *Term) {
	t.From, t.To = r.end(o, "from", t.Tag), r.end(o, "to", t.Tag)
	if v, ok := o.get("to"); ok && !(t.To > t.From) {
		v.fault("does not lie above from")
	}
	_, t.Below = o.get("below")
	_, t.Above = o.get("above")
	switch {
	case t.Below && t.Above:
		o.has["above"].fault("stands beside below; what counts is on one side of a limit")
	case t.Below:
		t.Limit = r.end(o, "below", t.Tag)
	case t.Above:
		t.Limit = r.end(o, "above", t.Tag)
	}
	if t.Below || t.Above {
		t.Centre = r.apart(o, "centre", t.Tag)
	} else {
		t.Centre = r.end(o, "centre", t.Tag)
	}
	each := r.apart(o, "each", t.Tag)
	if each == 0 {
		return
	}
	t.Slope = o.power("adds", "the duty that each unit adds, such as -3.2 kW") / each
	if t.Error = o.power("uncertainty", "the standard uncertainty of what is added, such as 0.1 kW") / each; t.Error < 0 {
		o.has["uncertainty"].fault("is below zero")
	}
}

// end reads a value of a tag that must be there.
func (r *reader) end(o object, key string, tag int) float64 {
	v, ok := o.need(key, "a value of the tag, such as 5 "+r.site.Tags[tag].Unit.Symbol)
	if !ok {
		return 0
	}
	x, _ := r.reading(v, tag)
	return x
}

// apart reads a difference of two values of a tag, above zero but for a centre.
func (r *reader) apart(o object, key string, tag int) float64 {
	u := r.site.Tags[tag].Unit
	v, ok := o.need(key, "a difference of two values of the tag, such as 1 K of a temperature")
	if !ok {
		return 0
	}
	s, ok := v.text()
	if !ok {
		return 0
	}
	x, err := distance(s, u)
	switch {
	case err != nil:
		v.fault("%v", err)
		return 0
	case x == 0 && key == "each":
		v.fault("%q is no difference", clip(s))
	}
	return x
}
