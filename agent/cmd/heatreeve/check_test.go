package main

import (
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
)

// check tells vessels, witnesses and signs of life apart from streams and tags.
func TestCheckTellsWhatALoadIs(t *testing.T) {
	status, out, errs := invoke("check", "../../../configs/ostrel-maltings.yaml")
	if status != exitGood || errs != "" {
		t.Fatalf("status %d, %s", status, errs)
	}
	for _, want := range []string{
		`good: "Ostrel Maltings", tags: 21, loads: 8 brew house: water, IAPWS`,
		"regions 1 to 3; compared with wash/heat fermenters: glycol,",
		"mash kettle: vessel of water, IAPWS",
		"malt kiln: malt, invented for this example",
		"ostrel/cold/beat: tells whether the sources of cold/in, cold/out are alive",
		"ostrel/buffer/state: tells whether the source of buffer/pressure is alive",
	} {
		if !strings.Contains(oneLine(out), want) {
			t.Errorf("does not say %q:\n%s", want, out)
		}
	}
	if strings.Contains(out, "note:") {
		t.Errorf("has something to note:\n%s", out)
	}
}

// What no stamp tells is lost while a message waits at the broker; check says so. A word
// that holds until the next one needs none.
func TestCheckNotesWhatHasNoTime(t *testing.T) {
	path := filepath.Join(t.TempDir(), "plant.yaml")
	if err := os.WriteFile(path, []byte(`
site: X
timezone: UTC
broker: {url: mqtt://127.0.0.1}
tags:
  T1: {topic: a, unit: °C, accuracy: IEC 60751 A, reports: on change, alive: {topic: beat, within: 30 s}}
  T2: {topic: b, unit: °C, beside: T4, value: /v, time: /t, accuracy: IEC 60751 A, reports: on change, alive: {topic: state, online: up, offline: down}}
  T4: {topic: h, unit: °C, value: /v, time: /t, accuracy: IEC 60751 A}
  T3: {topic: f, unit: °C, value: /v, time: /t, accuracy: IEC 60751 A}
  ET: {topic: c, unit: MWh, accuracy: 2 % of reading, counts: {}}
  FQ: {topic: d, unit: pulses, accuracy: 1 % of reading, counts: {pulse: 10 L, since: last message}}
  GQ: {topic: e, unit: pulses, value: /n, time: /t, accuracy: 1 % of reading, counts: {pulse: 10 L, since: last message}}
loads:
  bath:
    vessel: {fluid: water, temperature: T1, pressure: 1 bar, content: 3 m3, takes: heat}
    witness: ET
  tap:
    stream: {fluid: water, flow: FQ, inlet: T1, outlet: T2, pressure: 3 bar, meter_at: inlet, gives: heat}
  rinser:
    stream: {fluid: water, flow: GQ, inlet: T1, outlet: T2, pressure: 3 bar, meter_at: inlet, gives: heat}
`), 0o600); err != nil {
		t.Fatal(err)
	}
	status, out, errs := invoke("check", path)
	if status != exitGood {
		t.Fatalf("status %d, %s", status, errs)
	}
	flat := strings.Join(strings.Fields(out), " ")
	for _, want := range []string{
		"note: tags.T3: no load reads it",
		"note: tags.FQ: counts since its last message, without a time of its own; what the broker delivers a second time",
		"note: tags.FQ, GQ: count without the largest flow that can be; where the register jumps",
		"note: tags.T1: reports on change without a time of its own",
		"note: beat: has no time of its own; after an outage of the broker or the agent the source of T1 is taken to have been dead",
	} {
		if !strings.Contains(flat, want) {
			t.Errorf("does not say %q:\n%s", want, out)
		}
	}
	if n := strings.Count(out, "note:"); n != 5 {
		t.Errorf("%d notes, want 5:\n%s", n, out)
	}
}

// What comes by Sparkplug brings its time, and no broker keeps it: nothing is noted of that.
func TestCheckOfSparkplugIsWithoutNotes(t *testing.T) {
	if status, out, errs := invoke("check", "../../../configs/merrow-dye-works.yaml"); status != exitGood || strings.Contains(out, "note:") {
		t.Errorf("status %d, %s\n%s", status, errs, out)
	}
}

// A meter by differential pressure whose density nobody corrects is told.
func TestCheckNotesUncorrectedDensity(t *testing.T) {
	text, err := os.ReadFile("../../../configs/marrowick-board-mill.yaml")
	if err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(t.TempDir(), "plant.yaml")
	bare := regexp.MustCompile(`,\s*calibrated_at: [0-9.]+ kg/m3`).ReplaceAllString(string(text), "")
	if n := strings.Count(string(text), "calibrated_at:"); n == 0 || strings.Contains(bare, "calibrated_at:") {
		t.Fatalf("the example has calibrated_at %d times, of which some are left", n)
	}
	for _, tt := range []struct {
		text  string
		notes int
	}{{string(text), 0}, {bare, strings.Count(string(text), "calibrated_at:")}} {
		if err := os.WriteFile(path, []byte(tt.text), 0o600); err != nil {
			t.Fatal(err)
		}
		status, out, errs := invoke("check", path)
		if n := strings.Count(oneLine(out), "without calibrated_at its flow is taken to be corrected"); status != exitGood || errs != "" || n != tt.notes {
			t.Errorf("status %d, %s; %d notes, want %d:\n%s", status, errs, n, tt.notes, out)
		}
	}
}

// A list of samples begins before the message comes; check says so where event time does
// not wait for that, and nothing of the example, where it does.
func TestCheckNotesShortLateness(t *testing.T) {
	text, err := os.ReadFile("../../../configs/marrowick-board-mill.yaml")
	if err != nil {
		t.Fatal(err)
	}
	for lateness, notes := range map[string]int{"90 s": 0, "10 s": 0, "5 s": 1} {
		path := filepath.Join(t.TempDir(), "plant.yaml")
		if err := os.WriteFile(path, []byte(strings.Replace(string(text), "lateness: 90 s", "lateness: "+lateness, 1)), 0o600); err != nil {
			t.Fatal(err)
		}
		status, out, errs := invoke("check", path)
		if n := strings.Count(oneLine(out), " come in lists of samples"); status != exitGood || errs != "" || n != notes || strings.Count(out, "note:") != notes {
			t.Errorf("lateness of %s: status %d, %s; %d notes, want %d:\n%s", lateness, status, errs, n, notes, out)
		}
	}
}

func oneLine(text string) string { return strings.Join(strings.Fields(text), " ") }
