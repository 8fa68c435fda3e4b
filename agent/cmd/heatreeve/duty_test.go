package main

import (
	"fmt"
	"math"
	"os"
	"slices"
	"strings"
	"testing"

	"heatreeve/thermo/fluidtest"
)

// spellings of units in the table of worked examples, with what their number is multiplied by.
var spellings = map[string]struct {
	unit   string
	factor float64
}{"scfm60": {"scfm (60 °F)", 1}, "hL/h": {"L/h", 100}}

// mixtures are fluids that the table of worked examples tells in words.
var mixtures = map[string]string{
	"flue gas":                                                 "{gas: {N2: 71.2 %, CO2: 8.6 %, H2O: 17.2 %, O2: 3 %}, model: ideal}", // as its row G01 says
	"methane by its reference equation":                        "{gas: {CH4: 100 %}, model: reference}",
	"carbon dioxide by its reference equation":                 "{gas: {CO2: 100 %}, model: reference}",
	"fuel oil of specific gravity 0.95 and Watson factor 11.5": "{petroleum: {api gravity: 17.4473684, watson: 11.5, group: fuel oil}}", // 141.5/0.95 − 131.5
	"moist air of 30 degC and 45 % relative humidity":          "{moist air: {relative humidity: 45 %, at: 30 °C}}",
	"moist air saturated at 2 degC":                            "{moist air: {relative humidity: 100 %, at: 2 °C}}",
}

// written is the fluid of a worked example as the command takes it. Examples worked with
// the ideal gas are held to that model.
func written(r fluidtest.Row) string {
	of := r.Text("fluid")
	if text, ok := mixtures[of]; ok {
		return text
	}
	if of != "steam" && strings.Contains(r.Text("source"), "ideal gas") {
		return "{gas: {" + of + ": 100 %}, model: ideal}"
	}
	return of
}

// Every stream of the worked examples, whose sources stand in its row, comes out of the
// command as well, within the row's own tolerance. Rows of tables that only the tests
// of thermo have are left to them.
func TestDutyWorksTheExamples(t *testing.T) {
	ran := 0
	for _, r := range fluidtest.Rows(t, os.DirFS("../../../thermo/testdata"), "worked-examples.csv") {
		fluid := written(r)
		T, p := r.Text("T_in_K")+" K", r.Text("p_Pa")+" Pa"
		if status, _, _ := invoke("properties", fluid, "--temperature", T, "--pressure", p); r.Text("kind") != "stream" || status != exitGood {
			continue
		}
		flow := r.Text("flow") + " " + r.Text("flow_unit")
		if s, ok := spellings[r.Text("flow_unit")]; ok {
			flow = fmt.Sprintf("%g %s", s.factor*r.Number("flow"), s.unit)
		}
		v := askJSON[handResult](t, "duty", fluid, "--flow", flow, "--from", T, "--to", r.Text("T_out_K")+" K", "--pressure", p, "--meter-at", r.Text("meter"))
		ran++
		for _, f := range [...]struct {
			name, column string
			got          float64
		}{{"duty", "expected", v.Duty}, {"mass flow", "mass", v.MassFlow}} {
			want, tolerance := r.Number(f.column), r.Number("tol_rel")
			if !(math.Abs(f.got/want-1) <= tolerance) {
				t.Errorf("%s: %s = %.9g, want %.9g within %g (%s)", r.Text("id"), f.name, f.got, want, tolerance, r.Text("source"))
			}
		}
		if dT := v.OutletT - v.InletT; !(math.Abs(v.MassFlow*v.MeanCp*dT/v.Duty-1) <= 1e-12) {
			t.Errorf("%s: mean cp %g times mass flow and %g K is not the duty", r.Text("id"), v.MeanCp, dT)
		}
	}
	if ran < 45 {
		t.Errorf("%d examples ran, want 45 or more", ran)
	}
	t.Logf("%d examples by the command", ran)
}

