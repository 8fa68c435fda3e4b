package configs_test

import (
	"bytes"
	"cmp"
	"io/fs"
	"maps"
	"math"
	"slices"
	"strings"
	"testing"

	"go.yaml.in/yaml/v3"

	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/configs"
	"heatreeve/thermo/aqueous"
	"heatreeve/thermo/unit"
)

func examples(t *testing.T) map[string][]byte {
	t.Helper()
	names, err := fs.Glob(configs.Files, "*.yaml")
	if err != nil || len(names) < 2 {
		t.Fatalf("examples: %q, %v; want two or more", names, err)
	}
	texts := make(map[string][]byte, len(names))
	for _, name := range names {
		if texts[name], err = fs.ReadFile(configs.Files, name); err != nil {
			t.Fatal(err)
		}
	}
	return texts
}

const safety = `# Heatreeve informs; it is no safety function, no alarm of record and no billing meter.
# Site codes, the plant's own protection and licensed people come first.
`

func TestExamplesAreRead(t *testing.T) {
	for name, text := range examples(t) {
		s, err := site.Parse(name, text)
		if err != nil {
			t.Errorf("%v", err)
			continue
		}
		if !bytes.HasPrefix(text, []byte("# yaml-language-server: $schema=site.schema.json\n#\n# "+s.Name+", an invented plant")) {
			t.Errorf("%s: the head does not name the schema and the invented plant %q", name, s.Name)
		}
		if !strings.Contains(string(text), safety) {
			t.Errorf("%s: the safety line is missing", name)
		}
		if err := validate(t, text); err != nil {
			t.Errorf("%s: the schema refuses it: %v", name, err)
		}
	}
}

func TestDemo(t *testing.T) {
	if !bytes.Equal(configs.Demo, examples(t)[configs.DemoName]) {
		t.Errorf("Demo is not the text of %s", configs.DemoName)
	}
	s, err := site.Parse(configs.DemoName, configs.Demo)
	if err != nil {
		t.Fatal(err)
	}
	var loads []string
	for _, l := range s.Loads {
		loads = append(loads, l.Name+" of "+l.Stream.FluidName)
	}
	if want := []string{"hot-water of water", "chilled-glycol of glycol", "dryer-air of dry air", "milk of whole milk"}; !slices.Equal(loads, want) {
		t.Errorf("the demo's loads are %q, want %q", loads, want)
	}
}

// At the design point each example asks for a flow that its instrument can show and
// that is not idle, and the engine books the duty that the design states.
func TestDesignPointsAreConsistent(t *testing.T) {
	for name, text := range examples(t) {
		s, err := site.Parse(name, text)
		if err != nil {
			t.Fatal(err)
		}
		for _, l := range s.Loads {
			if l.Stream == nil || l.Design.Duty == 0 {
				continue // a vessel has no design point, nor has a duty that depends on others
			}
			st, d := l.Stream, l.Design
			stream, x := designState(l)
			one, err := loads.Work(&stream, x)
			if err != nil {
				t.Errorf("%s: %s: %v", name, l.Name, err)
				continue
			}
			shown := d.Duty / one.Duty // in the unit of the flow, since x is of a flow of 1
			if st.Flow.Constant() {
				if math.Abs(st.Flow.Value/shown-1) > l.Design.Allow {
					t.Errorf("%s: %s: constant flow %.4g, the design asks for %.4g", name, l.Name, st.Flow.Value, shown)
				}
				continue
			}
			tag := s.Tags[st.Flow.Tag]
			most := tag.Max
			if tag.Counter != nil {
				most = tag.Counter.Largest
			}
			if shown <= 2*st.IdleBelow || shown > most {
				t.Errorf("%s: %s: design flow %.4g, instrument in %v; idle below %.4g, instrument up to %.4g in SI", name, l.Name, shown, tag.Unit, st.IdleBelow, most)
			}
		}
	}
}

