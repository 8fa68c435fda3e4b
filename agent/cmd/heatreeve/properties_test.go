package main

import (
	"encoding/json"
	"math"
	"slices"
	"strings"
	"testing"

	"heatreeve/thermo/named"
)

func askJSON[T any](t *testing.T, args ...string) T {
	t.Helper()
	status, out, errs := invoke(slices.Insert(slices.Clone(args), 1, "--json")...)
	var v T
	if err := json.Unmarshal([]byte(out), &v); err != nil || status != exitGood || errs != "" {
		t.Fatalf("heatreeve %q: status %d, %q, %v in %s", args, status, errs, err, out)
	}
	return v
}

// IAPWS R7-97(2012), table 5, region 1 at 3 MPa: nine digits as printed.
func TestPropertiesOfWater(t *testing.T) {
	for _, args := range [][]string{
		{"properties", "water", "--temperature", "300 K", "--pressure", "3MPa"},
		{"properties", "--temperature=26.85°C", "Water", "--pressure", "30 bar"},
		{"properties", "--temperature", "26.85 °C", "--pressure", "2.9 MPag", "--barometer", "100 kPa", "--", "water"},
	} {
		v := askJSON[map[string]any](t, args...)
		for key, want := range map[string]float64{
			"temperature_K": 300, "pressure_Pa": 3e6, "enthalpy_J_per_kg": 115331.273, "internal_energy_J_per_kg": 112324.818,
			"cp_J_per_kg_K": 4173.01218, "density_kg_per_m3": 1 / 0.100215168e-2,
		} {
			if got, ok := v[key].(float64); !ok || !(math.Abs(got/want-1) <= 5e-9) {
				t.Errorf("%q: %s = %v, want %.9g", args, key, v[key], want)
			}
		}
		if v["source"] == "" || !(v["cp_relative_uncertainty"].(float64) > 0) || !(v["cv_J_per_kg_K"].(float64) > 0) {
			t.Errorf("%q: %v", args, v)
		}
	}
}

// One temperature is an object, several are an array; the table has a line for each,
// and a temperature below zero is no option.
func TestPropertiesOfSeveralTemperatures(t *testing.T) {
	all := askJSON[[]point](t, "properties", "propylene glycol 32 %", "--temperature", "-10°C, 0 °C,60°C", "--pressure", "4 bar")
	if len(all) != 3 || !(math.Abs(all[0].Temperature-263.15) <= 1e-9) || all[2].Enthalpy <= all[1].Enthalpy {
		t.Errorf("%+v", all)
	}
	status, out, errs := invoke("properties", "propylene glycol 32 %", "--temperature", "-10°C,0°C,60°C")
	if status != exitGood || errs != "" {
		t.Fatalf("status %d, %s", status, errs)
	}
	for _, first := range []string{"-10", "0", "60"} {
		found := false
		for line := range strings.Lines(out) {
			found = found || strings.HasPrefix(strings.TrimSpace(line), first+" ")
		}
		if !found {
			t.Errorf("no line for %s °C in\n%s", first, out)
		}
	}
	if one := askJSON[point](t, "properties", "--temperature", "-10°C", "propylene glycol 32 %"); one.Pressure != 101325 {
		t.Errorf("without --pressure %v Pa, want one atmosphere", one.Pressure)
	}
}

// Every name of the list stands in both lists.
func TestListOfFluids(t *testing.T) {
	status, out, errs := invoke("properties", "--list")
	if status != exitGood || errs != "" {
		t.Fatalf("status %d, %s", status, errs)
	}
	entries := named.List()
	if all := askJSON[[]listed](t, "properties", "--list"); len(all) != len(entries) {
		t.Errorf("%d fluids as JSON, want %d", len(all), len(entries))
	}
	out = strings.Join(strings.Fields(out), " ")
	for _, e := range entries {
		if !strings.Contains(out, e.Form+" ") || !strings.Contains(out, e.Range+ofExample(e)) || !strings.Contains(out, e.Source) {
			t.Errorf("the list lacks %+v", e)
		}
	}
}

// What stands in the list as another way to write a fluid is one.
func TestListedDeclarationsAreFluids(t *testing.T) {
	n := 0
	for line := range strings.Lines(ownFluids) {
		text, ok := strings.CutPrefix(strings.TrimSpace(line), "'")
		if !ok {
			continue
		}
		n++
		if status, _, errs := invoke("properties", strings.TrimSuffix(text, "'"), "--temperature", "70 °C"); status != exitGood {
			t.Errorf("%s: %s", text, errs)
		}
	}
	if n < 10 {
		t.Errorf("%d declarations, want one of each kind", n)
	}
}

// A figure is shown with as many digits as its uncertainty leaves: density of water
// at 20 °C is 998.2 kg/m3 (IAPWS), and 2 u is 0.05 % of it.
func TestFiguresAreAsSureAsTheyLook(t *testing.T) {
	s := point{Temperature: 293.15, Enthalpy: 84012.6, InternalEnergy: 83911.1, Cp: 4184.79, CpU: 0.001, Cv: 4157.4, Density: 998.2061, DensityU: 0.00025}
	want := shown{"20", "84.013", "83.911", "4.1848", "0.0084", "4.1574", "998.21", "0.50"}
	if got := s.shown(); got != want {
		t.Errorf("shown as %+v, want %+v", got, want)
	}
	s.CpU, s.DensityU = 0.05, 0
	want = shown{"20", "84.0", "83.9", "4.18", "0.42", "4.16", "998.21", "0.00"}
	if got := s.shown(); got != want {
		t.Errorf("shown as %+v, want %+v", got, want)
	}
}

// The head tells the model that was chosen, and the range where a pressure ends it.
func TestPropertiesTellWhatTheyAreOf(t *testing.T) {
	for _, tt := range []struct{ fluid, want string }{
		{"{gas: {N2: 79 %, O2: 21 %}, model: ideal}", "gas: {N2: 79 %, O2: 21 %}, model: ideal, gas, at 20 °C"},
		{"{gas: {N2: 79 %, O2: 21 %}}", "gas: {N2: 79 %, O2: 21 %}, gas, at 20 °C"},
		{"moist air 8 g/kg", "figures from -50 °C to 200 °C and 20 to 300 kPa."},
		{"nitrogen", "°C and up to "},
	} {
		status, out, errs := invoke("properties", tt.fluid, "--temperature", "20 °C")
		if out = strings.Join(strings.Fields(out), " "); status != exitGood || !strings.Contains(out, tt.want) {
			t.Errorf("%s: status %d, %s%s; want ...%s...", tt.fluid, status, out, errs, tt.want)
		}
	}
}
