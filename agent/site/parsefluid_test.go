package site

import (
	"errors"
	"fmt"
	"math"
	"regexp"
	"strings"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/unit"
)

// The shares of the mixtures are worked by hand: 23.2 % of 31.999 g/mol beside 76.8 % of
// 28.013 g/mol; CH4 + 2 O2 with the air that comes along, and with a tenth more of it; W of half of the saturation
// pressure 3.1693 kPa at 25 °C, and of 1.4026 kPa at 12 °C, under 101.325 kPa.
func TestParseFluid(t *testing.T) {
	for _, tt := range []struct{ text, name string }{
		{"water", "water"},
		{"Propylene glycol 32 %", "propylene glycol 32 %"},
		{"{propylene glycol: 32 %, uncertainty: 0.6 %}", "propylene glycol 32 %"},
		{"{propylene glycol: 30 %, by: volume}", "propylene glycol 30 vol %"},
		{"MEG: 40 %", "ethylene glycol 40 %"},
		{"crude oil, API: 31", "crude oil 870.304 kg/m³"},
		{"{gas: {N2: 100 %}}", "nitrogen"},
		{"{gas: {N2: 76.8 %, O2: 23.2 %}, by: mass, model: ideal}", "gas: {N2: 79.09 %, O2: 20.91 %}, model: ideal"},
		{"{gas: {N2: 100 %}, model: reference}", "nitrogen, model: reference"},
		{"{gas: {N2: 100 %}, model: best}", "nitrogen"},
		{"{flue gas: {fuel: {CH4: 100 %}, excess air: 0 %}}", "gas: {N2: 70.68 %, H2O: 18.96 %, CO2: 9.51 %, Ar: 0.8477 %}"},
		{"{flue gas: {fuel: {CH4: 100 %}, wet oxygen: 1.73877 %}}", "gas: {N2: 71.3 %, H2O: 17.39 %, CO2: 8.723 %, O2: 1.739 %, Ar: 0.8551 %}"},
		{"{moist air: {humidity ratio: 8 g/kg}}", "moist air 8 g/kg"},
		{"{moist air: {relative humidity: 50 %, at: 25 °C}}", "moist air 9.881 g/kg"},
		{"{moist air: {dew point: 12 °C}}", "moist air 8.73 g/kg"},
		{"{food: {water: 90 %, carbohydrate: 10 %}}", "food: {water: 90 %, carbohydrate: 10 %}"},
		{"{seawater: 35 g/kg}", "seawater 35 g/kg"},
		{"{Propylene Glycol: 32 %}", "propylene glycol 32 %"},
		{"{propylene-glycol: 32 %, uncertainty: 0.6 %}", "propylene glycol 32 %"},
		{"{Gas: {n2: 79 %, o2: 21 %}, model: Ideal}", "gas: {N2: 79 %, O2: 21 %}, model: ideal"},
		{"{GAS: {Dry-Air: 100 %}, model: Peng Robinson}", "dry air, model: peng-robinson"},
		{"{Seawater: 35 g/kg}", "seawater 35 g/kg"},
		{"{Flue-Gas: {fuel: {ch4: 100 %}, excess air: 0 %}}", "gas: {N2: 70.68 %, H2O: 18.96 %, CO2: 9.51 %, Ar: 0.8477 %}"},
		{"{Moist Air: {dew point: 12 °C}}", "moist air 8.73 g/kg"},
		{"{Food: {Water: 90 %, Carbohydrate: 10 %}}", "food: {water: 90 %, carbohydrate: 10 %}"},
		{"{petroleum: {density: 870 kg/m3}}", "petroleum 870 kg/m³"},
		{"{petroleum: {density: 850 kg/m3, group: Diesel}}", "fuel oil 850 kg/m³"},
		{"{petroleum: {density: 800 kg/m3, group: jet fuel}}", "jet-kerosene 800 kg/m³"},
		{"{petroleum: {density: 0.96 kg/L, watson: 11.4, group: fuel oil}}", "fuel oil 960 kg/m³, Watson 11.4"},
		{"{polynomial: {source: a sheet, phase: liquid, cp: [1880, 3.6], density: [881, -0.65], range: [20 °C, 300 °C]}}", "fluid"},
		{"gas: {O2: 100 %}", "oxygen"},
		{"table:\n  source: a sheet\n  phase: solid\n  points: [[0 °C, 900 J/(kg K), 2000 kg/m3], [100 °C, 950 J/(kg K), 1990 kg/m3]]\n", "fluid"},
		{"{table: {source: a sheet, phase: liquid, points: [[20 °C, 1.9 kJ/(kg K), 868 kg/m3, 1 kPa], [200 °C, 2.5 kJ/(kg K), 751 kg/m3, 90 kPa]]}}", "fluid"},
	} {
		f, err := ParseFluid(tt.text)
		if err != nil || f.Name() != tt.name {
			t.Errorf("ParseFluid(%q) = %v, %v; want %q", tt.text, f, err, tt.name)
		}
	}
}