// designState is a load at its design point, with a flow of 1; air is half saturated
// and its coil at 7 °C, where the design does not say.
func designState(l site.HeatLoad) (loads.Stream, loads.State) {
	st, d := l.Stream, l.Design
	kinds := map[unit.Dimension]loads.FlowKind{unit.MassFlow: loads.MassFlow, unit.VolumeFlow: loads.VolumeFlow, unit.MolarFlow: loads.MolarFlow}
	stream := loads.Stream{
		Fluid: st.Fluid, FlowKind: kinds[st.FlowKind], MeterAtOutlet: st.MeterAtOutlet, Gives: st.Gives, Margin: st.Margin,
		HumidityKind: st.HumidityKind, HasCoil: st.HasCoil, CalibratedAt: st.CalibratedAt,
	}
	p := cmp.Or(d.Pressure, st.Pressure.Value)
	return stream, loads.State{
		Flow: 1, Inlet: d.Inlet, Outlet: d.Outlet, Pressure: p, OutletPressure: cmp.Or(st.OutletPressure.Value, p),
		Humidity: 0.5, Coil: 280.15,
	}
}

// Every key that the reader knows stands in an example, but for those that rule
// each other out or that only odd fluids need. Of what stands in a list by itself, such
// as solutes and gases, one is enough.
func TestExamplesShowTheKeys(t *testing.T) {
	apart := []string{
		"broker.server_name", "broker.password_env",
		"fluids.*.table.pressure", "fluids.*.table.freezing", "fluids.*.table.range", "fluids.*.table.molar_mass", "fluids.*.polynomial.molar_mass",
		"fluids.*.polynomial.pressure", "fluids.*.polynomial.max_pressure", "fluids.*.polynomial.freezing", "fluids.*.polynomial.boiling",
		"loads.*.stream.dew_point", "loads.*.stream.wet_bulb", "loads.*.stream.humidity_ratio",
		"fluids.*.moist air.dew point", "fluids.*.moist air.wet bulb", "fluids.*.moist air.humidity ratio", "fluids.*.moist air.pressure",
		"fluids.*.food.fibre", "fluids.*.flue gas.wet oxygen",
		"loads.*.design.baseline.against.*.above",
	}
	for _, day := range []string{"monday", "tuesday", "wednesday", "thursday", "friday", "saturday", "sunday"} {
		apart = append(apart, "loads.*.design.week."+day, "loads.*.design.baseline.hours."+day)
	}
	for _, solute := range aqueous.Solutes() {
		apart = append(apart, "fluids.*."+solute)
	}
	shown := make(map[string]bool)
	for _, text := range examples(t) {
		var doc yaml.Node
		if err := yaml.Unmarshal(text, &doc); err != nil {
			t.Fatal(err)
		}
		collect(shown, "", decode(t, &doc))
	}
	for block, keys := range site.Keys() {
		for _, key := range keys {
			path := strings.TrimPrefix(block+"."+key, ".")
			ofAGas := strings.HasPrefix(path, "fluids.*.gas.") || strings.HasPrefix(path, "fluids.*.flue gas.fuel.")
			if block == "brokers.*" {
				path = "broker." + key // which one of them shows is enough
			}
			if !shown[path] && !slices.Contains(apart, path) && !ofAGas {
				t.Errorf("no example shows %s", path)
			}
		}
	}
}

// collect notes the paths of all keys, with a star for the names that files give.
func collect(shown map[string]bool, path string, v any) {
	m, ok := v.(map[string]any)
	if !ok {
		return
	}
	for _, key := range slices.Sorted(maps.Keys(m)) {
		below := strings.TrimPrefix(path+"."+key, ".")
		shown[below] = true
		switch below {
		case "brokers", "fluids", "tags", "loads", "exchangers", "loads.*.design.baseline.against":
			if named, ok := m[key].(map[string]any); ok {
				for _, v := range named {
					collect(shown, below+".*", v)
				}
			}
		default:
			collect(shown, below, m[key])
		}
	}
}
