package proving_test

import (
	"strings"
	"testing"

	"heatreeve/agent/loads"
	"heatreeve/agent/proving"
)

// A metric that is sent by alias is unknown until a birth; the finding says what to do.
func TestSilentMetric(t *testing.T) {
	s, trial := bench(t, strings.Replace(file, "topic: a/TT-1, unit: °C, value: /v, time: /ts", "sparkplug: plant/gw/loop, metric: T/in, unit: °C", 1))
	r := trial.Tell(60, make([][]proving.Refused, len(s.Tags)))
	tag := r.Tags[0]
	if tag.Topic != "plant/gw/loop T/in" || !tag.Stamped || len(tag.Findings) != 1 {
		t.Fatalf("%+v", tag)
	}
	if f := tag.Findings[0]; f.Level != proving.Fault || !strings.Contains(f.Text, `nothing by Sparkplug from "plant/gw/loop T/in" in 60 s`) || !strings.Contains(f.Text, "commands: rebirth") {
		t.Errorf("%+v", f)
	}
}

// Where other metrics of the source come, a birth has told their names: its own is wrong.
func TestMetricOfAWrongName(t *testing.T) {
	s, trial := bench(t, strings.NewReplacer("topic: a/TT-1, unit: °C, value: /v, time: /ts", "sparkplug: plant/gw/loop, metric: T/inn, unit: °C",
		"topic: a/TT-2, unit: °C, value: /v, time: /ts", "sparkplug: plant/gw/loop, metric: T/out, unit: °C").Replace(file))
	sound.send(s, trial, func(tag string, _ *proving.Heard) bool { return tag != "TT-1" })
	r := trial.Tell(60, make([][]proving.Refused, len(s.Tags)))
	if all := r.Tags[0].Findings; len(all) != 1 || all[0].Level != proving.Fault || !strings.Contains(all[0].Text, "check its name, letter by letter") {
		t.Errorf("%+v", all)
	}
}

// The source itself has no unit: it is alive or gone.
func TestSourceIsShownInWords(t *testing.T) {
	s, trial := bench(t, strings.Replace(file, "topic: a/TT-1, unit: °C, value: /v, time: /ts", "sparkplug: plant/gw/loop, metric: T/in, unit: °C, reports: on change", 1))
	life := len(s.Tags) - 1
	for k, want := range map[float64]string{1: "alive", 0: "gone"} {
		if got := s.Tags[life].Show(k); s.Tags[life].Liveness == nil || got != want {
			t.Errorf("%g is shown as %q, want %q", k, got, want)
		}
	}
	trial.Hear([]proving.Heard{{Reading: loads.Reading{Tag: life, At: epoch, Value: 1}, Arrival: epoch}})
	r := trial.Tell(60, make([][]proving.Refused, len(s.Tags)))
	if got := r.Tags[life].Shown; got != "alive" {
		t.Errorf("shown %q", got)
	}
}