// The elements of a fuel are found in any case as well.
func TestElementsInAnyCase(t *testing.T) {
	var names []string
	for _, text := range []string{"{flue gas: {elements: {C: 86 %, H: 13 %, water: 1 %}, oxygen: 3 %}}", "{flue gas: {elements: {c: 86 %, h: 13 %, Water: 1 %}, oxygen: 3 %}}"} {
		f, err := ParseFluid(text)
		if err != nil {
			t.Fatal(err)
		}
		names = append(names, f.Name())
	}
	if names[0] != names[1] {
		t.Errorf("%q and %q", names[0], names[1])
	}
}

// A load finds a fluid of the file in any spelling, under its own; two that differ in no
// more are one too many.
func TestFluidsOfTheFileInAnySpelling(t *testing.T) {
	text := strings.Replace(plant, "  flue: {gas: {N2: 71 %, CO2: 9 %, H2O: 18 %, O2: 2 %}}", "  flue gas 2: {gas: {N2: 88 %, CO2: 9 %, O2: 3 %}}", 1)
	text = strings.Replace(text, "fluid: dry air", "fluid: Flue-Gas-2", 1)
	s, err := Parse("plant.yaml", []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	if got := s.Loads[1].Stream.FluidName; got != "flue gas 2" {
		t.Errorf("the load's fluid is %q", got)
	}
	_, err = Parse("plant.yaml", []byte(strings.Replace(text, "fluids:\n", "fluids:\n  FlueGas2: {ethanol: 20 %}\n", 1)))
	if err == nil || !strings.Contains(err.Error(), `differs from "FlueGas2" in its spelling only; choose another name`) {
		t.Errorf("two fluids of one name: %v", err)
	}
}

// A liquid boils where the vapour pressure of its table comes up to the pressure: at
// 90 kPa, that is in the last row.
func TestTableBoilsByItsVapourPressure(t *testing.T) {
	f, err := ParseFluid("{table: {source: a sheet, phase: liquid, points: [[20 °C, 1.9 kJ/(kg K), 868 kg/m3, 1 kPa], [200 °C, 2.5 kJ/(kg K), 751 kg/m3, 90 kPa]]}}")
	if err != nil {
		t.Fatal(err)
	}
	if _, hi := f.Span(90e3); !(math.Abs(hi-473.15) <= 1e-6) {
		t.Errorf("boils at %g K under 90 kPa, want 473.15 K", hi)
	}
}

// A gas by figures of its own can be metered as a normal volume where its molar mass is
// told.
func TestTableHasItsMolarMass(t *testing.T) {
	f, err := ParseFluid("{table: {source: a sheet, phase: gas, pressure: 1 bar, molar_mass: 28.6 kg/kmol, points: [[0 °C, 1 kJ/(kg K), 1.2 kg/m3], [90 °C, 1 kJ/(kg K), 0.9 kg/m3]]}}")
	if err != nil {
		t.Fatal(err)
	}
	if !(math.Abs(f.MolarMass()-0.0286) <= 1e-15) || FlowSuits(f, unit.MolarFlow) != nil {
		t.Errorf("molar mass %g kg/mol, metered by normal volume: %v", f.MolarMass(), FlowSuits(f, unit.MolarFlow))
	}
}

func TestParseFluidFaults(t *testing.T) {
	for _, tt := range []struct{ text, want string }{
		{"watr", `fluid "watr" is not known; near: "water"; known: `},
		{"{gas: {N2: 79 %, n2: 21 %}}", `fluid:1:18: gas.N2: stands twice; first in line 1, as "N2"`},
		{"{Propylene Glycol: 30 %, propylene-glycol: 30 %}", `fluid:1:26: "propylene glycol": stands twice; first in line 1, as "Propylene Glycol"`},
		{"{propylene glycol: 30 %, Ethanol: 30 %}", `ethanol: stands beside "propylene glycol"`},
		{"{Gas: {N2: 79 %}}", "fluid:1:7: gas: the mole fractions add up to 0.79"},
		{"{gas: {N2: 100 %}, model: ideel}", `model: "ideel" is not known; near: "ideal"; allowed: best, ideal, `},
		{"{gas: {N2: 100 %}, Model: ideal}", `unknown key "Model"; near: "model"`},
		{"{Food: {water: 60 %, Water: 40 %}}", `food.water: stands twice`},
		{"{moist air: {Relative Humidity: 50 %, at: 20 °C}}", `unknown key "Relative Humidity"; near: "relative humidity"`},
		{"{gas: {N2: 79 %}}", "fluid:1:7: gas: the mole fractions add up to 0.79"},
		{"{gas: {N2: 79 %}", "this is not YAML: "},
		{"{gas:{N2:79 %,O2:21 %}}", "this is not YAML (a colon is followed by a space)"},
		{"{gas: {methane: 100 %}}", `gas.methane: unknown key "methane"; near: "CH4"; allowed: N2`},
		{"{gas: CH4 92 %}", "gas: want shares by volume, such as {N2: 79 %, O2: 21 %}, found text"},
		{"{flue gas: {fuel: natural gas, excess air: 15 %}}", `fuel: want shares by volume, such as {CH4: 92 %, C2H6: 8 %}, found text`},
		{"{flue gas: {fuel: {CH4: 100 %}, O2: 3 %}}", `near: "oxygen"`},
		{"{food: milk}", "food: want shares by mass, such as {water: 87.3 %"},
		{"{moist air: 50 %}", "want how humid the air is, such as {relative humidity: 50 %, at: 25 °C}, found text"},
		{"{water: }", `"water" is the name of a fluid, water, and needs no declaration`},
		{"{natural gas: {CH4: 100 %}}", `fluid "natural gas" is a mixture; declare the shares of yours, such as {gas: {`},
		{"{glycol: 30 %}", `unknown key "glycol"; near: "ethylene glycol", "propylene glycol"; allowed: `},
		{"{seawater: 40 %, model: ideal}", "goes not with seawater"},
		{"{}", "says not what the fluid is; want one of: ethylene glycol"},
		{"{a: 1}", `unknown key "a"`},
		{"- a: b", "want a mapping of keys, found a list"},
		{"{table: {source: a sheet, phase: gas, pressure: 1 barg, points: [[0 °C, 1 kJ/(kg K), 1.2 kg/m3], [90 °C, 1 kJ/(kg K), 0.9 kg/m3]]}}", "write the absolute one"},
	} {
		f, err := ParseFluid(tt.text)
		if err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("ParseFluid(%q) = %v, %v; want ...%q...", tt.text, f, err, tt.want)
		}
	}
}

