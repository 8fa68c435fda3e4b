package unit

import (
	"fmt"
	"math"
	"strings"
	"testing"
)

func TestParse(t *testing.T) {
	for _, tt := range []struct {
		text   string
		want   float64 // SI
		d      Dimension
		gauge  bool
		source string
	}{
		{"640 kW", 640e3, Power, false, "SI"},
		{"12.5 m3/h", 12.5 / 3600, VolumeFlow, false, "SI"},
		{"12.5 m³/h", 12.5 / 3600, VolumeFlow, false, "SI"},
		{"3.2 barg", 3.2e5, Pressure, true, "NIST SP 811"},
		{"3.2 bar(g)", 3.2e5, Pressure, true, "NIST SP 811"},
		{"3.2 bar (g)", 3.2e5, Pressure, true, "NIST SP 811"},
		{"4 bar(a)", 4e5, Pressure, false, "NIST SP 811"},
		{"30 psig", 206842.71879505083, Pressure, true, "NIST SP 811"},
		{"100.9 kPa", 100900, Pressure, false, "SI"},
		{"180 °F", 355.3722222222222, Temperature, false, "K = (°F + 459.67)/1.8"},
		{"180 degF", 355.3722222222222, Temperature, false, "K = (°F + 459.67)/1.8"},
		{"-40 F", 233.15, Temperature, false, "the scales meet at -40"},
		{"−40 C", 233.15, Temperature, false, "the scales meet at -40"},
		{"0 K", 0, Temperature, false, "SI"},
		{"45 gpm", 45 * 6.30901964e-5, VolumeFlow, false, "231 in3 a minute"},
		{"45 imp gpm", 45 * 7.576816666666667e-5, VolumeFlow, false, "4.54609 L a minute"},
		{"2 400 Nm3/h", 2400 * 101325 / (8.31446261815324 * 273.15) / 3600, MolarFlow, false, "DIN 1343"},
		{"2\u2009400 Nm³/h", 2400 * 101325 / (8.31446261815324 * 273.15) / 3600, MolarFlow, false, "DIN 1343"},
		{"2\u202f400 Nm3/h", 2400 * 101325 / (8.31446261815324 * 273.15) / 3600, MolarFlow, false, "DIN 1343"},
		{"1 000 000\u00a0W", 1e6, Power, false, "SI"},
		{"100 Sm3/h", 100 * 101325 / (8.31446261815324 * 288.15) / 3600, MolarFlow, false, "ISO 13443"},
		{"100 scfm (60 °F)", 100 * 101325 * 0.028316846592 / (8.31446261815324 * 519.67 / 1.8) / 60, MolarFlow, false, "natural-gas convention"},
		{"20 ton of refrigeration", 20 * 3516.8528420666667, Power, false, "12 000 Btu/h"},
		{"20 TR", 20 * 3516.8528420666667, Power, false, "12 000 Btu/h"},
		{"1.2 MMBTU/hr", 1.2 * 293071.0701722222, Power, false, "NIST SP 811"},
		{"1e3 kg/h", 1000. / 3600, MassFlow, false, "SI"},
		{"+1.5e+1 t/h", 15000. / 3600, MassFlow, false, "SI"},
		{"8%", 0.08, Ratio, false, "SI"},
		{"4.18 kJ/(kg·K)", 4180, SpecificHeat, false, "SI"},
		{"4.18 kJ/kg K", 4180, SpecificHeat, false, "SI"},
		{"998 kg/m³", 998, Density, false, "SI"},
		{"730 d", 730 * 86400, Duration, false, "SI"},
		{"256 MiB", 256 << 20, Size, false, "IEC 80000-13"},
		{"3 600 s", 3600, Duration, false, "SI"},
		{"0.49 kWh/K", 0.49 * 3.6e6, HeatCapacity, false, "1 kWh is 3.6 MJ"},
		{"12 kJ/°C", 12e3, HeatCapacity, false, "a kelvin of difference is a degree Celsius of it"},
		{"10 Btu/°F", 10 * 1055.05585262 * 1.8, HeatCapacity, false, "NIST SP 811: 1.899101e3 J/K for the Btu"},
		{"100 Nm3", 100 * 101325 / (8.31446261815324 * 273.15), Amount, false, "DIN 1343: 44.615 mol"},
		{"100 Sm³", 100 * 101325 / (8.31446261815324 * 288.15), Amount, false, "ISO 13443: 42.293 mol"},
		{"65 536 pulses", 65536, Count, false, "a number"},
	} {
		q, err := Parse(tt.text)
		if err != nil {
			t.Errorf("Parse(%q): %v", tt.text, err)
			continue
		}
		// 1e-14: a few roundings of a float64 between two ways to multiply.
		if !(math.Abs(q.SI()-tt.want) <= 1e-14*tt.want) || q.Unit.Dimension != tt.d || q.Unit.Gauge != tt.gauge {
			t.Errorf("Parse(%q) = %v %v (gauge %v); want %v %v (gauge %v) by %s",
				tt.text, q.SI(), q.Unit.Dimension, q.Unit.Gauge, tt.want, tt.d, tt.gauge, tt.source)
		}
	}
}

