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
		{"CO₂", "carbon dioxide"}, {"sulphur dioxide", "sulfur dioxide"}, {"water vapor", "steam"}, {"H₂O", "steam"}, {"butane", "n-butane"},
		{"liquid NH3", "liquid ammonia"}, {"Liquid Ammonia", "liquid ammonia"},
		{"moist air", "moist air"}, {"moist air 8 g/kg", "moist air 8 g/kg"}, {"Moist-Air 0.008 kg/kg", "moist air 8 g/kg"},
		{"seawater 35 g/kg", "seawater 35 g/kg"}, {"Sea water 3.5 %", "seawater 35 g/kg"}, {"sea-water 35‰", "seawater 35 g/kg"},
		{"milk", "whole milk"}, {"Skimmed milk", "skim milk"}, {"copper", "copper"},
		{"petroleum 870 kg/m3", "petroleum 870 kg/m³"}, {"Fuel Oil 0.9 kg/L", "fuel oil 900 kg/m³"}, {"terphenyl", "modified terphenyl"}, {"Mineral Oil B", "mineral oil B"}, {"steel", "carbon steel"},
	} {
		f, err := Lookup(tt.written)
		if err != nil || f.Name() != tt.name {
			t.Errorf("Lookup(%q) = %v, %v; want %q", tt.written, f, err, tt.name)
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
		{"glycol", []string{`near: "ethylene glycol 20 %", "propylene glycol 20 %", "glycerol 20 %"; known`}},
		{"R134a", []string{`fluid "R134a" is not known; known: water`}},
		{"Glycol 30 %", []string{`near: "ethylene glycol 20 %", "propylene glycol 20 %", "glycerol 20 %"; known`}},
		{"fuel oil", []string{`fuel oil wants its density at 15 °C as well: write "fuel oil 900 kg/m3"`}},
		{"nitrogn", []string{`near: "nitrogen"`}},
		{"unobtainium", []string{`"unobtainium" is not known; known: water`}},
		{"propylene glycol", []string{"wants its strength as well", `write "propylene glycol `}},
		{"propylene glycol 32", []string{"propylene glycol: ", "unit is missing", `write "propylene glycol `}},
		{"propylene glycol 32,5 %", []string{"decimal separator must be a point"}},
		{"propylene glycol 99 %", []string{"0.99"}},
		{"propylene glycol -5 %", []string{"propylene glycol of mass fraction -0.05"}},
		{"propylene glycol 32 °C", []string{"a unit of temperature"}},
		{"water 32 %", []string{"water stands for one fluid and takes no strength", `found "32 %"`}},
		{"calcium chloride 20 vol %", []string{"calcium chloride is not known by volume"}},
		{"moist air 50 %", []string{"want its humidity ratio in g/kg"}},
		{strings.Repeat("x", 1000), []string{`xxx..." is not known; known`}},
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
	f.Add("propylene glycol -1e300 vol%")
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
