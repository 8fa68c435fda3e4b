package site

import (
	"strings"
	"testing"
)

// half-widths worked by hand from IEC 60751:2008 table 3 and the meaning of
// reading and span. The site's barometer is 100 kPa.
func TestAccuracy(t *testing.T) {
	for _, tt := range []struct {
		unit, accuracy string
		at, want       float64 // SI
		source         string
	}{
		{"°C", "IEC 60751 AA", 343.15, 0.219, "IEC 60751 at 70 °C: 0.1 + 0.0017·70"},
		{"°C", "IEC 60751 A", 343.15, 0.290, "IEC 60751 at 70 °C: 0.15 + 0.002·70"},
		{"°C", "IEC 60751 B", 343.15, 0.650, "IEC 60751 at 70 °C: 0.3 + 0.005·70"},
		{"°C", "IEC 60751 class C", 243.15, 0.900, "IEC 60751 at -30 °C: 0.6 + 0.01·30"},
		{"°F", "IEC 60751 A", 363.15, 0.330, "IEC 60751 at 90 °C"},
		{"°C", "0.3 K", 400, 0.3, "absolute"},
		{"°C", "± 0.3 °C", 400, 0.3, "absolute"},
		{"°C", "+/-0.54 °F", 400, 0.3, "0.54/1.8"},
		{"°C", "0.5 % of reading", 373.15, 0.5, "100 °C on the scale"},
		{"K", "0.5 % of reading", 300, 1.5, "300 K on the scale"},
		{"°C", "0.1 % of 200 K", 300, 0.2, "of span"},
		{"°C", "IEC 60751 A + 0.1 K", 343.15, 0.390, "parts add up"},
		{"m3/h", "0.5 % of reading", 0.01, 5e-5, "of reading"},
		{"m3/h", "0.5 % of rate + 0.1 % of 36 m3/h", 0.01, 6e-5, "5e-5 + 0.001·0.01"},
		{"barg", "0.25 % of 16 bar", 500e3, 4000, "of span, 0.0025·1.6 MPa"},
		{"barg", "0.25 % of 16 barg", 500e3, 4000, "a span has no barometer"},
		{"barg", "1 % of reading", 500e3, 4000, "4 barg on the scale, 0.01·400 kPa"},
		{"bar", "1 % of reading", 500e3, 5000, "5 bar on the scale"},
		{"Nm3/h", "2 Nm3/h", 10, 2 * 101325 / (8.31446261815324 * 273.15) / 3600, "DIN 1343"},
	} {
		text := strings.Replace(plant, "unit: °C, accuracy: ± 0.3 K", "unit: "+tt.unit+", accuracy: "+tt.accuracy, 1)
		s, err := Parse("plant.yaml", []byte(strings.ReplaceAll(text, "outlet: TT-2", "outlet: 80 °C")))
		if err != nil {
			t.Errorf("%s in %s: %v", tt.accuracy, tt.unit, err)
			continue
		}
		equal(t, tt.accuracy+" in "+tt.unit+" ("+tt.source+")", s.Tags[1].Accuracy.HalfWidth(tt.at), tt.want)
	}
}
