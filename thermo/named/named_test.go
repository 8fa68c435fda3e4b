package named

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"heatreeve/thermo"
)

// Every name has a fluid, and the range that its entry tells is the fluid's: in
// the middle there are properties, beyond each end there are none.
func TestListIsTrue(t *testing.T) {
	for _, e := range List() {
		f, err := Lookup(e.Example)
		if err != nil {
			t.Errorf("%q: %v", e.Example, err)
			continue
		}
		if !Listed(e.Example) || Listed(e.Example+" or the like") {
			t.Errorf("%q: Listed is wrong", e.Example)
		}
		if e.Form == "" || e.Source == "" || e.Source != f.Source() || e.Phase != f.Phase() || strings.Contains(e.Source, "\n") {
			t.Errorf("%+v of %s", e, f.Name())
		}
		b := e.Bounds
		if b != f.Bounds() || e.Range != Range(b) {
			t.Errorf("%s: entry says %+v, fluid %+v", e.Example, b, f.Bounds())
		}
		for _, s := range [][2]float64{{b.MinT - 1, b.MaxP}, {b.MaxT + 1, b.MaxP}, {(b.MinT + b.MaxT) / 2, b.MaxP * 1.01}} {
			if _, err := f.At(s[0], s[1]); err == nil {
				t.Errorf("%s: has properties at %g K, %g Pa, beyond %s", e.Example, s[0], s[1], e.Range)
			}
		}
		if !somewhere(f) {
			t.Errorf("%s: no properties found within %s", e.Example, e.Range)
		}
	}
}

// somewhere tells whether f has properties at a state within its bounds.
func somewhere(f thermo.Fluid) bool {
	b := f.Bounds()
	for _, p := range []float64{101325, b.MaxP} {
		lo, hi := f.Span(p)
		if s, err := f.At((max(lo, b.MinT)+min(hi, b.MaxT))/2, p); err == nil && s.Density > 0 {
			return true
		}
	}
	return false
}

// A name is found however it is cased and spaced.
func TestLookupIsLenient(t *testing.T) {
	for _, tt := range []struct{ written, name string }{
		{"water", "water"}, {"WATER ", "water"}, {"Steam", "steam"}, {"dry air", "dry air"}, {"DryAir", "dry air"}, {"dry-air", "dry air"}, {"air", "dry air"},
		{"nitrogen", "nitrogen"}, {"n2", "nitrogen"}, {"CO2", "carbon dioxide"}, {"Carbon-Dioxide", "carbon dioxide"},
		{"propylene glycol 32 %", "propylene glycol 32 %"}, {"Propylene Glycol 32%", "propylene glycol 32 %"}, {"propylene-glycol-32 %", "propylene glycol 32 %"},
		{"propyleneglycol 0.32 kg/kg", "propylene glycol 32 %"}, {"propylene glycol 32 mass %", "propylene glycol 32 %"}, {"propylene glycol 32 % by mass", "propylene glycol 32 %"},
		{"propylene glycol 30 vol %", "propylene glycol 30 vol %"}, {"ethanol 40 % vol", "ethanol 40 vol %"}, {"Propylene glycol 30 % by volume", "propylene glycol 30 vol %"},
		{"NaCl 20 %", "sodium chloride 20 %"}, {"CaCl2 20%", "calcium chloride 20 %"}, {"ammonia 20 %", "ammonia 20 %"}, {"ammonia", "ammonia"},
		{"CO₂", "carbon dioxide"}, {"sulphur dioxide", "sulfur dioxide"}, {"water vapor", "steam"}, {"H₂O", "water"}, {"butane", "n-butane"},
		{"liquid NH3", "liquid ammonia"}, {"Liquid Ammonia", "liquid ammonia"},
		{"moist air", "moist air"}, {"moist air 8 g/kg", "moist air 8 g/kg"}, {"Moist-Air 0.008 kg/kg", "moist air 8 g/kg"},
		{"seawater 35 g/kg", "seawater 35 g/kg"}, {"Sea water 3.5 %", "seawater 35 g/kg"}, {"sea-water 35‰", "seawater 35 g/kg"},
		{"SEAWATER 35 G/KG", "seawater 35 g/kg"}, {"35 G/KG SEAWATER", "seawater 35 g/kg"}, {"MOIST AIR 8 G/KG", "moist air 8 g/kg"}, {"DIESEL 840 KG/M3", "petroleum 840 kg/m³"},
		{"ETHANOL 40 VOL %", "ethanol 40 vol %"}, {"30 % OF ETHANOL", "ethanol 30 %"}, {"ethanol-20-%", "ethanol 20 %"}, {"20-%-ethanol", "ethanol 20 %"}, {"ethanol_20_%", "ethanol 20 %"}, {"ethanol - 20 %", "ethanol 20 %"},
		{"propylene-glycol-30-vol-%", "propylene glycol 30 vol %"}, {"seawater-35-g/kg", "seawater 35 g/kg"}, {"diesel-840-kg/m3", "petroleum 840 kg/m³"}, {"CRUDE OIL 31 °api", "crude oil 870.304 kg/m³"},
		{"natrium chloride 20 %", "sodium chloride 20 %"}, {"Kaliumformate 30 %", "potassium formate 30 %"},
		{"milk", "whole milk"}, {"Skimmed milk", "skim milk"}, {"copper", "copper"},
		{"petroleum 870 kg/m3", "petroleum 870 kg/m³"}, {"Fuel Oil 0.9 kg/L", "fuel oil 900 kg/m³"}, {"terphenyl", "modified terphenyl"}, {"Mineral Oil B", "mineral oil B"}, {"steel", "carbon steel"},
	} {
		f, err := Lookup(tt.written)
		if err != nil || f.Name() != tt.name {
			t.Errorf("Lookup(%q) = %v, %v; want %q", tt.written, f, err, tt.name)
		}
	}
}

