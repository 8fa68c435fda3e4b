package agent

import (
	"encoding/hex"
	"net/http"

	"heatreeve/agent/answer"
	"heatreeve/agent/site"
)

// sitePath is where the plant is told.
const sitePath = answer.Path + "site"

// newPlace tells the plant, which is the same as long as the agent runs.
func newPlace(s *site.Site, version string) http.Handler {
	told := siteOf(s, version)
	return http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		if err := noParameters(r.URL.Query()); err != nil {
			refuse(w, err)
			return
		}
		hand(w, r, told, reportStall)
	})
}

func siteOf(s *site.Site, version string) *answer.Site {
	out := &answer.Site{
		Name: s.Name, Zone: s.Zone.String(), Version: version, File: hex.EncodeToString(s.Digest[:]),
		Shown: answer.ShownIn{Duty: s.Shown.Duty.Symbol, Heat: s.Shown.Heat.Symbol, Temperature: s.Shown.Temperature.Symbol, Flow: s.Shown.Flow.Symbol},
		Loads: []answer.SiteLoad{}, Exchangers: []answer.SiteExchanger{},
	}
	for i := range s.Loads {
		out.Loads = append(out.Loads, siteLoad(&s.Loads[i]))
	}
	for i := range s.Exchangers {
		x := &s.Exchangers[i]
		told := answer.SiteExchanger{Name: x.Name, Hot: s.Loads[x.Hot].Name, Cold: s.Loads[x.Cold].Name, Duty: x.Duty}
		if x.Fouling != 0 {
			told.Allowance = new(x.Fouling)
		}
		out.Exchangers = append(out.Exchangers, told)
	}
	return out
}

func siteLoad(l *site.HeatLoad) answer.SiteLoad {
	fluid, _ := l.Fluid()
	out := answer.SiteLoad{Load: l.Name, Kind: "stream", Fluid: fluid, Direction: "takes", Design: siteDesign(&l.Design)}
	gives := false
	if l.Vessel != nil {
		out.Kind, gives = "vessel", l.Vessel.Gives
	} else {
		out.BothWays, gives = l.Stream.BothWays, l.Stream.Gives
	}
	if gives {
		out.Direction = "gives"
	}
	return out
}

// siteDesign is nil where there is none.
func siteDesign(d *site.Design) *answer.SiteDesign {
	out := &answer.SiteDesign{Exchanger: d.Exchanger, Allowance: d.Allow, Lasting: d.Lasting.Seconds()}
	switch {
	case d.Exchanger != "":
		out.By = "exchanger"
	case d.Table != nil:
		out.By = "table"
	case d.Week != nil:
		out.By = "week"
	case d.Baseline != nil:
		out.By = "baseline"
	case d.Duty != 0:
		out.By, out.Duty = "duty", new(d.Duty)
	default:
		return nil
	}
	return out
}
