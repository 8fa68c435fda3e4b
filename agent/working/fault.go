package working

import (
	"fmt"
	"math"
	"time"

	"heatreeve/agent/loads"
)

// faulty says why there is no duty: what is missing, since when, and what was seen last.
func (p *page) faulty() {
	p.begin("No duty")
	defer p.end()
	p.say(p.Basis.Figure.Fault.String() + ": " + p.Basis.Figure.Reason)
	for i := range p.Basis.Inputs {
		if in := &p.Basis.Inputs[i]; in.Fault != loads.NoFault {
			p.say(p.missing(in))
		}
	}
}

// missing tells of an input that cannot be used.
func (p *page) missing(in *loads.Input) string {
	tag := &p.Site.Tags[in.Source.Tag]
	if in.Held.At == 0 {
		return fmt.Sprintf("%s: tag %q has no reading yet", in.Name, tag.Name)
	}
	what := "had no number"
	if !math.IsNaN(in.Held.Value) {
		what = fmt.Sprintf("last said %s %s", short(payload(tag, in.Held.Value)), unitOf(tag))
	}
	last := fmt.Sprintf("%s: tag %q %s at %s", in.Name, tag.Name, what, p.instant(in.Held.At))
	if in.Held.Mark != 0 && in.Fault != loads.BadReading { // whose reason tells the mark
		last += fmt.Sprintf(", which is %v (%v)", in.Held.Mark.Quality(), in.Held.Mark)
	}
	if !tag.OnChange && !math.IsNaN(in.Held.Value) && p.Basis.Figure.At-in.Held.At >= int64(tag.MaxAge) {
		return last + fmt.Sprintf("; it holds for %s s, and is missing since %s", fixed(tag.MaxAge.Seconds(), 3), p.instant(in.Held.At+int64(tag.MaxAge)))
	}
	return last + "; " + in.Reason
}

// instant is one by the clock of the plant.
func (p *page) instant(ns int64) string {
	return time.Unix(0, ns).In(p.Site.Zone).Format("2006-01-02 15:04:05 -07:00")
}
