package thermo_test

import (
	"math"
	"os"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/air"
	"heatreeve/thermo/fluidtest"
	"heatreeve/thermo/gas"
	"heatreeve/thermo/named"
	"heatreeve/thermo/oil"
	"heatreeve/thermo/seawater"
	"heatreeve/thermo/table"
)

// TestWorkedExamples works every row of testdata/worked-examples.csv, whose
// sources stand in the rows, and holds it to the row's own tolerance.
func TestWorkedExamples(t *testing.T) {
	fluids := workedFluids(t)
	examples := fluidtest.Rows(t, os.DirFS("testdata"), "worked-examples.csv")
	if len(examples) != 56 {
		t.Errorf("%d examples, want 56", len(examples))
	}
	ran := 0
	for _, row := range examples {
		r := example{row}
		t.Run(r.Text("id"), func(t *testing.T) {
			f, err := fluidOf(fluids, r.Text("fluid"))
			if err != nil {
				t.Fatal(err)
			}
			mass := r.mass(t, f)
			near(t, "mass", mass, r.Number("mass"), r.Number("tol_rel"))
			near(t, "heat", r.heat(t, f, mass), r.Number("expected"), r.Number("tol_rel"))
			ran++
		})
	}
	if ran != len(examples) {
		t.Errorf("ran %d of %d examples", ran, len(examples))
	}
}

func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got/want-1) <= tolerance) {
		t.Errorf("%s = %.9g, want %.9g within %g", what, got, want, tolerance)
	}
}

// example is a row of the file.
type example struct{ fluidtest.Row }

// heat of the example between its two temperatures.
func (r example) heat(t *testing.T, f thermo.Fluid, mass float64) float64 {
	t.Helper()
	T1, T2, p := r.Number("T_in_K"), r.Number("T_out_K"), r.Number("p_Pa")
	var q float64
	var err error
	switch kind := r.Text("kind"); kind {
	case "stream":
		q, err = thermo.StreamHeat(f, mass, T1, p, T2, p)
	case "batch":
		q, err = thermo.StreamHeat(f, mass, T1, p, T2, p) // in kg: the pressure stays
	case "rigid":
		a := r.at(t, f, T1)
		b := fluidtest.Must(f.At(T2, p*T2/T1))(t) // the examples are ideal gases
		near(t, "final density", b.Density, a.Density, 1e-12)
		q = mass * (b.InternalEnergy - a.InternalEnergy)
	default:
		t.Fatalf("kind %q is unknown", kind)
	}
	if err != nil {
		t.Fatal(err)
	}
	return q
}

// masses are the units of amounts by mass, in kg or kg/s.
var masses = map[string]float64{
	"kg/s": 1, "kg": 1, "kg/min": 1. / 60, "kg/h": 1. / 3600, "t/h": 1 / 3.6,
	"standard air cfm": 0.075 * 0.45359237 / 60, // 0.075 lb/ft³ by convention
}

// volumes are those of amounts by volume at the meter, in m³ or m³/s.
var volumes = map[string]float64{
	"m3": 1, "m3/s": 1, "m3/h": 1. / 3600, "m3/min": 1. / 60, "L/s": 1e-3, "L/min": 1 / 6e4, "L/h": 1 / 3.6e6, "hL/h": 1 / 3.6e4,
	"gpm": 231 * 0.0254 * 0.0254 * 0.0254 / 60, // a gallon is 231 in³
}

// gases are those of amounts of an ideal gas, in mol or mol/s.
var gases = map[string]float64{
	"mol": 1, "Nm3/h": molar(273.15) / 3600, "Sm3/h": molar(288.15) / 3600, "scfm60": math.Pow(0.3048, 3) / 60 * molar((60+459.67)/1.8),
}

// molar is how much an ideal gas has at T in K and 1 atm, in mol/m³.
func molar(T float64) float64 { return 101325 / (thermo.R * T) }

// mass in kg, or flow in kg/s, of the amount as the example states it.
func (r example) mass(t *testing.T, f thermo.Fluid) float64 {
	t.Helper()
	n, unit := r.Number("flow"), r.Text("flow_unit")
	if k, ok := masses[unit]; ok {
		return n * k
	}
	if k, ok := gases[unit]; ok {
		return n * k * f.MolarMass()
	}
	k, ok := volumes[unit]
	if !ok {
		t.Fatalf("unit %q is unknown", unit)
	}
	T := r.Number("T_in_K")
	if r.Text("meter") == "outlet" {
		T = r.Number("T_out_K")
	}
	return n * k * r.at(t, f, T).Density
}

func (r example) at(t *testing.T, f thermo.Fluid, T float64) thermo.Properties {
	t.Helper()
	return fluidtest.Must(f.At(T, r.Number("p_Pa")))(t)
}

// fluidOf is one of the examples' own fluids, else the fluid of that name.
func fluidOf(own map[string]thermo.Fluid, name string) (thermo.Fluid, error) {
	if f := own[name]; f != nil {
		return f, nil
	}
	return named.Lookup(name)
}

func workedFluids(t *testing.T) map[string]thermo.Fluid {
	t.Helper()
	fluids := map[string]thermo.Fluid{
		"dry air":  fluidtest.Must(gas.DryAir(gas.Ideal))(t),
		"flue gas": fluidtest.Must(gas.New(map[string]float64{"N2": 0.712, "CO2": 0.086, "H2O": 0.172, "O2": 0.030}, gas.Ideal))(t),
		"engine oil": fluidtest.Must(table.New("engine oil", "constant cp as in the example", []table.Point{{T: 353, Cp: 2131, Density: 850}},
			table.Options{MinT: 300, MaxT: 400}))(t),
		"methane by its reference equation":                        fluidtest.Must(gas.New(map[string]float64{"CH4": 1}, gas.Reference))(t),
		"carbon dioxide by its reference equation":                 fluidtest.Must(gas.New(map[string]float64{"CO2": 1}, gas.Reference))(t),
		"fuel oil of specific gravity 0.95 and Watson factor 11.5": fluidtest.Must(oil.Petroleum(densityOf(0.95), 11.5, "fuel oil"))(t),
		"lubricating oil 880 kg/m3":                                fluidtest.Must(oil.Petroleum(880, 0, "lubricating oil"))(t),
		"seawater 35 g/kg":                                         fluidtest.Must(seawater.New(0.03516504))(t),
		"moist air of 30 degC and 45 % relative humidity":          fluidtest.Must(moist(thermo.RelativeHumidity, 0.45, 303.15))(t),
		"moist air saturated at 2 degC":                            fluidtest.Must(moist(thermo.RelativeHumidity, 1, 275.15))(t),
	}
	for _, s := range []string{"N2", "CH4", "CO2", "H2O", "O2"} {
		fluids[s] = fluidtest.Must(gas.New(map[string]float64{s: 1}, gas.Ideal))(t)
	}
	return fluids
}

// densityOf turns a specific gravity at 60 °F into kg/m³.
func densityOf(gravity float64) float64 { return gravity * 999.016 }

// moist is the air whose humidity was measured at T and 1 atm.
func moist(kind thermo.MoistureKind, value, T float64) (thermo.Fluid, error) {
	w, err := air.HumidityRatio(thermo.Moisture{Kind: kind, Value: value}, T, 101325)
	if err != nil {
		return nil, err
	}
	return air.Moist(w)
}