// The working says which way the heat goes, how the flow became kg/s, and what is
// sure: 12 t/h of feedwater is the worked example W09, 1070.6 kW.
func TestDutyTellsItsWorking(t *testing.T) {
	for _, tt := range []struct {
		args []string
		want []string
	}{
		{
			[]string{"duty", "water", "--flow", "12 t/h", "--from", "105 °C", "--to", "180 °C", "--pressure", "6 MPa"},
			[]string{"12 t/h = 3.33333 kg/s", "105 °C = 378.15 K", "The stream takes 1070", "Source: IAPWS R7-97", "mean cp", "/ 75 K ="},
		},
		{
			[]string{"duty", "--from", "70°C", "--to", "50°C", "--flow", "10 m3/h", "--pressure", "3 barg", "--barometer", "100 kPa", "water"},
			[]string{"The stream gives ", "10 m3/h at the inlet = 0.00277778 m3/s", "0.00277778 m3/s ×", "= 343.15 K, 400 kPa:", "pressures are absolute", "note: the meter is taken to sit at the inlet; at the outlet", "density to"},
		},
		{
			[]string{"duty", "water", "--flow", "1 kg/s", "--from", "20°C", "--to", "98°C"},
			[]string{"note: outlet at 98.00 °C is within 5 K of boiling", "the agent would not book it"},
		},
		{
			[]string{"duty", "N2", "--flow", "100 Nm3/h", "--from", "20°C", "--to", "20°C"},
			[]string{"mol/s × 0.0280", "neither gives heat nor takes it", "that of the one temperature"},
		},
		{
			[]string{"duty", "water", "--flow", "1 kg/s", "--from", "20°C", "--to", "30°C", "--pressure", "5 bar", "--outlet-pressure", "3 bar"},
			[]string{"= 293.15 K, 500 kPa:", "= 303.15 K, 300 kPa:"},
		},
	} {
		status, out, errs := invoke(tt.args...)
		if status != exitGood || errs != "" {
			t.Errorf("%q: status %d, %s", tt.args, status, errs)
		}
		for _, piece := range tt.want {
			if !strings.Contains(strings.Join(strings.Fields(out), " "), piece) {
				t.Errorf("%q does not say %q:\n%s", tt.args, piece, out)
			}
		}
		if slices.ContainsFunc(strings.Split(out, "\n"), func(l string) bool { return strings.HasSuffix(l, " ") }) {
			t.Errorf("%q: blanks at the end of a line:\n%s", tt.args, out)
		}
	}
}