func TestParseRefuses(t *testing.T) {
	for _, tt := range []struct {
		text string
		say  []string
	}{
		{"12,4 kW", []string{`"12,4 kW"`, "decimal separator must be a point"}},
		{"1,234.5 kW", []string{"decimal separator must be a point"}},
		{"1'234 kW", []string{"thousands are parted by a space"}},
		{"1_000 kW", []string{"thousands are parted by a space"}},
		{"2 40 kW", []string{"groups of three"}},
		{"1234 567 kW", []string{"groups of three"}},
		{"1 2345 kW", []string{"groups of three"}},
		{"1.2.3 kW", []string{"one decimal point"}},
		{"5. kW", []string{"digits on both sides"}},
		{".5 kW", []string{"want a number"}},
		{"-.5 kW", []string{"want a number"}},
		{"", []string{"want a number"}},
		{"kW", []string{"want a number"}},
		{"- kW", []string{"want a number"}},
		{"NaN kW", []string{"want a number"}},
		{"Inf kW", []string{"want a number"}},
		{"1e999 kW", []string{"too large"}},
		{"1e308 GJ", []string{"too large"}},
		{"640", []string{"unit is missing"}},
		{"1e3e3 kW", []string{`unit "e3 kW" is not known`}},
		{"640 kw", []string{`unit "kw" is not known`, "letter case matters", `"kW"`}},
		{"2 mw", []string{`"MW"`}},
		{"2 mW", []string{`unit "mW" is not known`, `"MW"`}},
		{"2 KPA", []string{`"kPa"`}},
		{"2 m3h", []string{`near:`, `"m3/h"`}},
		{"2 barq", []string{`near: "bar", "barg"`}},
		{"2 furlong", []string{`unit "furlong" is not known`}},
		{"100 scfm", []string{`"scfm (60 °F)"`, `"scfm (68 °F)"`, `"standard air cfm"`}},
		{"3 ton", []string{"short ton", "ton of refrigeration"}},
		{"3 therm", []string{"therm (US)", "therm (EC)"}},
		{"-300 °C", []string{"below absolute zero"}},
		{"1 k\xffW", []string{"UTF-8"}},
	} {
		q, err := Parse(tt.text)
		if err == nil {
			t.Errorf("Parse(%q) = %v, want an error", tt.text, q)
			continue
		}
		for _, say := range tt.say {
			if !strings.Contains(err.Error(), say) {
				t.Errorf("Parse(%q): %q does not say %q", tt.text, err, say)
			}
		}
	}
}

func TestParseAs(t *testing.T) {
	q, err := ParseAs("5 K", TemperatureDifference)
	if err != nil || q.Unit.Dimension != TemperatureDifference || q.SI() != 5 {
		t.Errorf("a margin of 5 K is %v, %v; want a difference of 5 K", q, err)
	}
	q, err = ParseAs("9 °F", TemperatureDifference)
	if err != nil || !(math.Abs(q.SI()-5) <= 1e-14) {
		t.Errorf("a difference of 9 °F is %v K, %v; want 5", q.SI(), err)
	}
	q, err = ParseAs("-3 °C", TemperatureDifference, Temperature)
	if err != nil || q.SI() != -3 {
		t.Errorf("-3 °C is %v, %v; want a difference of -3 K, the first that is allowed", q.SI(), err)
	}
	for _, tt := range []struct {
		text    string
		allowed []Dimension
		say     []string
	}{
		{"12 m3/h", []Dimension{Pressure}, []string{`"m3/h" is a unit of volume flow`, "allowed here: pressure (bar, barg, kPa"}},
		{"12 kW", []Dimension{MassFlow, VolumeFlow}, []string{`"kW" is a unit of power`, "mass flow (kg/s,", "or volume flow (m3/h,"}},
		{"12 kgs", []Dimension{MassFlow}, []string{`near: "kg/s"`}},
		{"12", []Dimension{Power}, []string{"unit is missing", "power (kW, MW"}},
		{"warm", []Dimension{Temperature}, []string{"want a number", "temperature (°C, K"}},
	} {
		_, err := ParseAs(tt.text, tt.allowed...)
		if err == nil {
			t.Errorf("ParseAs(%q, %v) passes", tt.text, tt.allowed)
			continue
		}
		for _, say := range tt.say {
			if !strings.Contains(err.Error(), say) {
				t.Errorf("ParseAs(%q): %q does not say %q", tt.text, err, say)
			}
		}
	}
}

func TestDimensionsHaveNames(t *testing.T) {
	for d := Temperature; d.valid(); d++ {
		if d.String() == "" || d.SI() == "" || len(Named(d)) == 0 {
			t.Errorf("dimension %d: name %q, SI %q, %d units", d, d, d.SI(), len(Named(d)))
		}
	}
	if got := Dimension(99).String(); got != "Dimension(99)" {
		t.Errorf("an unknown dimension is %q", got)
	}
}

