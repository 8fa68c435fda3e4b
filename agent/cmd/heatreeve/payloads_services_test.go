//go:build services

package main

import (
	"encoding/json"
	"fmt"
	"os/exec"
	"strings"
	"testing"
	"time"
)

// remote is the circuit by what a remote station sends: the ohms of two thermometers and two
// currents, collected for ten seconds.
var remote = strings.NewReplacer(
	"TT-1: {topic: bench/all, unit: °C, value: /ti,", "TT-1: {topic: bench/all, unit: °C, signal: Pt100, lead: 0.4 ohm, samples: /rows, quality: {at: /health, code: NE 107, absent: good}, value: /ti,",
	"TT-2: {topic: bench/all, unit: °C, value: /to,", "TT-2: {topic: bench/all, unit: °C, signal: Pt1000, samples: /rows, value: /to,",
	"FT-1: {topic: bench/all, unit: m3/h, value: /q,", "FT-1: {topic: bench/all, unit: m3/h, signal: square root of 4-20 mA, range: [0 m3/h, 40 m3/h], samples: /rows, value: /q,",
	"PT-1: {topic: bench/all, unit: barg, value: /p,", "PT-1: {topic: bench/all, unit: barg, signal: 4-20 mA, range: [0 barg, 16 barg], samples: /rows, value: /p,",
).Replace(circuit)

// Twelve messages with ten samples each, the newest first, from a client that is not ours:
// the duty is that of IAPWS-95 for 85 and 60 °C, 25 m³/h and 3.2 barg. From one sample to
// the next a thermometer has failed, by its own diagnosis and by its resistance, and those
// two seconds are missing.
func TestDutyOfARemoteStation(t *testing.T) {
	out, err := exec.Command("/usr/bin/python3", "-c", iapws95).Output()
	if err != nil {
		t.Fatalf("Debian's package python3-iapws: %v", err)
	}
	var want struct{ Duty, Mass float64 }
	if err := json.Unmarshal(out, &want); err != nil {
		t.Fatal(err)
	}
	b := startBroker(t)
	a := startAgent(t, b.site(t, strings.ReplaceAll(remote, "%ID%", "remote")))
	a.subscribed(t, b, "bench/all", "TT-1")
	base := time.Now().Add(-20 * time.Minute).Truncate(time.Minute).UnixMilli()
	platinum := func(t float64) float64 { return 1 + 3.9083e-3*t - 5.775e-7*t*t } // IEC 60751
	pub := b.lines(t, "bench/all")
	for message := range 12 {
		var rows []string
		for i := 9; i >= 0; i-- {
			s := 10*message + i
			in, health := fmt.Sprintf("%.6f", 100*platinum(85)+0.4), ""
			switch s {
			case 42:
				health = `,"health":"F"`
			case 77:
				in = "99999.9"
			}
			rows = append(rows, fmt.Sprintf(`{"ti":%s,"to":%.6f,"q":10.25,"p":7.2,"ts":%d%s}`, in, 1000*platinum(60), base+int64(s)*1000, health))
		}
		pub.send(t, `{"rows":[%s]}`, strings.Join(rows, ","))
	}
	pub.close(t)
	a.reaches(t, measured, 110)
	heat, span := a.value(t, given), a.value(t, measured)
	within(t, "heat per measured second", heat/span, want.Duty, 1e-3)
	if v := a.value(t, missing); v != 2 {
		t.Errorf("missing %v s, want 2", v)
	}
	for reason, n := range refusals(t, a) {
		if reason != "not-json" { // as the probes of the subscription are
			t.Errorf("refused %v as %s, want none", n, reason)
		}
	}
}