func TestFluidCommandsRefuse(t *testing.T) {
	for _, tt := range []struct {
		args   []string
		status int
		want   string
	}{
		{[]string{"properties"}, exitWrong, "the fluid, such as water"},
		{[]string{"properties", "water"}, exitWrong, "--temperature is missing"},
		{[]string{"properties", "water", "--temperature", "20"}, exitWrong, "unit is missing"},
		{[]string{"properties", "water", "--temperature", "20 °C,"}, exitWrong, `--temperature "20 °C," has a comma without a temperature on either side`},
		{[]string{"properties", "water", "--tempreature", "20 °C"}, exitWrong, "unknown option --tempreature; near: --temperature; see"},
		{[]string{"properties", "water", "--temperature", "20 °C", "--barometer", "banana"}, exitWrong, `--barometer "banana"`},
		{[]string{"properties", "water", "--temperature", "20 °C", "--barometer", "1 barg"}, exitWrong, "--barometer 1 barg is no pressure of the air"},
		{[]string{"properties", "--list", "--temperature", "3", "--pressure", "1 bar"}, exitWrong, "--list tells all fluids and takes no --pressure, --temperature"},
		{[]string{"duty", "water", "--flow", "3 kg/s", "--from", "20 °C", "--to", "30 °C", "--barometer", "banana"}, exitWrong, `--barometer "banana"`},
		{[]string{"duty", "water", "--flow", "3 kg/s", "--meter-at", "outlet", "--from", "20 °C", "--to", "30 °C"}, exitWrong, "--meter-at outlet is about a volume flow"},
		{[]string{"duty", "N2", "--flow", "3 Nm3/h", "--meter-at", "outlet", "--from", "20 °C", "--to", "30 °C"}, exitWrong, "--flow 3 Nm3/h is a normal or standard volume flow"},
		{[]string{"properties", "water", "--temperature", "20,5 °C"}, exitWrong, "a comma parts temperatures, and the decimal separator is a point"},
		{[]string{"properties", "water", "--temp", "20 °C"}, exitWrong, "unknown option --temp; near: --temperature; see heatreeve properties --help"},
		{[]string{"properties", "water", "--colour", "20 °C"}, exitWrong, "unknown option --colour; known: --barometer, --json"},
		{[]string{"properties", "water", "--temperature"}, exitWrong, "flag needs an argument: -temperature"},
		{[]string{"properties", "ammonia", "--temperature", "20 °C", "--pressure", "20 bar"}, exitFailed, `there it is a liquid, "liquid ammonia"`},
		{[]string{"properties", "liquid CO2", "--temperature", "20 °C", "--pressure", "10 bar"}, exitFailed, `there it is a gas, "carbon dioxide"`},
		{[]string{"properties", "nitrogen", "--temperature", "3000 °C"}, exitFailed, "°C\n"},
		{[]string{"properties", "water", "--temperature", "4 bar"}, exitWrong, "unit of pressure"},
		{[]string{"properties", "watr", "--temperature", "20 °C"}, exitWrong, "near: \"water\"\nknown:\n  water, steam, "},
		{[]string{"properties", "dry", "air", "--temperature", "20 °C"}, exitWrong, `unexpected "air"; words that belong together stand in quotes`},
		{[]string{"properties", "propylene glycol", "--temperature", "20 °C"}, exitWrong, "wants its strength"},
		{[]string{"properties", "{gas: {N2: 79 %}}", "--temperature", "20 °C"}, exitWrong, "fluid:1:7: gas: the mole fractions add up to 0.79"},
		{[]string{"properties", "water", "--temperature", "20 °C", "--pressure", "3 barg"}, exitWrong, "write --barometer as well"},
		{[]string{"properties", "water", "--temperature", "20 °C", "--pressure", "3 barg", "--barometer", "3 bar"}, exitWrong, "no pressure of the air"},
		{[]string{"properties", "water", "--temperature", "20 °C", "--pressure", "-3 bar"}, exitWrong, "not above vacuum"},
		{[]string{"properties", "water", "--temperature", "120 °C"}, exitFailed, "allowed at 101.325 kPa absolute: 0 °C to 99.97"},
		{[]string{"properties", "water", "--temperature", "20 °C,-5 °C"}, exitFailed, "temperature -5 °C is below 0 °C"},
		{[]string{"properties", "water", "--temperature", "20°C,90°C,150°C", "--pressure", "1 bar"}, exitFailed, "--temperature 150 °C: water: pressure 100 kPa is below 476.101 kPa"},
		{[]string{"properties", "water", "--temperature", "20 °C", "--pressure", "2000 bar"}, exitFailed, "pressure 200000 kPa is above 100000 kPa"},
		{[]string{"properties", "--list", "water"}, exitWrong, `unexpected "water"`},
		{[]string{"duty", "water", "--from", "20 °C", "--to", "30 °C"}, exitWrong, "--flow is missing"},
		{[]string{"duty", "water", "--flow", "3 kg/s", "--to", "30 °C"}, exitWrong, "--from is missing"},
		{[]string{"duty", "water", "--flow", "3 kW", "--from", "20 °C", "--to", "30 °C"}, exitWrong, "unit of power"},
		{[]string{"duty", "water", "--flow", "-3 kg/s", "--from", "20 °C", "--to", "30 °C"}, exitWrong, "below zero; swap --from and --to"},
		{[]string{"duty", "water", "--flow", "3 Nm3/h", "--from", "20 °C", "--to", "30 °C"}, exitWrong, "is for gases"},
		{[]string{"duty", "water", "--flow", "3 m3/h", "--meter-at", "middle", "--from", "20 °C", "--to", "30 °C"}, exitWrong, `"middle" is not known; allowed: inlet, outlet`},
		{[]string{"duty", "water", "--flow", "3 kg/s", "--from", "20 °C", "--to", "130 °C"}, exitFailed, "outlet: water: "},
		{[]string{"duty", "water", "--flow", "3e9 kg/s", "--from", "20 °C", "--to", "30 °C"}, exitFailed, "more than any pipe carries"},
	} {
		status, out, errs := invoke(tt.args...)
		if status != tt.status || out != "" || !strings.Contains(errs, tt.want) {
			t.Errorf("heatreeve %q: status %d, printed %q, said %q; want %d, ...%q...", tt.args, status, out, errs, tt.status, tt.want)
		}
	}
}

// Nothing flows, so the duty is nothing, and not less than nothing; a barometer that no
// gauge pressure needs does no harm.
func TestDutyOfNoFlow(t *testing.T) {
	status, out, errs := invoke("duty", "water", "--flow", "0 kg/s", "--from", "80 °C", "--to", "60 °C", "--barometer", "100 kPa", "--json")
	if status != exitGood || !strings.Contains(out, `"duty_W": 0,`) {
		t.Errorf("status %d, %s%s", status, out, errs)
	}
}
