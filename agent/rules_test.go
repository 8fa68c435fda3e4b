package agent

import (
	"math"
	"testing"

	"heatreeve/agent/loads"
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
