package site

import (
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"regexp"
	"strings"
	"testing"
	"time"

	"heatreeve/thermo"
	"heatreeve/thermo/unit"
)

const plant = `
site: Saltmarsh Laundry
timezone: Europe/Dublin
barometer: 100 kPa
broker: {url: mqtt://127.0.0.1}
fluids:
  glycol: {propylene glycol: 32 %, uncertainty: 0.6 %}
  flue: {gas: {N2: 71 %, CO2: 9 %, H2O: 18 %, O2: 2 %}}
tags:
  TT-1: {topic: a/tt1, unit: °F, value: /v, time: /ts, time_unit: ms, accuracy: IEC 60751 A, max_age: 30 s, range: [32 °F, 392 °F]}
  TT-2: {topic: a/tt2, unit: °C, accuracy: ± 0.3 K}
  FT-1: {topic: a/ft1, unit: m3/h, accuracy: 0.5 % of reading}
  PT-1: {topic: a/pt1, unit: barg, accuracy: 0.25 % of 16 bar, range: [0 barg, 16 barg]}
  GT-1: {topic: a/gt1, unit: Nm3/h, accuracy: 1 % of reading + 0.5 % of 2 000 Nm3/h}
loads:
  washers:
    stream: {fluid: water, flow: FT-1, inlet: TT-1, outlet: TT-2, pressure: PT-1, meter_at: outlet, gives: heat, idle_below: 0.36 m3/h}
    design: {duty: 640 kW, allow: 8 %, lasting: 5 min, inlet: 130 °C, outlet: 90 °C, pressure: 4 barg}
  drying air:
    stream: {fluid: dry air, flow: GT-1, inlet: 15 °C, outlet: TT-1, pressure: 0.2 barg, outlet_pressure: 1.1 bar, takes: heat, margin: 9 °F}
`

func TestParse(t *testing.T) {
	s, err := Parse("etc/plant.yaml", []byte(plant))
	if err != nil {
		t.Fatal(err)
	}
	if s.Name != "Saltmarsh Laundry" || s.Zone.String() != "Europe/Dublin" || s.Barometer != 100e3 {
		t.Errorf("top: %q, %v, %v Pa", s.Name, s.Zone, s.Barometer)
	}
	want := Broker{URL: "mqtt://127.0.0.1:1883", ClientID: "heatreeve-saltmarsh-laundry", Queue: 1000}
	if !reflect.DeepEqual(s.Broker, want) {
		t.Errorf("broker = %+v, want %+v", s.Broker, want)
	}
	if s.Timing != (Timing{time.Second, 5 * time.Second, 30 * time.Second, 10 * time.Second, time.Second, 0}) {
		t.Errorf("timing without a block = %+v", s.Timing)
	}
	if s.History != (History{730 * 24 * time.Hour, 256 << 20}) {
		t.Errorf("history without a block = %+v", s.History)
	}
	if len(s.Fluids) != 2 || s.Fluids["glycol"] == nil || s.Fluids["flue"] == nil {
		t.Errorf("fluids = %v", s.Fluids)
	}
	if len(s.Tags) != 5 || len(s.Loads) != 2 || s.Tags[4].Name != "GT-1" || s.Loads[1].Name != "drying air" {
		t.Fatalf("%d tags and %d loads, out of file order", len(s.Tags), len(s.Loads))
	}
}

func TestParseTags(t *testing.T) {
	s, err := Parse("plant.yaml", []byte(plant))
	if err != nil {
		t.Fatal(err)
	}
	tt1, pt1, tt2 := s.Tags[0], s.Tags[3], s.Tags[1]
	if tt1.Topic != "a/tt1" || tt1.Value != "/v" || tt1.Time != "/ts" || tt1.TimeFormat != "ms" || tt1.MaxAge != 30*time.Second || tt1.QoS != 1 {
		t.Errorf("TT-1 = %+v", tt1)
	}
	// The range of TT-1 is 0 °C to 200 °C.
	equal(t, "TT-1 at 212 °F", tt1.Scale*212+tt1.Offset, 373.15)
	equal(t, "TT-1 low end", tt1.Min, 273.15)
	equal(t, "TT-1 high end", tt1.Max, 473.15)
	if tt2.Value != "" || tt2.Time != "" || tt2.TimeFormat != "" || tt2.MaxAge != time.Minute || tt2.Min != 0 || tt2.Max != 5000 {
		t.Errorf("defaults of TT-2 = %+v", tt2)
	}
	equal(t, "PT-1 at 3 barg, absolute", pt1.Scale*3+pt1.Offset, 400e3)
	equal(t, "PT-1 low end, absolute", pt1.Min, 100e3)
	equal(t, "PT-1 high end, absolute", pt1.Max, 1.7e6)
}