// Names and spellings as they are in use in plants.
func TestNamesOfTheTrade(t *testing.T) {
	for _, tt := range []struct{ written, name string }{
		{"H2O", "water"}, {"hot water", "water"}, {"Chilled Water", "water"}, {"cooling water", "water"}, {"feedwater", "water"}, {"demineralized water", "water"}, {"Pressurised hot water", "water"}, {"condensate", "water"}, {"R718", "water"},
		{"compressed air", "dry air"}, {"R717", "ammonia"}, {"R-744", "carbon dioxide"}, {"R290", "propane"}, {"r600", "n-butane"}, {"R728", "nitrogen"},
		{"R50", "methane"}, {"R170", "ethane"}, {"liquid R717", "liquid ammonia"}, {"liquid R600", "liquid n-butane"}, {"LIN", "liquid nitrogen"},
		{"30% propylene glycol", "propylene glycol 30 %"}, {"40 % MEG", "ethylene glycol 40 %"}, {"30 vol % ethanol", "ethanol 30 vol %"}, {"35 g/kg seawater", "seawater 35 g/kg"},
		{"propylene glycol 32 % w/w", "propylene glycol 32 %"}, {"propylene glycol 32% (w/w)", "propylene glycol 32 %"}, {"propylene glycol 30 % v/v", "propylene glycol 30 vol %"},
		{"MPG 32 % m/m", "propylene glycol 32 %"}, {"propylene glycol, 32 %", "propylene glycol 32 %"}, {"propylene glycol (32 %)", "propylene glycol 32 %"},
		{"propylene glycol: 32 %", "propylene glycol 32 %"}, {"propylene glycol solution 32 %", "propylene glycol 32 %"}, {"ethylene glycol/water 40 %", "ethylene glycol 40 %"},
		{"ammonia water 20 %", "ammonia 20 %"}, {"aqua ammonia 20 %", "ammonia 20 %"}, {"calcium chloride brine 22 %", "calcium chloride 22 %"}, {"K-formate 30 %", "potassium formate 30 %"},
		{"diesel 840 kg/m3", "petroleum 840 kg/m³"}, {"kerosene 800 kg/m3", "jet-kerosene 800 kg/m³"}, {"petrol 750 kg/m3", "gasoline 750 kg/m³"}, {"Jet fuel 0.8 kg/L", "jet-kerosene 800 kg/m³"},
		{"crude 870 kg/m3", "crude oil 870 kg/m³"}, {"lube oil 880 kg/m3", "lubricating oil 880 kg/m³"}, {"heavy fuel oil 960 kg/m3 at 15 °C", "fuel oil 960 kg/m³"}, {"HFO 960 kg/m3", "fuel oil 960 kg/m³"},
		{"fuel oil 960 kg/m³, Watson 11.4", "fuel oil 960 kg/m³, Watson 11.4"}, {"petroleum 870 kg/m3, Watson K 11.8", "petroleum 870 kg/m³, Watson 11.8"}, {"diesel 840 kg/m3 Kw 11.9", "petroleum 840 kg/m³, Watson 11.9"},
		{"aluminum", "aluminium"}, {"nitrogen gas", "nitrogen"}, {"gaseous CO2", "carbon dioxide"}, {"CO2 liquid", "liquid carbon dioxide"},
	} {
		f, err := Lookup(tt.written)
		if err != nil || f.Name() != tt.name {
			t.Errorf("Lookup(%q) = %v, %v; want %q", tt.written, f, err, tt.name)
		}
	}
	for _, free := range []string{"hot water", "diesel 840 kg/m3", "R717", "compressed air"} {
		if Listed(free) {
			t.Errorf("%q is listed, so that no fluid of a file can have the name", free)
		}
	}
}

