package agent

import (
	"time"

	"heatreeve/agent/relay"
	"heatreeve/agent/site"
	"heatreeve/ingest"
)

// newRelay returns what publishes the results of a site, or nil where the file does not
// ask for it.
func newRelay(s *site.Site) *relay.Relay {
	p := s.Publish
	if p.Topic == "" {
		return nil
	}
	return relay.New(s.Name, p.Topic, names(s.Loads, func(l site.HeatLoad) string { return l.Name }), p.Every)
}

// tell publishes what has changed; last says that nothing comes after it.
func (a *Agent) tell(system time.Time, last bool) {
	v := a.latest.Load()
	if a.relay == nil || v == nil {
		return
	}
	results, err := a.relay.Look(v, a.o.Now().UnixNano(), system, last)
	if err != nil {
		a.o.Log.Error("a result is not published", "error", err)
	}
	warnings, err := a.relay.Warnings(v, system, last)
	if err != nil {
		a.o.Log.Error("a warning is not published", "error", err)
	}
	results = append(results, warnings...)
	session := a.intakes[a.site.Publish.Broker].session
	for _, r := range results {
		// What finds no room is counted by the session.
		if _, err := session.Publish(ingest.Message{Topic: r.Topic, Payload: r.Payload, QoS: 1, Retain: true}); err != nil {
			a.o.Log.Error("a result is not published", "error", err)
		}
	}
}
