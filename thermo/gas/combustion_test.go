package gas

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/fluidtest"
)

func mustBurn(t testing.TB, fuel Fuel, c Combustion) Flue {
	t.Helper()
	return fluidtest.Must(FlueGas(fuel, c))(t)
}

func gasFuel(formula string) Fuel { return Fuel{Gas: map[string]float64{formula: 1}} }

var fuelOil = Fuel{Mass: Elements{C: 0.865, H: 0.133, S: 0.002}}

func TestFlueConformance(t *testing.T) {
	coal := Fuel{Mass: Elements{C: 0.72, H: 0.045, O: 0.07, N: 0.014, S: 0.011, Water: 0.06, Ash: 0.08}}
	for name, f := range map[string]Flue{
		"methane": mustBurn(t, gasFuel("CH4"), Combustion{ExcessAir: 0.2}),
		"oil":     mustBurn(t, fuelOil, Combustion{DryO2: 0.035, HumidityRatio: 0.008}),
		"coal":    mustBurn(t, coal, Combustion{DryO2: 0.06}),
		"just":    mustBurn(t, gasFuel("H2"), Combustion{}),
	} {
		t.Run(name, func(t *testing.T) { fluidtest.Run(t, f.Fluid) })
	}
}

// The stoichiometric air of fuels in kg/kg, and the most CO2 that their dry flue gas holds.
func TestFlueFigures(t *testing.T) {
	const handbook = "appendix of fuel properties in engine and combustion textbooks (from memory)"
	const practice = "largest CO2 as printed on flue gas analysers, common practice, no source"
	for _, tt := range []struct {
		name           string
		fuel           Fuel
		air, tolerance float64
		co2            float64 // % by volume, dry; 0: none
		source         string
	}{
		{"methane", gasFuel("CH4"), 17.2, 0.05, 11.7, handbook + "; " + practice},
		{"ethane", gasFuel("C2H6"), 16.1, 0.05, 0, handbook},
		{"propane", gasFuel("C3H8"), 15.7, 0.05, 13.75, handbook + "; " + practice},
		{"butane", gasFuel("C4H10"), 15.5, 0.05, 14.0, handbook + "; " + practice},
		{"hydrogen", gasFuel("H2"), 34.3, 0.1, 0, handbook},
		{"carbon monoxide", gasFuel("CO"), 2.46, 0.02, 34.7, handbook + "; " + practice},
		{"ammonia", gasFuel("NH3"), 6.05, 0.05, 0, handbook},
		{"carbon", Fuel{Mass: Elements{C: 1}}, 11.5, 0.05, 20.95, handbook},
		{"light fuel oil", fuelOil, 14.6, 0.1, 15.4, practice},
	} {
		f := mustBurn(t, tt.fuel, Combustion{})
		if !(math.Abs(f.StoichiometricAir-tt.air) <= tt.tolerance) || f.StoichiometricAir != f.DryAir {
			t.Errorf("%s: %.3f kg/kg of air, want %g (%s)", tt.name, f.StoichiometricAir, tt.air, tt.source)
		}
		if co2 := 100 * f.Dry()["CO2"]; tt.co2 > 0 && !(math.Abs(co2-tt.co2) <= 0.1) {
			t.Errorf("%s: CO2 of %.2f %% dry, want %g (%s)", tt.name, co2, tt.co2, tt.source)
		}
	}
}

// The dry and wet volumes of flue gas per mass of each element, at 68 °F and 1 atm: 40 CFR
// part 60, appendix A-7, method 19, equations 19-13 and 19-14 (from memory): in scf/lb per percent, dry C
// 1.53, H 3.64, S 0.57, N 0.14, O −0.46; wet H 5.57. Those for H are of an atomic mass of 1.
func TestFlueVolumes(t *testing.T) {
	const scf, lb = 0.028316846592, 0.45359237 // m³, kg
	volume := thermo.R * (20 + 273.15) / 101325
	dry := func(e Elements) (dry, wet float64) {
		f := mustBurn(t, Fuel{Mass: e}, Combustion{})
		moles := f.PerFuel / f.Fluid.MolarMass() * volume / scf * lb / 100
		return moles * (1 - f.Fractions["H2O"]), moles
	}
	carbon, _ := dry(Elements{C: 1})
	hydrogen, wetHydrogen := dry(Elements{H: 1})
	sulfur, _ := dry(Elements{S: 1})
	withN, _ := dry(Elements{C: 0.9, N: 0.1})
	withO, _ := dry(Elements{C: 0.9, O: 0.1})
	for _, tt := range []struct {
		name      string
		got, want float64
	}{
		{"C", carbon, 1.53}, {"H", hydrogen, 3.64 / 1.00794}, {"H wet", wetHydrogen, 5.57 / 1.00794}, {"S", sulfur, 0.57},
		{"N", (withN - 0.9*carbon) / 0.1, 0.14}, {"O", (withO - 0.9*carbon) / 0.1, -0.46},
	} {
		if !(math.Abs(tt.got-tt.want) <= 0.01) {
			t.Errorf("%s: %.4f scf/lb per percent, want %g", tt.name, tt.got, tt.want)
		}
	}
}

