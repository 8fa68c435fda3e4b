package agent

import (
	"math"
	"testing"

	"heatreeve/configs"
	"heatreeve/ingest/sparkplug"
)

// Merrow Dye Works: a device that tells what has changed, which is nothing for ten minutes,
// and a node that tells all each half minute.
//
// By python-iapws (IAPWS-IF97) 45 m3/h of water at 85 °C and 501 kPa give up 1015.06687 kW
// down to 65 °C; 5 L/s metered at 28 °C and 251 kPa give up 353.876503 kW from 45 °C.
func TestMerrowDyeWorks(t *testing.T) {
	text, err := configs.Files.ReadFile("merrow-dye-works.yaml")
	if err != nil {
		t.Fatal(err)
	}
	p := playOn(t, string(text))
	gateway := sparkplug.Source{Group: "Merrow", Node: "gateway-1"}
	house := sparkplug.Source{Group: "Merrow", Node: "gateway-1", Device: "dye-house"}
	rinse := []string{"Rinse/T1", "Rinse/T2", "Rinse/Flow"}
	loop := []string{"Loop/Supply temperature", "Loop/Return temperature", "Loop/Flow", "Meter/Energy"}
	for n := range 601 {
		ms := clock.UnixMilli() + int64(n)*1000
		switch {
		case n == 0:
			p.at(n, gateway.Topic(sparkplug.NBirth), spelled(0, ms, true, 0, rinse, 45, 28, 5))
			p.at(n, house.Topic(sparkplug.DBirth), spelled(1, ms, true, 10, loop, 85, 65, 45, 100))
		case n%30 == 0:
			p.at(n, gateway.Topic(sparkplug.NData), spelled(uint64(1+n/30), ms, false, 0, rinse, 45, 28, 5))
		default:
			p.at(n, "", nil)
		}
	}
	for i, want := range []float64{1015.06687393e3, 353.876503e3} {
		s := p.books.engine.Snapshot().Loads[i]
		seconds := float64(s.Totals.Measured) / 1e9
		if seconds < 598 {
			t.Errorf("%s: %v s of 600 measured", p.site.Loads[i].Name, seconds)
		}
		if got := s.Totals.Given / seconds; !(math.Abs(got/want-1) <= 1e-6) {
			t.Errorf("%s: %.9g W, want %.9g W", p.site.Loads[i].Name, got, want)
		}
	}
}