// What is accepted is finite in both units, and its text is read back as the
// same quantity.
func FuzzParse(f *testing.F) {
	for _, s := range []string{
		"640 kW", "12.5 m³/h", "3.2 bar(g)", "-40 °F", "2\u202f400 Nm3/h", "1e-7 Pa", "20 ton of refrigeration",
		"12,4 kW", "0.1 %", "-0 K", "1e300 GJ", "8%", "scfm", "12 345 678.901e-3 gpm (UK)", "1 000e3 MW", "\xff",
	} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, s string) {
		q, err := Parse(s)
		if err != nil {
			if q != (Quantity{}) {
				t.Errorf("Parse(%q) = %v beside the error %v", s, q, err)
			}
			return
		}
		for _, x := range []float64{q.Value, q.SI()} {
			if math.IsNaN(x) || math.IsInf(x, 0) {
				t.Fatalf("Parse(%q) has the value %v", s, x)
			}
		}
		again, err := Parse(q.String())
		if err != nil || again != q {
			t.Fatalf("Parse(%q) = %v; reading that back: %v, %v", s, q, again, err)
		}
	})
}

func ExampleParse() {
	for _, s := range []string{"640 kW", "3.2 barg", "180 °F", "2 400 Nm3/h"} {
		q, err := Parse(s)
		if err != nil {
			fmt.Println(err)
			continue
		}
		fmt.Printf("%v is %.6g %s\n", q, q.SI(), q.Unit.Dimension.SI())
	}
	// Output:
	// 640 kW is 640000 W
	// 3.2 barg is 320000 Pa
	// 180 °F is 355.372 K
	// 2400 Nm3/h is 29.7434 mol/s
}

func ExampleParseAs() {
	_, err := ParseAs("12 m3/h", Power)
	fmt.Println(err)
	_, err = ParseAs("640 kw", Power)
	fmt.Println(err)
	// Output:
	// "12 m3/h": "m3/h" is a unit of volume flow; allowed here: power (kW, MW, W, GW, Btu/h, MMBtu/h, kBtu/h, ton of refrigeration, ...)
	// "640 kw": unit "kw" is not known; letter case matters, near: "kW"; allowed here: power (kW, MW, W, GW, Btu/h, MMBtu/h, kBtu/h, ton of refrigeration, ...)
}

func ExampleUnit_Of() {
	kW, err := Lookup("kW")
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println(kW.Of(163602), kW)
	// Output: 163.602 kW
}

// What a person wrote in decimals is in SI what they would have written there.
func TestDecimal(t *testing.T) {
	for text, want := range map[string]float64{
		"35 %": 0.35, "350 g/kg": 0.35, "69 %": 0.69, "-20 °C": 253.15, "10 ppm": 1e-5, "0.1 %": 1e-3, "0 %": 0, "1 K": 1, "-20 kPa": -20e3,
	} {
		q, err := Parse(text)
		if err != nil {
			t.Fatal(err)
		}
		if got := Decimal(q.SI()); got != want {
			t.Errorf("%s is %v, want %v", text, got, want)
		}
	}
	for _, x := range []float64{math.Inf(1), math.Inf(-1), math.MaxFloat64, -math.MaxFloat64} {
		if got := Decimal(x); math.Signbit(got) != math.Signbit(x) || math.Abs(got) < 1e308 {
			t.Errorf("%v becomes %v", x, got)
		}
	}
	if got := Decimal(math.NaN()); !math.IsNaN(got) {
		t.Errorf("no number becomes %v", got)
	}
}

// Where case tells nothing a unit is found in any; where it tells two apart, it must be
// right, and what is ambiguous stays so.
func TestParseFold(t *testing.T) {
	for _, tt := range []struct {
		text    string
		allowed []Dimension
		want    string
	}{
		{"35 G/KG", []Dimension{Ratio}, "35 g/kg"}, {"840 KG/M³", []Dimension{Density}, "840 kg/m3"}, {"20 PERCENT", []Dimension{Ratio}, "20 %"},
		{"10 BAR", []Dimension{Pressure}, "10 bar"}, {"3 mbar", []Dimension{Pressure}, "3 mbar"}, {"5 mW", []Dimension{Power}, ""}, {"5 kw", []Dimension{Power}, "5 kW"}, {"5 MW", []Dimension{Power}, "5 MW"},
		{"5 Mw", []Dimension{Power}, "5 MW"}, {"35 G/KG", []Dimension{Density}, ""}, {"35 G/KG", nil, ""}, {"3 TON", []Dimension{Mass}, ""},
	} {
		q, err := ParseFold(tt.text, tt.allowed...)
		if tt.want == "" {
			if err == nil {
				t.Errorf("ParseFold(%q, %v) = %v", tt.text, tt.allowed, q)
			}
			continue
		}
		if err != nil || q.String() != tt.want {
			t.Errorf("ParseFold(%q, %v) = %v, %v; want %s", tt.text, tt.allowed, q, err, tt.want)
		}
	}
}
