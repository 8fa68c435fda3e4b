package main

import (
	"context"
	"log/slog"
	"net"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"heatreeve/agent"
	"heatreeve/agent/demo"
	"heatreeve/agent/survey"
	"heatreeve/configs"
)

// A sound plant stands the trial; one with mistakes in its file does not, and each is told.
func TestCheckLive(t *testing.T) {
	d, err := demo.Start(demo.Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer d.Close()
	go d.Run(t.Context())
	for caughtUp := false; !caughtUp; { // what the plant said before it opened comes first
		s := survey.New(0)
		ctx, cancel := context.WithTimeout(t.Context(), 2*time.Second)
		if err := agent.Listen(ctx, d.Site.Broker, []string{"creamery/hw/TT-201"}, s); err != nil {
			t.Fatal(err)
		}
		cancel()
		topics := s.Topics()
		caughtUp = len(topics) == 1 && topics[0].Signals[0].Clock.Behind < 2
	}
	check := func(edit ...string) (int, string, string) {
		t.Helper()
		text := string(configs.Demo)
		for i := 0; i < len(edit); i += 2 {
			if !strings.Contains(text, edit[i]) {
				t.Fatalf("the demo's file has no %q", edit[i])
			}
			text = strings.ReplaceAll(text, edit[i], edit[i+1])
		}
		path := filepath.Join(t.TempDir(), "site.yaml")
		if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
		return invoke("check", path, "--live", "--for", "4s")
	}
	address := []string{"mqtt://127.0.0.1:1883", d.Site.Broker.URL}
	status, out, errs := check(address...)
	if status != exitGood || errs != "" || !strings.Contains(out, "faults: 0,") {
		t.Errorf("sound: status %d, %s\n%s", status, errs, out)
	}
	for _, want := range []string{"TT-201 ", "°C", " K ", "hot-water: 64", "kJ/kg", "chilled-glycol: ", "in the outlet pipe", "Heatreeve informs"} {
		if !strings.Contains(strings.Join(strings.Fields(out), " "), want) {
			t.Errorf("sound: no %q in\n%s", want, out)
		}
	}
	status, out, errs = check(append(address, "inlet: TT-201, outlet: TT-202", "inlet: TT-202, outlet: TT-201",
		"unit: barg", "unit: bar", "[0 barg, 16 barg]", "[0 bar, 16 bar]", "[0 barg, 10 barg]", "[0 bar, 10 bar]", "air/TT-402", "air/TT-403")...)
	if status != exitFailed || !strings.Contains(errs, "does not stand the trial") {
		t.Errorf("wrong: status %d, %s", status, errs)
	}
	for _, want := range []string{"inlet and outlet look swapped", "if it is gauge", `no message on topic "creamery/air/TT-403"`, "dryer-air: no duty"} {
		if !strings.Contains(strings.Join(strings.Fields(out), " "), want) {
			t.Errorf("wrong: no %q in\n%s", want, out)
		}
	}
	quiet, err := demo.StartBroker(slog.New(slog.DiscardHandler))
	if err != nil {
		t.Fatal(err)
	}
	defer quiet.Close()
	status, out, errs = check(append(address, "\nfluids:", "\nbrokers: {air: {url: \""+quiet.URL()+"\"}}\n\nfluids:", "topic: creamery/air/TT-402,", "broker: air, topic: creamery/air/TT-402,")...)
	if !strings.Contains(strings.Join(strings.Fields(out), " "), "listening to "+d.Site.Broker.URL+", "+quiet.URL()+" for 4s") {
		t.Errorf("two brokers: %s", out)
	}
	if status != exitFailed || !strings.Contains(out, "FAULT TT-402: no message") || !strings.Contains(out, "hot-water: 64") || strings.Contains(out, "FAULT TT-401") {
		t.Errorf("a tag on another broker: status %d, %s\n%s", status, errs, out)
	}
	if status, _, errs := check("mqtt://127.0.0.1:1883", "mqtt://127.0.0.1:1"); status != exitFailed || !strings.Contains(errs, "connection refused") {
		t.Errorf("no broker: status %d, %q", status, errs)
	}
	mute, err := net.Listen("tcp", "127.0.0.1:0") // takes connections, and says nothing
	if err != nil {
		t.Fatal(err)
	}
	defer mute.Close()
	if status, _, errs := check("mqtt://127.0.0.1:1883", "mqtt://"+mute.Addr().String()); status != exitFailed || !strings.Contains(errs, "has not answered yet") {
		t.Errorf("mute broker: status %d, %q", status, errs)
	}
	if status, _, errs := invoke("check", "site.yaml", "--for", "5s"); status != exitWrong || !strings.Contains(errs, "--for is for --live") {
		t.Errorf("without --live: status %d, %q", status, errs)
	}
}
