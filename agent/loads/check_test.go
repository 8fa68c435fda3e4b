package loads

import (
	"math"
	"strings"
	"testing"

	"heatreeve/thermo"
)

// tank is a vessel of the liquid that New takes.
func tank() Vessel {
	return Vessel{
		Fluid: liquid, Temperature: FromTag(0), Pressure: Constant(5e5),
		Content: Constant(500), ContentKind: ContentMass, Over: 10 * minute, Still: 0.01,
	}
}

var inert = steady{cp: 1000, rho: 2, molar: 0.028, hi: 9999, phase: thermo.Gas}

func TestNewRefusesVessels(t *testing.T) {
	for _, tt := range []struct {
		change func(*Vessel)
		want   string
	}{
		{func(v *Vessel) { v.Fluid = nil }, "without a fluid"},
		{func(v *Vessel) { v.Temperature = Constant(300) }, "temperature of a vessel is a constant"},
		{func(v *Vessel) { v.ContentKind = 0 }, "content of kind 0"},
		{func(v *Vessel) { v.Content = Constant(0) }, "content of 0"},
		{func(v *Vessel) { v.Content = Constant(-1) }, "content of -1"},
		{func(v *Vessel) { v.Content = Constant(math.Inf(1)) }, "content of +Inf"},
		{func(v *Vessel) { v.Rigid = true }, "rigid vessel of steady, a liquid"},
		{func(v *Vessel) { v.Fluid, v.Rigid, v.ContentKind = inert, true, ContentVolume }, "at constant pressure"},
		{func(v *Vessel) { v.Shell = -1 }, "shell of -1"},
		{func(v *Vessel) { v.Over = 0 }, "over 0 s"},
		{func(v *Vessel) { v.Still = math.NaN() }, "still of NaN"},
		{func(v *Vessel) { v.IdleBelow = -1 }, "idle below -1 W"},
	} {
		v := tank()
		tt.change(&v)
		_, err := New(Config{Grid: second, Tags: []Tag{{Name: "TT"}}, Loads: []Load{{Name: "tank", Vessel: &v}}})
		if err == nil || !strings.Contains(err.Error(), `load "tank": `) || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("error %v, want one of the tank with %q", err, tt.want)
		}
	}
}

func TestNewRefusesCorrections(t *testing.T) {
	for _, tt := range []struct {
		change func(*Stream)
		want   string
	}{
		{func(s *Stream) { s.Hold = -1 }, "hold of -1 m³"},
		{func(s *Stream) { s.Hold = math.NaN() }, "hold of NaN m³"},
		{func(s *Stream) { s.Hold, s.HumidityKind = 1, thermo.DewPoint }, "humidity is measured"},
		{func(s *Stream) { s.Stored = -1 }, "stored heat of -1 J/K"},
		{func(s *Stream) { s.Stored = 1e6 }, "over 0 s"},
		{func(s *Stream) { s.Stored, s.StoredOver, s.Inlet, s.Outlet = 1, 1, Constant(1), Constant(1) }, "never changes"},
		{func(s *Stream) { s.Pair = 1.1 }, "between 0 and 1"},
	} {
		cfg := plant(liquid)
		tt.change(&cfg.Loads[0].Stream)
		if _, err := New(cfg); err == nil || !strings.Contains(err.Error(), `load "boiler": `) || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("error %v, want one of the boiler with %q", err, tt.want)
		}
	}
}

func TestNewRefusesWhatTakesTwo(t *testing.T) {
	for _, tt := range []struct {
		change func(*Config)
		want   string
	}{
		{func(c *Config) { c.Loads[0].Stream.Stored, c.Loads[0].Stream.StoredOver = 1, 2*second }, "less than 3 steps of the grid of 1 s"},
		{func(c *Config) { c.Tags[flow].Counter, c.Loads[0].Stream.Hold = new(Counter), 1 }, `flow is counted`},
		{func(c *Config) { c.Tags[flow].Counter, c.Loads[0].Stream.HasPump = new(Counter), true }, `flow is counted`},
	} {
		cfg := plant(liquid)
		tt.change(&cfg)
		if _, err := New(cfg); err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("error %v, want one with %q", err, tt.want)
		}
	}
}

// Everything that is wrong is told at once.
func TestNewTellsAllFaults(t *testing.T) {
	cfg := plant(liquid)
	cfg.Tags[0].OnChange, cfg.Tags[0].Alive = true, 7
	cfg.Loads[0].Stream.Hold = -1
	if _, err := New(cfg); err == nil || !strings.Contains(err.Error(), `tag "FT"`) || !strings.Contains(err.Error(), `load "boiler"`) {
		t.Errorf("error %v, want one of FT and of the boiler", err)
	}
}