// No atom is lost or won, and no kilogram, for random fuels and air.
func TestFlueBalance(t *testing.T) {
	rng := rand.New(rand.NewPCG(7, 11))
	for range 500 {
		e := Elements{rng.Float64(), rng.Float64() * 0.3, rng.Float64() * 0.3, rng.Float64() * 0.1, rng.Float64() * 0.1, rng.Float64() * 0.3, rng.Float64() * 0.3}
		sum := e.C + e.H + e.O + e.N + e.S + e.Water + e.Ash
		e = Elements{e.C / sum, e.H / sum, e.O / sum, e.N / sum, e.S / sum, e.Water / sum, e.Ash / sum}
		if e.C/massC+e.H/massH/4+e.S/massS-e.O/massO/2 < 0 {
			continue
		}
		c := Combustion{ExcessAir: rng.Float64() * 3, HumidityRatio: rng.Float64() * 0.03}
		f := mustBurn(t, Fuel{Mass: e}, c)
		n := f.PerFuel / f.Fluid.MolarMass()
		var out atoms
		for formula, x := range f.Fractions {
			out.add(atomsOf[formula], n*x)
		}
		air, water := f.DryAir/mustAir(t, Ideal).MolarMass(), (e.Water+f.DryAir*c.HumidityRatio)/18.01528e-3
		in := atoms{
			C: e.C/massC + air*0.000319, H: e.H/massH + 2*water,
			O: e.O/massO + water + 2*air*(0.209476+0.000319), N: e.N/massN + 2*air*0.78084, S: e.S / massS,
		}
		for _, d := range []float64{out.C/in.C - 1, out.H/in.H - 1, out.O/in.O - 1, out.N/in.N - 1, out.S/in.S - 1} {
			if !(math.Abs(d) <= 1e-12) {
				t.Fatalf("%+v, %+v: atoms in %+v, out %+v", e, c, in, out)
			}
		}
		if m := 1 - e.Ash + f.DryAir*(1+c.HumidityRatio); !(math.Abs(f.PerFuel/m-1) <= 1e-7) || !(f.DryAir >= f.StoichiometricAir) {
			t.Fatalf("%+v, %+v: %.10g kg out, %.10g kg in", e, c, f.PerFuel, m)
		}
		if x := f.Fractions["O2"]; !(x <= 1e-3) {
			wet := mustBurn(t, Fuel{Mass: e}, Combustion{WetO2: x, HumidityRatio: c.HumidityRatio})
			if !(math.Abs(wet.ExcessAir-c.ExcessAir) <= 1e-11) {
				t.Fatalf("%+v: excess air %.15g, by the oxygen of the wet gas %.15g", e, c.ExcessAir, wet.ExcessAir)
			}
		}
		back := mustBurn(t, Fuel{Mass: e}, Combustion{DryO2: f.Dry()["O2"], HumidityRatio: c.HumidityRatio})
		if f.Dry()["O2"] > 1e-3 && !(math.Abs(back.ExcessAir-c.ExcessAir) <= 1e-11) {
			t.Fatalf("%+v: excess air %.15g, by the oxygen left %.15g", e, c.ExcessAir, back.ExcessAir)
		}
	}
}

// A flue gas of natural gas burnt with just enough air has its water dew point near 59 °C
// (common practice, no source); methane with 3 % O2 left over has 15.0 % excess air: 3/(20.95 − 3)
// times the ratio of dry flue gas to air, 0.895.
func TestFlueOfMethane(t *testing.T) {
	f := mustBurn(t, gasFuel("methane"), Combustion{})
	if lo, _ := f.Fluid.Span(101325); !(math.Abs(lo-273.15-59) <= 0.5) {
		t.Errorf("dew point %.2f °C, want 59 °C", lo-273.15)
	}
	f = mustBurn(t, gasFuel("methane"), Combustion{DryO2: 0.03})
	if want := 0.03 / (0.209476 - 0.03) * 0.895; !(math.Abs(f.ExcessAir-want) <= 0.001) || !(math.Abs(f.Dry()["O2"]-0.03) <= 1e-15) {
		t.Errorf("excess air %.4f, want %.4f; O2 %g", f.ExcessAir, want, f.Dry()["O2"])
	}
	if !strings.Contains(f.Fluid.Source(), "complete combustion") {
		t.Errorf("source %q", f.Fluid.Source())
	}
	if f.Fractions["CO"] != 0 || !(math.Abs(f.PerFuel-1-f.DryAir) <= 1e-6) {
		t.Errorf("%+v", f)
	}
}