// One fault is told once.
func TestParseFluidTellsAFaultOnce(t *testing.T) {
	for _, text := range []string{
		"{moist air: 50 %}", "{gas: CH4 92 %}", "{food: milk}", "{flue gas: {fuel: natural gas, excess air: 15 %}}", "{water: }",
		"{moist air: {relative_humidity: 50 %, at: 20 °C}}", "{moist air: {relative humidity: 50 %, temperature: 20 °C}}", "{petroleum: {densty: 870 kg/m3}}",
		"{petroleum: {api: 31}}", "{flue gas: {fuels: {CH4: 100 %}, excess air: 15 %}}", "{flue gas: {fuel: {CH4: 100 %}, O2: 3 %}}", "{food: {watr: 100 %}}",
		"{table: {sorce: a sheet, phase: liquid, points: [[20 °C, 1.9 kJ/(kg K), 868 kg/m3], [80 °C, 2 kJ/(kg K), 830 kg/m3]]}}",
		"{polynomial: {source: a sheet, phase: liquid, cp: [1880], rho: [881], range: [20 °C, 300 °C]}}",
	} {
		var faults Faults
		if _, err := ParseFluid(text); !errors.As(err, &faults) || len(faults) != 1 {
			t.Errorf("ParseFluid(%q) = %v; want one fault", text, err)
		}
	}
}

