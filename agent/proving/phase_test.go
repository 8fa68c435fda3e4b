package proving_test

import (
	"fmt"
	"strings"
	"testing"

	"heatreeve/agent/loads"
	"heatreeve/agent/proving"
)

// A source that sends a little slower than every second has its stamps drift over the grid,
// on which a count may stand a step late: no witness is held against a sound plant for that.
func TestWitnessThatDriftsOverTheGrid(t *testing.T) {
	const tick = 1_008_500_000 // ns
	for _, ticks := range []int{70, 130, 190, 250, 370, 600, 900} {
		for phase := int64(0); phase < 1e9; phase += 150e6 {
			s, trial := bench(t, file)
			for i := range int64(ticks) {
				now := epoch + i*tick + phase
				counted := 1000 + 457.0/3600*float64(i*tick)/1e9
				var all []proving.Heard
				for k := range s.Tags {
					tag := &s.Tags[k]
					x := map[string]float64{"TT-1": 110, "TT-2": 70, "FT-1": 10, "PT-1": 6, "ET-1": counted}[tag.Name]
					all = append(all, proving.Heard{Reading: loads.Reading{Tag: k, At: now, Value: tag.Scale*x + tag.Offset}, Arrival: now, Stamped: true})
				}
				trial.Hear(all)
			}
			r := trial.Tell(float64(ticks), make([][]proving.Refused, len(s.Tags)))
			got := strings.Join(found(&r), "\n")
			if r.Faults() > 0 || strings.Contains(got, "neither") || ticks >= 370 && !strings.Contains(got, "agrees with the outlet pipe, as the file says") {
				t.Errorf("%d readings from %s on: %s", ticks, fmt.Sprint(float64(phase)/1e9), got)
			}
		}
	}
}