// The density of 35 °API is 849.8 kg/m³ at 60 °F: 141.5/166.5 of water's 999.016 kg/m³; at
// 15 °C it is a little more.
func TestAPIGravity(t *testing.T) {
	for _, name := range []string{"petroleum 35 API", "35 °API", "API 35", "crude oil 35 °API", "35 API crude oil", "crude oil API gravity 35", "petroleum 35 deg API, Watson 11.9", "API 35, Watson K 11.8"} {
		f, err := Lookup(name)
		if err != nil {
			t.Errorf("Lookup(%q): %v", name, err)
			continue
		}
		if s, err := f.At(288.15, 101325); err != nil || math.Abs(s.Density-849.4) > 1 {
			t.Errorf("%q: %+v, %v; want 849.4 kg/m³ at 15 °C", name, s, err)
		}
	}
}

// What may mean several fluids leads to them, and what must be declared to how.
func TestTermsOfTheTrade(t *testing.T) {
	for _, tt := range []struct{ name, want string }{
		{"LPG", `near: "propane", "n-butane", "liquid propane", "liquid n-butane"`}, {"brine", `near: "sodium chloride 20 %", "calcium chloride 20 %", "magnesium chloride 20 %", "seawater 35 g/kg"`},
		{"30 % glycol", `near: "ethylene glycol 30 %", "propylene glycol 30 %"`}, {"salt water", `"seawater 35 g/kg"`}, {"glycol/water 30 %", `"propylene glycol 30 %"`},
		{"natural gas", "{gas: {CH4: 92 %"}, {"flue gas", "{flue gas: {fuel: {"}, {"thermal oil", `"mineral oil A", "mineral oil B", "modified terphenyl"`}, {"hot oil", "{table: {"},
		{"beer", "beer wort"}, {"yogurt", "{food: {water: 88 %"}, {"vegetable oil", "{food: {fat: 100 %}}"}, {"apple juice", "{food: {water: "}, {"R404A", "R717 ammonia"},
		{"saturated steam", "latent heat"}, {"sea water", `seawater wants its salinity as well: write "seawater 35 g/kg"`}, {"diesel", `diesel wants its density at 15 °C as well: write "diesel 840 kg/m3"`},
		{"gasoline", "gasoline wants its density at 15 °C"}, {"gasoline 30 %", `write "gasoline 760 kg/m3"`}, {"whole milk 3.5%", "takes no strength, found \"3.5%\"; declare the one you have, such as {food: {"},
		{"cream 30 %", "{food: {"}, {"30 % cream", "{food: {"}, {"milk 3.5 % fat", "{food: {"}, {"methane 92 %", "{gas: {"}, {"ammonia water", `write "ammonia 20 %"`},
		{"propylene glycol 32 % w/v", "mass per volume"}, {"K-formate", `K-formate wants its strength as well: write "K-formate 20 %"`}, {"HFO", "HFO wants its density"},
		{"water at 80 °C", `"at 80 °C" is no part of a fluid's name: "water" is the fluid`}, {"steam 10 bar", `"10 bar" is no part of a fluid's name`}, {"water/glycol 70/30", `near: "ethylene glycol 20 %"`},
		{"steel 304", `near: "carbon steel", "stainless steel 304"`}, {"whole milk 3.5", `near: "whole milk"`},
		{"ethylene glycol 50/50", `"50/50" does not say which part is whose`}, {"demineralized woter", `near: "water"; known`},
		{"oil 870 kg/m3", `near: "petroleum 870 kg/m3"`}, {"moist air 50 % RH", "{moist air: {relative humidity: 50 %"}, {"propylene glycol % 32", `near: "propylene glycol 20 %"`},
	} {
		f, err := Lookup(tt.name)
		if err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("Lookup(%q) = %v, %v; want ...%s...", tt.name, f, err, tt.want)
		}
	}
	for _, tt := range []struct{ name, want string }{
		{"proplyene glycol 30 %", `is not known; near: "propylene glycol 30 %"; known`}, {"propylen glicol 30 %", `; near: "propylene glycol 30 %"; known`},
		{"cow milk", `nearest by spelling: "whole milk", "skim milk"; one of your own`}, {"barium chloride 20 %", `nearest by spelling: "calcium chloride 20 %", "sodium chloride 20 %"; one`},
		{"toluene", `nearest by spelling: "ethylene", "chlorine"; one of`}, {"acetone", `nearest by spelling: "`}, {"foobar", `nearest by spelling: "`}, {"XY", `nearest by spelling: "`},
		{"???", `"???" is not known; one of your own`}, {"20 %", `"20 %" is not known; one of your own`},
	} {
		if _, err := Lookup(tt.name); err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("Lookup(%q): %v; want ...%s...", tt.name, err, tt.want)
		}
	}
	for _, short := range []string{"XY", "R1", "QQQ", "Zr"} {
		if guess := (&UnknownError{short}).Near(); len(guess) > 0 {
			t.Errorf("%q is near %q", short, guess)
		}
	}
}