func TestParseLoads(t *testing.T) {
	s, err := Parse("plant.yaml", []byte(plant))
	if err != nil {
		t.Fatal(err)
	}
	w, a := s.Loads[0], s.Loads[1].Stream
	if !w.Stream.Gives || !w.Stream.MeterAtOutlet || w.Stream.FlowKind != unit.VolumeFlow || w.Stream.FluidName != "water" {
		t.Errorf("washers: %+v", w.Stream)
	}
	if w.Stream.Flow.Tag != 2 || w.Stream.Inlet.Tag != 0 || w.Stream.Outlet.Tag != 1 || w.Stream.Pressure.Tag != 3 || w.Stream.OutletPressure.Tag != 3 {
		t.Errorf("washers: tags of %+v", w.Stream)
	}
	equal(t, "idle below", w.Stream.IdleBelow, 1e-4)
	equal(t, "default margin", w.Stream.Margin, 5)
	if w.Design.Duty != 640e3 || w.Design.Allow != 0.08 || w.Design.Lasting != 5*time.Minute {
		t.Errorf("design = %+v", w.Design)
	}
	equal(t, "design inlet", w.Design.Inlet, 403.15)
	equal(t, "design pressure, absolute", w.Design.Pressure, 500e3)
	if a.Gives || a.FlowKind != unit.MolarFlow || !a.Inlet.Constant() || a.Outlet.Constant() {
		t.Errorf("drying air: %+v", a)
	}
	equal(t, "constant inlet", a.Inlet.Value, 288.15)
	equal(t, "gauge constant, absolute", a.Pressure.Value, 120e3)
	equal(t, "outlet pressure", a.OutletPressure.Value, 110e3)
	equal(t, "margin of 9 °F", a.Margin, 5)
	if d := s.Loads[1].Design; d != (Design{Lasting: 10 * time.Minute}) {
		t.Errorf("no design block = %+v", d)
	}
}

// The humidity of a stream of moist air, by a tag or a constant, and its coil.
func TestParseHumidity(t *testing.T) {
	s, err := Parse("plant.yaml", []byte(strings.Replace(plant, "loads:\n", `  RH-1: {topic: a/rh1, unit: "%", accuracy: 2 %}
loads:
  coil: {stream: {fluid: moist air, flow: FT-1, inlet: TT-1, outlet: TT-2, pressure: 1 bar, meter_at: inlet, relative_humidity: RH-1, coil: TT-2, gives: heat}}
  duct: {stream: {fluid: Moist Air, flow: FT-1, inlet: TT-1, outlet: TT-2, pressure: 1 bar, meter_at: inlet, wet_bulb: 18 °C, margin: 2 K, gives: heat}}
`, 1)))
	if err != nil {
		t.Fatal(err)
	}
	coil, duct, washers := s.Loads[0].Stream, s.Loads[1].Stream, s.Loads[2].Stream
	if coil.HumidityKind != thermo.RelativeHumidity || coil.Humidity.Tag != 5 || !coil.HasCoil || coil.Coil.Tag != 1 || coil.Margin != 1 {
		t.Errorf("coil: %+v", coil)
	}
	if duct.HumidityKind != thermo.WetBulb || !duct.Humidity.Constant() || duct.HasCoil || duct.Margin != 2 || duct.FluidName != "moist air" {
		t.Errorf("duct: %+v", duct)
	}
	equal(t, "wet bulb", duct.Humidity.Value, 291.15)
	if washers.HumidityKind != 0 || washers.HasCoil || !washers.Humidity.Constant() || !washers.Coil.Constant() {
		t.Errorf("a stream of water has %+v", washers)
	}
	if rh := s.Tags[5]; rh.Scale != 0.01 || rh.Min != 0 || rh.Max != 1.02 || rh.Accuracy != (Accuracy{Abs: 0.02}) {
		t.Errorf("RH-1 = %+v", rh)
	}
}

func equal(t *testing.T, what string, got, want float64) {
	t.Helper()
	if math.Abs(got-want) > 1e-12*math.Abs(want) {
		t.Errorf("%s = %v, want %v", what, got, want)
	}
}

