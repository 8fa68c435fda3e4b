package agent

import (
	"math"
	"testing"

	"heatreeve/agent/loads"
	"heatreeve/ingest/screen"
	"heatreeve/thermo"
	"heatreeve/thermo/air"
	"heatreeve/thermo/gas"
	"heatreeve/thermo/water"
)

// revised is a fluid as a later release might know it: the enthalpy differs in the
// last bit.
type revised struct{ thermo.Fluid }

func (f revised) At(T, p float64) (thermo.Properties, error) {
	s, err := f.Fluid.At(T, p)
	s.Enthalpy = math.Nextafter(s.Enthalpy, math.Inf(1))
	return s, err
}

// Rules are the same for the same site and program, and others as soon as the site
// file or any property of a fluid is another.
func TestRules(t *testing.T) {
	of := func(site [32]byte, fluids ...thermo.Fluid) [32]byte {
		var cfg loads.Config
		for _, f := range fluids {
			cfg.Loads = append(cfg.Loads, loads.Load{Stream: loads.Stream{Fluid: f}})
		}
		return rulesOf(site, &cfg)
	}
	dry, err := gas.DryAir(gas.Best)
	if err != nil {
		t.Fatal(err)
	}
	fluids := []thermo.Fluid{water.Liquid(), water.Steam(), dry, air.Live()}
	same := of([32]byte{1}, fluids...)
	if of([32]byte{1}, fluids...) != same {
		t.Error("the same rules have two digests")
	}
	if of([32]byte{2}, fluids...) == same {
		t.Error("another site file goes by the same rules")
	}
	for i, f := range fluids {
		changed := append([]thermo.Fluid(nil), fluids...)
		changed[i] = revised{f}
		if of([32]byte{1}, changed...) == same {
			t.Errorf("another %s goes by the same rules", f.Name())
		}
	}
}

// The units that people are shown figures in are no rules of a load.
func TestUnitsToShowAreNoRules(t *testing.T) {
	plain, other := plantOf(parsed(t, benchSite)), plantOf(parsed(t, "shown_in: {duty: Btu/h, heat: GJ, temperature: °F, flow: lb/h}\n"+benchSite))
	for i := range plain.Loads {
		if rulesOfLoad(&plain, i) != rulesOfLoad(&other, i) {
			t.Errorf("load %s goes by other rules", plain.Loads[i].Name)
		}
	}
	if len(plain.Loads) == 0 {
		t.Error("no load was compared")
	}
}

// The rules of a load are its own: where its tags stand, and what other loads do, is none
// of them.
func TestRulesOfLoad(t *testing.T) {
	of := func(change func(c *loads.Config)) [32]byte {
		tank := loads.Load{Vessel: &loads.Vessel{Fluid: water.Liquid(), Temperature: loads.FromTag(2), Content: loads.Constant(5)}}
		cfg := loads.Config{Grid: sec, Tags: []loads.Tag{
			{Name: "FQ", OnChange: true, Alive: 1, Counter: &loads.Counter{Modulus: 10}}, {Name: "LIFE"}, {Name: "TI", Beside: 3, HasBeside: true, Screen: &screen.Limits{Fastest: 1}}, {Name: "other"},
		}, Loads: []loads.Load{{Stream: loads.Stream{Fluid: water.Liquid(), Flow: loads.FromTag(0), Inlet: loads.FromTag(2)}}, tank}}
		change(&cfg)
		return rulesOfLoad(&cfg, 0)
	}
	same := of(func(*loads.Config) {})
	for name, change := range map[string]func(c *loads.Config){
		"another tag's bound": func(c *loads.Config) { c.Tags = append(c.Tags, loads.Tag{MaxAge: 7}) },
		"the other load":      func(c *loads.Config) { c.Loads[1].Vessel.Shell = 7 },
		"the places of tags": func(c *loads.Config) {
			c.Tags = append([]loads.Tag{{Name: "new"}}, c.Tags...)
			c.Tags[3].Beside = 4
			c.Tags[1].Alive, c.Loads[0].Stream.Flow.Tag, c.Loads[0].Stream.Inlet.Tag = 2, 1, 3
			c.Loads[0].Stream.Outlet.Tag, c.Loads[0].Stream.Pressure.Tag, c.Loads[0].Stream.OutletPressure.Tag = 1, 1, 1
		},
	} {
		if of(change) != same {
			t.Errorf("%s changes the rules", name)
		}
	}
	for name, change := range map[string]func(c *loads.Config){
		"the bridge":        func(c *loads.Config) { c.Bridge = 7 },
		"the fluid":         func(c *loads.Config) { c.Loads[0].Stream.Fluid = revised{water.Liquid()} },
		"the way it serves": func(c *loads.Config) { c.Loads[0].Stream.Gives = true },
		"a constant":        func(c *loads.Config) { c.Loads[0].Stream.Outlet = loads.Constant(7) },
		"what is counted":   func(c *loads.Config) { c.Tags[0].Meaning = "litres" },
		"a roll-over":       func(c *loads.Config) { c.Tags[0].Counter.Modulus = 7 },
		"a sign of life":    func(c *loads.Config) { c.Tags[1].MaxAge = 7 },
		"a test":            func(c *loads.Config) { c.Tags[2].Screen.Fastest = 2 },
		"a sensor beside":   func(c *loads.Config) { c.Tags[3].MaxAge = 7 },
		"a sensor that names its tag": func(c *loads.Config) {
			c.Tags = append(c.Tags, loads.Tag{Name: "TI-B", Beside: 2, HasBeside: true})
		},
		"a pump":           func(c *loads.Config) { c.Loads[0].HasRunning = true },
		"a bypass":         func(c *loads.Config) { c.Loads[0].HasBypass = true },
		"a witness":        func(c *loads.Config) { c.Loads[0].HasWitness = true },
		"another tag":      func(c *loads.Config) { c.Loads[0].Stream.Inlet.Tag = 3 },
		"the kind of load": func(c *loads.Config) { c.Loads[0].Vessel = c.Loads[1].Vessel },
	} {
		if of(change) == same {
			t.Errorf("%s does not change the rules", name)
		}
	}
}