// No term is a name as well, and what a term tells to write is a name.
func TestTermsAreTrue(t *testing.T) {
	for _, term := range terms {
		for _, name := range term.names {
			if f, err := Lookup(name); err == nil {
				t.Errorf("%q is %s, and needs no advice", name, f.Name())
			}
		}
		if len(term.near) == 0 && term.advice == "" {
			t.Errorf("%q leads nowhere", term.names)
		}
		for _, n := range (&UnknownError{term.names[0]}).Near() {
			if _, err := Lookup(n); err != nil {
				t.Errorf("%q leads to %q: %v", term.names[0], n, err)
			}
		}
	}
}

// What a fluid calls itself finds it again, and the folded names are all apart.
func TestNamesAreUnambiguous(t *testing.T) {
	for _, e := range List() {
		f, err := Lookup(e.Example)
		if err != nil {
			t.Fatal(err)
		}
		again, err := Lookup(f.Name())
		if err != nil || again.Name() != f.Name() {
			t.Errorf("%q calls itself %q, which finds %v, %v", e.Example, f.Name(), again, err)
		}
	}
	seen := make(map[string]string)
	for _, w := range words() {
		for _, name := range append([]string{w.name}, w.also...) {
			key := fmt.Sprint(fold(name), w.dimension != 0)
			if other, twice := seen[key]; twice {
				t.Errorf("%q of %q is also a name of %q", name, w.name, other)
			}
			seen[key] = w.name
		}
	}
}