func TestGaugePressureNeedsABarometer(t *testing.T) {
	_, err := Parse("plant.yaml", []byte(strings.Replace(plant, "barometer: 100 kPa\n", "", 1)))
	if err == nil || !strings.Contains(err.Error(), "barometer") || !strings.Contains(err.Error(), "gauge") {
		t.Errorf("gauge pressures without a barometer: %v", err)
	}
}

// A tag without a range has the bounds of any plant, so that the absurd number of a
// transmitter without a signal is refused.
func TestBoundsWithoutARange(t *testing.T) {
	bare := regexp.MustCompile(`, range: \[[^]]*\]`).ReplaceAllString(plant, "")
	s, err := Parse("plant.yaml", []byte(bare))
	if err != nil {
		t.Fatal(err)
	}
	for _, tag := range s.Tags {
		want := [2]float64{0, 5000}
		switch tag.Unit.Dimension {
		case unit.Pressure:
			want = [2]float64{0, 1e9}
		case unit.MassFlow, unit.VolumeFlow:
			want = [2]float64{-1e5, 1e5}
		case unit.MolarFlow:
			want = [2]float64{-1e7, 1e7}
		}
		if tag.Min != want[0] || tag.Max != want[1] {
			t.Errorf("%s: %g to %g, want %v", tag.Name, tag.Min, tag.Max, want)
		}
	}
}

// Without idle_below nothing flows within half a percent of the meter's range, or
// within the part of its accuracy that does not depend on the reading.
func TestIdleBelowByItself(t *testing.T) {
	const hour = 1.0 / 3600
	for _, tt := range []struct {
		tag  string
		want float64 // m³/s
	}{
		{"accuracy: 0.5 % of reading", 0},
		{"accuracy: 0.5 % of reading, range: [0 m3/h, 40 m3/h]", 0.2 * hour},
		{"accuracy: 1 % of 40 m3/h, range: [0 m3/h, 40 m3/h]", 0.4 * hour},
		{"accuracy: 1 % of 40 m3/h", 0.4 * hour},
	} {
		s, err := Parse("plant.yaml", []byte("site: X\ntimezone: UTC\nbroker: {url: \"mqtt://127.0.0.1\"}\ntags:\n"+
			"  T1: {topic: a, unit: °C, accuracy: IEC 60751 A}\n  T2: {topic: b, unit: °C, accuracy: IEC 60751 A}\n  F: {topic: c, unit: m3/h, "+tt.tag+"}\n"+
			"loads:\n  l: {stream: {fluid: water, flow: F, inlet: T1, outlet: T2, pressure: 4 bar, meter_at: inlet, gives: heat}}\n"))
		if err != nil {
			t.Fatal(err)
		}
		equal(t, tt.tag, s.Loads[0].Stream.IdleBelow, tt.want)
	}
}

func TestLoadNeedsAFile(t *testing.T) {
	path := filepath.Join(t.TempDir(), "none.yaml")
	var faults Faults
	if _, err := Load(path); !errors.Is(err, os.ErrNotExist) || errors.As(err, &faults) {
		t.Errorf("Load of no file = %v", err)
	}
	huge := filepath.Join(t.TempDir(), "huge.yaml")
	if err := os.WriteFile(huge, make([]byte, maxFile+1), 0o600); err != nil {
		t.Fatal(err)
	}
	if _, err := Load(huge); !errors.As(err, &faults) || len(faults) != 1 || !strings.Contains(faults[0].Message, "larger than 16 MiB") {
		t.Errorf("Load of 16 MiB and a byte = %.200v", err)
	}
}

// A thousand wrong loads are a thousand faults, and take no time to speak of.
func TestManyFaults(t *testing.T) {
	var b strings.Builder
	b.WriteString(plant)
	for i := range 1000 {
		fmt.Fprintf(&b, "  load %d: {stream: {fluid: water, flow: FT-1, inlet: TT-1, outlet: TT-9, pressure: PT-1, meter_at: inlet, gives: heat}}\n", i)
	}
	_, err := Parse("plant.yaml", []byte(b.String()))
	var faults Faults
	if !errors.As(err, &faults) || len(faults) != 1000 {
		t.Fatalf("%d faults, want 1000", len(faults))
	}
	var first Fault
	if !errors.As(err, &first) || first != faults[0] {
		t.Errorf("the first fault by errors.As is %v, want %v", first, faults[0])
	}
}
