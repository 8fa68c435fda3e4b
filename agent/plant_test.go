package agent

import (
	"math"
	"strings"
	"testing"

	"heatreeve/agent/loads"
)

const coolerSite = `
site: Mill
timezone: UTC
barometer: 101.325 kPa
broker: {url: "mqtt://127.0.0.1:1883"}
tags:
  F: {topic: f, unit: kg/s, accuracy: 0.5 % of reading}
  TI: {topic: a, unit: °C, accuracy: IEC 60751 A}
  TO: {topic: b, unit: °C, accuracy: IEC 60751 A}
  MT: {topic: c, unit: "%", accuracy: 3 %, range: [0 %, 100 %]}
  TC: {topic: d, unit: °C, accuracy: IEC 60751 A}
loads:
  cooler:
    stream: {fluid: moist air, flow: F, inlet: TI, outlet: TO, pressure: 0 barg, relative_humidity: MT, coil: TC, gives: heat}
`

// From the site file to the figure: 2 kg/s at 30 °C and 50 % have their dew point at
// 18.4 °C and cp = 1017.22 J/(kg K) (worked by hand in agent/loads).
func TestMoistAirFromTheSite(t *testing.T) {
	s := parsed(t, coolerSite)
	e, err := loads.New(plantOf(s))
	if err != nil {
		t.Fatal(err)
	}
	at := clock.UnixNano()
	for _, tt := range []struct {
		coil float64
		note string
	}{{283.15, "coil at 10.00 °C is below the dew point at 18.4"}, {293.15, ""}} {
		at += sec
		var in []loads.Reading
		for tag, v := range []float64{2, 303.15, 294.15, 0.5, tt.coil} {
			in = append(in, loads.Reading{Tag: tag, At: at, Value: v})
		}
		e.Advance(loads.Beat{Readings: in, Through: at + sec}, nil)
		f := e.Snapshot().Loads[0].Figure
		if f.Fault != loads.NoFault || f.Latent != (tt.note != "") || !strings.Contains(f.Note, tt.note) {
			t.Errorf("fault %v (%s), note %q; want %q", f.Fault, f.Reason, f.Note, tt.note)
		}
		if want := 2 * 1017.22 * 9; !(math.Abs(f.Duty-want) <= 1) {
			t.Errorf("duty %g W, want %g W", f.Duty, want)
		}
		if f.Share[loads.PartHumidity] == 0 {
			t.Error("the humidity has no part in the uncertainty")
		}
	}
}