func TestLookupSaysHowToWrite(t *testing.T) {
	for _, tt := range []struct {
		name string
		want []string
	}{
		{"", []string{`fluid "" is not known`, "known: water, steam, dry air"}},
		{"watr", []string{`fluid "watr" is not known; near: "water"; known: `}},
		{"propilene glycol 32 %", []string{"is not known", "near: \"propylene glycol "}},
		{"glycol", []string{`near: "ethylene glycol 20 %", "propylene glycol 20 %"; known`}},
		{"R134a", []string{`fluid "R134a" is a refrigerant without a formulation here`, "{table: {", "known: water"}},
		{"Glycol 30 %", []string{`near: "ethylene glycol 30 %", "propylene glycol 30 %"; known`}},
		{"fuel oil", []string{`fuel oil wants its density at 15 °C as well: write "fuel oil 900 kg/m3"`}},
		{"nitrogn", []string{`near: "nitrogen"`}},
		{"unobtainium", []string{`"unobtainium" is not known; nearest by spelling: "aluminium", "n-butane"; one of your own is declared by its figures, {table: ...} or {polynomial: ...}; known: water`}},
		{"propylene glycol", []string{"wants its strength as well", `write "propylene glycol `}},
		{"moist air 350 g/kg", []string{"humidity ratio 0.35 kg/kg is outside of 0 to 0.25"}},
		{"ethylene glycol 69 %", []string{"mass fraction 0.69; "}},
		{"propylene glycol 32", []string{"propylene glycol: ", "unit is missing", `write "propylene glycol `}},
		{"propylene glycol 32,5 %", []string{"decimal separator must be a point"}},
		{"propylene glycol 99 %", []string{"0.99"}},
		{"propylene glycol -5 %", []string{"propylene glycol of mass fraction -0.05"}},
		{"propylene glycol 32 °C", []string{"a unit of temperature"}},
		{"water 32 %", []string{"water is of one composition and takes no strength", `found "32 %"`}},
		{"calcium chloride 20 vol %", []string{"calcium chloride: ", `"20 vol %" is by volume, and it is known by mass only`}},
		{"moist air 50 %", []string{"want its humidity ratio in g/kg"}},
		{strings.Repeat("x", 1000), []string{`xxx..." is not known; nearest by spelling: `}},
	} {
		f, err := Lookup(tt.name)
		if err == nil {
			t.Errorf("Lookup(%q) = %s", tt.name, f.Name())
			continue
		}
		for _, piece := range tt.want {
			if !strings.Contains(err.Error(), piece) {
				t.Errorf("Lookup(%q): %v\ndoes not say %q", tt.name, err, piece)
			}
		}
		if tt.name == "unobtainium" {
			for _, n := range Names() {
				if !strings.Contains(err.Error(), n) {
					t.Errorf("the list lacks %q", n)
				}
			}
		}
	}
}

func TestRange(t *testing.T) {
	for _, tt := range []struct {
		b    thermo.Bounds
		want string
	}{
		{thermo.Bounds{MinT: 273.15, MaxT: 623.15, MinP: 611.2127, MaxP: 100e6}, "0 to 350 °C, 0.611 to 100000 kPa"},
		{thermo.Bounds{MinT: 200, MaxT: 2000, MaxP: 944123}, "-73.15 to 1727 °C, up to 944.1 kPa"},
	} {
		if got := Range(tt.b); got != tt.want {
			t.Errorf("Range(%+v) = %q, want %q", tt.b, got, tt.want)
		}
	}
}

func FuzzLookup(f *testing.F) {
	for _, n := range Names() {
		f.Add(n)
	}
	for _, s := range []string{"propylene glycol -1e300 vol%", "30 % v/v propylene glycol", "API 35, Watson K 11.8", "water at 80 °C", "aqua ammonia (25 %)", "R717", "milk 2 %"} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, name string) {
		fluid, err := Lookup(name)
		switch {
		case err != nil && err.Error() == "":
			t.Error("an error without words")
		case err == nil && (fluid == nil || fluid.Name() == "" || slices.Contains([]float64{fluid.Bounds().MaxT, fluid.Bounds().MaxP}, math.NaN())):
			t.Errorf("Lookup(%q) = %v", name, fluid)
		}
	})
}

func ExampleLookup() {
	f, err := Lookup("Propylene glycol 32 %")
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println(f.Name())
	_, err = Lookup("propylene glycol")
	fmt.Println(err)
	// Output:
	// propylene glycol 32 %
	// propylene glycol wants its strength as well: write "propylene glycol 20 %"; "%" is by mass, "vol %" by volume
}
