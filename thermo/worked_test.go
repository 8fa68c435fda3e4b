package thermo_test

import (
	"encoding/csv"
	"fmt"
	"math"
	"os"
	"strconv"
	"testing"

	"heatreeve/thermo"
	"heatreeve/thermo/aqueous"
	"heatreeve/thermo/gas"
	"heatreeve/thermo/table"
	"heatreeve/thermo/water"
)

// TestWorkedExamples works every row of testdata/worked-examples.csv, whose
// sources stand in the rows, and holds it to the row's own tolerance.
func TestWorkedExamples(t *testing.T) {
	fluids := workedFluids(t)
	examples := records(t, "worked-examples.csv")
	if len(examples) < 39 {
		t.Errorf("%d examples, want 39", len(examples))
	}
	ran := 0
	for _, r := range examples {
		t.Run(r.text["id"], func(t *testing.T) {
			f := fluids[r.text["fluid"]]
			if f == nil {
				t.Fatalf("no fluid %q", r.text["fluid"])
			}
			mass := r.mass(t, f)
			near(t, "mass", mass, r.number(t, "mass"), r.number(t, "tol_rel"))
			near(t, "heat", r.heat(t, f, mass), r.number(t, "expected"), r.number(t, "tol_rel"))
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

// heat of the example between its two temperatures.
func (r record) heat(t *testing.T, f thermo.Fluid, mass float64) float64 {
	t.Helper()
	T1, T2, p := r.number(t, "T_in_K"), r.number(t, "T_out_K"), r.number(t, "p_Pa")
	var q float64
	var err error
	switch kind := r.text["kind"]; kind {
	case "stream":
		q, err = thermo.StreamHeat(f, mass, T1, p, T2, p)
	case "batch":
		q, err = thermo.OpenVesselHeat(f, mass, T1, T2, p)
	case "rigid":
		s := r.at(t, f, T1)
		var p2 float64
		q, p2, err = thermo.RigidVesselHeat(f, mass/s.Density, T1, p, T2)
		near(t, "final pressure", p2, p*T2/T1, 1e-12) // the examples are ideal gases
	default:
		t.Fatalf("kind %q is unknown", kind)
	}
	if err != nil {
		t.Fatal(err)
	}
	return q
}

// mass in kg, or flow in kg/s, of the amount as the example states it.
func (r record) mass(t *testing.T, f thermo.Fluid) float64 {
	t.Helper()
	const normal, standard, fahrenheit60 = 273.15, 288.15, (60 + 459.67) / 1.8
	density := func() float64 {
		T := r.number(t, "T_in_K")
		if r.text["meter"] == "outlet" {
			T = r.number(t, "T_out_K")
		}
		return r.at(t, f, T).Density
	}
	ideal := func(T float64) float64 { return 101325 / (thermo.R * T) * f.MolarMass() } // kg/m³
	n := r.number(t, "flow")
	switch unit := r.text["flow_unit"]; unit {
	case "kg/s", "kg":
		return n
	case "kg/min":
		return n / 60
	case "t/h":
		return n / 3.6
	case "mol":
		return n * f.MolarMass()
	case "m3":
		return n * density()
	case "m3/h":
		return n / 3600 * density()
	case "m3/min":
		return n / 60 * density()
	case "gpm":
		return n * 231 * math.Pow(0.0254, 3) / 60 * density() // a gallon is 231 in³
	case "Nm3/h":
		return n / 3600 * ideal(normal)
	case "Sm3/h":
		return n / 3600 * ideal(standard)
	case "scfm60":
		return n * math.Pow(0.3048, 3) / 60 * ideal(fahrenheit60)
	case "standard air cfm":
		return n * 0.075 * 0.45359237 / 60 // 0.075 lb/ft³ by convention
	default:
		t.Fatalf("unit %q is unknown", unit)
		return 0
	}
}

func (r record) at(t *testing.T, f thermo.Fluid, T float64) thermo.Properties {
	t.Helper()
	s, err := f.At(T, r.number(t, "p_Pa"))
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func workedFluids(t *testing.T) map[string]thermo.Fluid {
	t.Helper()
	must := func(f thermo.Fluid, err error) thermo.Fluid {
		if err != nil {
			t.Fatal(err)
		}
		return f
	}
	fluids := map[string]thermo.Fluid{
		"water":                 water.Liquid(),
		"steam":                 water.Steam(),
		"dry air":               must(gas.DryAir(gas.Ideal)),
		"flue gas":              must(gas.New(map[string]float64{"N2": 0.712, "CO2": 0.086, "H2O": 0.172, "O2": 0.030}, gas.Ideal)),
		"ethylene glycol 35 %":  must(aqueous.New("ethylene glycol", 0.35, 0)),
		"propylene glycol 40 %": must(aqueous.New("propylene glycol", 0.40, 0)),
		"engine oil": must(table.New("engine oil", "constant cp as in the example", []table.Point{{T: 353, Cp: 2131, Density: 850}},
			table.Options{MinT: 300, MaxT: 400})),
		"carbon steel": must(table.New("carbon steel", "EN 1993-1-2:2005, 3.4.1.2", carbonSteel(), table.Options{Phase: thermo.Solid})),
	}
	for _, s := range []string{"N2", "CH4", "CO2", "H2O", "O2"} {
		fluids[s] = must(gas.New(map[string]float64{s: 1}, gas.Ideal))
	}
	for name, points := range thermalLiquids(t) {
		fluids[name] = must(table.New(name, "testdata/thermal-liquids.csv", points, table.Options{}))
	}
	return fluids
}

// carbonSteel tabulates EN 1993-1-2:2005, 3.4.1.2 (from memory), for 20 °C to
// 600 °C, every 10 K: cp = 425 + 0.773 t − 1.69·10⁻³ t² + 2.22·10⁻⁶ t³.
func carbonSteel() []table.Point {
	var out []table.Point
	for t := 20.0; t <= 600; t += 10 {
		out = append(out, table.Point{T: t + 273.15, Cp: 425 + t*(0.773+t*(-1.69e-3+t*2.22e-6)), Density: 7850})
	}
	return out
}

func thermalLiquids(t *testing.T) map[string][]table.Point {
	t.Helper()
	out := map[string][]table.Point{}
	for _, r := range records(t, "thermal-liquids.csv") {
		name := r.text["fluid"]
		out[name] = append(out[name], table.Point{
			T: r.number(t, "T_K"), Cp: r.number(t, "cp_J_per_kgK"), Density: r.number(t, "rho_kg_per_m3"),
		})
	}
	return out
}

// record is a line of a table in testdata, by column name.
type record struct{ text map[string]string }

func (r record) number(t *testing.T, column string) float64 {
	t.Helper()
	v, err := strconv.ParseFloat(r.text[column], 64)
	if err != nil {
		t.Fatalf("%v: column %q: %v", r.text, column, err)
	}
	return v
}

func records(t *testing.T, name string) []record {
	t.Helper()
	out, err := readRecords("testdata/" + name)
	if err != nil {
		t.Fatal(err)
	}
	return out
}

func readRecords(path string) ([]record, error) {
	file, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer file.Close()
	c := csv.NewReader(file)
	c.Comment = '#'
	lines, err := c.ReadAll()
	if err != nil {
		return nil, fmt.Errorf("%s: %w", path, err)
	}
	var out []record
	for _, line := range lines[1:] {
		r := record{map[string]string{}}
		for k, head := range lines[0] {
			r.text[head] = line[k]
		}
		out = append(out, r)
	}
	return out, nil
}