// What passes the flame unburnt stays, and what is burnt already does so too.
func TestFlueOfLeanGas(t *testing.T) {
	f := mustBurn(t, Fuel{Gas: map[string]float64{"CO": 0.25, "H2": 0.05, "CO2": 0.1, "N2": 0.57, "He": 0.02, "HCl": 0.01}}, Combustion{ExcessAir: 0.1})
	if d := f.Fractions["He"] / f.Fractions["HCl"]; !(math.Abs(d-2) <= 1e-14) {
		t.Errorf("He to HCl %g, want 2", d)
	}
	if d := f.Fractions["H2O"] / f.Fractions["HCl"]; !(math.Abs(d-5) <= 1e-13) {
		t.Errorf("H2O to HCl %g, want 5", d)
	}
}

// A flue gas by a model is what New makes of its fractions by that model, and still says of
// what it is.
func TestFlueGasByModel(t *testing.T) {
	for _, model := range []Model{Best, Ideal, PengRobinson} {
		f := mustBurn(t, gasFuel("CH4"), Combustion{ExcessAir: 0.15, Model: model})
		g, err := New(f.Fractions, model)
		if err != nil {
			t.Fatal(err)
		}
		got, err1 := f.Fluid.At(473.15, 101325)
		want, err2 := g.At(473.15, 101325)
		if err1 != nil || err2 != nil || got != want {
			t.Errorf("%v: %+v, %v; want %+v, %v", model, got, err1, want, err2)
		}
		if !strings.HasPrefix(f.Fluid.Source(), "products of a complete combustion") || !strings.HasSuffix(f.Fluid.Source(), g.Source()) {
			t.Errorf("%v: source %q", model, f.Fluid.Source())
		}
	}
}

func TestFlueGasRefuses(t *testing.T) {
	for _, tt := range []struct {
		fuel Fuel
		c    Combustion
		want string
	}{
		{Fuel{}, Combustion{}, "fuel: the mole fractions add up to 0"},
		{gasFuel("CH5"), Combustion{}, `fuel: unknown gas "CH5"`},
		{gasFuel("N2"), Combustion{}, "nothing in the fuel needs air"},
		{gasFuel("CO2"), Combustion{}, "nothing in the fuel needs air"},
		{gasFuel("Cl2"), Combustion{}, "leave Cl2 out"},
		{Fuel{Gas: map[string]float64{"CH4": 1}, Mass: Elements{C: 1}}, Combustion{}, "as a gas and by its elements"},
		{Fuel{Mass: Elements{C: 0.5, H: 0.1}}, Combustion{}, "add up to 0.6"},
		{Fuel{Mass: Elements{C: 1.5, H: -0.5}}, Combustion{}, "a share is 1.5"},
		{Fuel{Mass: Elements{C: math.NaN()}}, Combustion{}, "a share is NaN"},
		{gasFuel("CH4"), Combustion{Model: Reference}, "no reference equation of state"},
		{gasFuel("CH4"), Combustion{ExcessAir: -0.1}, "excess air is -0.1"},
		{gasFuel("CH4"), Combustion{ExcessAir: math.NaN()}, "excess air is NaN"},
		{gasFuel("CH4"), Combustion{DryO2: 3}, "oxygen in the dry flue gas is 3"},
		{gasFuel("CH4"), Combustion{DryO2: 0.03, ExcessAir: 0.1}, "both given"},
		{gasFuel("CH4"), Combustion{WetO2: 0.21}, "oxygen in the wet flue gas is 0.21"},
		{gasFuel("CH4"), Combustion{WetO2: math.NaN()}, "oxygen in the wet flue gas is NaN"},
		{gasFuel("CH4"), Combustion{WetO2: 0.03, ExcessAir: 0.1}, "both given"},
		{gasFuel("CH4"), Combustion{WetO2: 0.03, DryO2: 0.03}, "both given"},
		{gasFuel("CH4"), Combustion{WetO2: 0.19, HumidityRatio: 0.4}, "no excess of air leaves oxygen of 0.19"},
		{gasFuel("CH4"), Combustion{HumidityRatio: 8}, "humidity ratio of the combustion air is 8 kg/kg"},
	} {
		if f, err := FlueGas(tt.fuel, tt.c); err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("%+v, %+v: %+v, %v; want %q", tt.fuel, tt.c, f, err, tt.want)
		}
	}
}
