package agent

import (
	"context"
	"crypto/rand"
	"log/slog"

	"heatreeve/agent/site"
	"heatreeve/agent/survey"
	"heatreeve/ingest"
)

// CheckListening says what is wrong with an address or a topic filter before anything is
// tried.
func CheckListening(b site.Broker, filters []string) error {
	o := connectionOf(b)
	o.ClientID = "heatreeve-survey"
	return ingest.CheckListening(o, filters)
}

// Listen hands what a broker delivers of some topic filters to the survey until ctx ends,
// as one more client that leaves nothing behind. The error is why it could not begin.
func Listen(ctx context.Context, b site.Broker, filters []string, s *survey.Survey) error {
	o := connectionOf(b)
	o.ClientID, o.Log = "heatreeve-survey-"+rand.Text()[:8], slog.New(slog.DiscardHandler)
	return ingest.Listen(ctx, o, filters, func(h ingest.Heard) {
		s.Hear(survey.Message{Topic: h.Topic, Payload: h.Payload, Retained: h.Retained, At: h.At})
	})
}
