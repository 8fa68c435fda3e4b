package loads

import (
	"strings"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/air"
)

// By hand, from the saturation pressure of 4.2470 kPa at 30 °C (IAPWS-IF97, from
// memory): at 50 % and 101.325 kPa W = 0.621945·2.1235/(101.325 − 2.1235) = 13.313 g/kg,
// cp = (1006 + 1860·W)/(1 + W) = 1017.22 J/(kg K) of moist air, and 1 kg/s cooled by 10 K
// gives 10.172 kW. Such air has its dew point at 18.4 °C (any psychrometric chart).
func TestMoistAirOfTheCooler(t *testing.T) {
	s := Stream{Fluid: air.Live(), FlowKind: MassFlow, Gives: true, Margin: 1, HumidityKind: thermo.RelativeHumidity}
	x := State{Flow: 1, Inlet: 303.15, Outlet: 293.15, Pressure: 101325, OutletPressure: 101325, Humidity: 0.5}
	r, err := Work(&s, x)
	if err != nil || r.Latent {
		t.Fatalf("%+v, %v; want a duty without a remark", r, err)
	}
	near(t, "duty", r.Duty, 10172.2, 0.5)
	for T, want := range map[float64]string{19: "within 1 K of the dew point at 18.4", 18: "below the dew point at 18.4"} {
		x.Outlet = 273.15 + T
		r, err := Work(&s, x)
		if err != nil || !r.Latent || !strings.Contains(r.Note, want) {
			t.Errorf("outlet at %g °C: %+v, %v; want %q", T, r.Remark, err, want)
		}
		near(t, "sensible duty", r.Duty, 1017.22*(30-T), 0.5)
	}
	x.Humidity = 1.1
	if _, err := Work(&s, x); err == nil || !strings.Contains(err.Error(), "humidity at the inlet: relative humidity 110 %") {
		t.Errorf("at 110 %%: %v", err)
	}
}

// BenchmarkAirCooler is the figure of one moist air load with a new value of every tag,
// all of them with an accuracy.
func BenchmarkAirCooler(b *testing.B) {
	cfg := airCooler(thermo.RelativeHumidity, true)
	s := &cfg.Loads[0].Stream
	s.Fluid, s.Pressure = air.Live(), Constant(101325)
	s.OutletPressure = s.Pressure
	for i, a := range []Accuracy{flow: {Rel: 0.01}, inlet: {Abs: 0.3}, outlet: {Abs: 0.3}, humidity: {Abs: 0.03}, coil: {Abs: 0.3}} {
		cfg.Tags[i].Accuracy = a
	}
	e, err := New(cfg)
	if err != nil {
		b.Fatal(err)
	}
	b.ReportAllocs()
	for s := 0.0; b.Loop(); s++ {
		e.Advance(Beat{airAt(s, 30, 20, 0.5, 15), through(s)}, nil)
	}
	if f := e.Snapshot().Loads[0].Figure; !f.Measured() || !f.Latent || f.Share[PartHumidity] == 0 {
		b.Fatalf("figure %+v", f)
	}
}