// What a name of the trade is answered with is a declaration that is read.
func TestAdviceIsGood(t *testing.T) {
	declared := regexp.MustCompile(`\{(?:gas|flue gas|food|table): .*?\}\}+`)
	for _, name := range []string{
		"natural gas", "biogas", "syngas", "flue gas", "thermal oil", "beer", "yogurt", "apple juice", "syrup", "vegetable oil", "caustic", "R134a", "whole milk 2 %", "methane 92 %",
	} {
		_, err := ParseFluid(name)
		if err == nil {
			t.Errorf("%q is a fluid", name)
			continue
		}
		text := declared.FindString(err.Error())
		if f, err := ParseFluid(text); err != nil {
			t.Errorf("%q leads to %q: %v, %v", name, text, f, err)
		}
	}
}

// Whatever the text is, there is a fluid or an error with words, of one line a fault.
func FuzzParseFluid(f *testing.F) {
	for _, s := range []string{"water", "{gas: {N2: 100 %}}", "{propylene glycol: 32 %, uncertainty: 0.6 %}", "{a: [", "a: &b {c: *b}"} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, text string) {
		fluid, err := ParseFluid(text)
		switch {
		case err == nil && fluid == nil, err != nil && err.Error() == "":
			t.Errorf("ParseFluid(%q) = %v, %v", text, fluid, err)
		}
		var faults Faults
		if errors.As(err, &faults) {
			for _, fault := range faults {
				if strings.ContainsAny(fault.Error(), "\r\n") {
					t.Errorf("%q is more than a line", fault)
				}
			}
		}
	})
}

func ExampleParseFluid() {
	f, err := ParseFluid("{gas: {N2: 79 %, O2: 21 %}}")
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println(f.Name())
	_, err = ParseFluid("propylene glycol 32")
	fmt.Println(err)
	// Output:
	// gas: {N2: 79 %, O2: 21 %}
	// propylene glycol: "32": unit is missing; allowed here: ratio (%, ‰, ppm, kg/kg, g/kg); write "propylene glycol 20 %"; "%" is by mass, "vol %" by volume
}

// A model that was chosen leaves the flue gas what it is, and its figures are those of its
// properties.
func TestFlueGasByAModel(t *testing.T) {
	const flue = "{flue gas: {fuel: {CH4: 100 %}, excess air: 15 %}, model: "
	at := make(map[string]float64)
	for _, model := range []string{"best", "ideal", "peng-robinson"} {
		f, err := ParseFluid(flue + model + "}")
		if err != nil {
			t.Fatal(err)
		}
		if !strings.HasPrefix(f.Source(), "products of a complete combustion") || strings.Contains(f.Name(), "model: "+model) != (model != "best") {
			t.Errorf("%s: %q of %q", model, f.Name(), f.Source())
		}
		s, err := f.At(473.15, 101325)
		b, errBalance := thermo.BalanceOf(f)(473.15, 101325)
		if err != nil || errBalance != nil || b.Enthalpy != s.Enthalpy || b.Cp != s.Cp || b.Density != s.Density {
			t.Errorf("%s: %+v, %v and %+v, %v", model, s, err, b, errBalance)
		}
		at[model] = s.Density
	}
	if at["ideal"] == at["best"] || at["peng-robinson"] != at["best"] {
		t.Errorf("densities %v: the best of a mixture is Peng-Robinson, and no ideal gas", at)
	}
	if f, err := ParseFluid(flue + "reference}"); err == nil || !strings.Contains(err.Error(), "no reference equation") {
		t.Errorf("a flue gas by a reference equation: %v, %v", f, err)
	}
}
