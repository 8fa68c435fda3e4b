package configs_test

import (
	"bytes"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"sync"
	"testing"

	"github.com/santhosh-tekuri/jsonschema/v6"
	"go.yaml.in/yaml/v3"

	"heatreeve/agent/site"
	"heatreeve/configs"
)

var compiled = sync.OnceValues(func() (*jsonschema.Schema, error) {
	doc, err := jsonschema.UnmarshalJSON(bytes.NewReader(configs.Schema))
	if err != nil {
		return nil, err
	}
	c := jsonschema.NewCompiler()
	if err := c.AddResource("site.schema.json", doc); err != nil {
		return nil, err
	}
	return c.Compile("site.schema.json")
})

// validate holds a site file to the schema.
func validate(t *testing.T, text []byte) error {
	t.Helper()
	var doc yaml.Node
	if err := yaml.Unmarshal(text, &doc); err != nil {
		t.Fatalf("%v in\n%s", err, text)
	}
	return validateTree(t, &doc)
}

func validateTree(t *testing.T, doc *yaml.Node) error {
	t.Helper()
	schema, err := compiled()
	if err != nil {
		t.Fatal(err)
	}
	return schema.Validate(decode(t, doc))
}

func decode(t *testing.T, doc *yaml.Node) any {
	t.Helper()
	var v any
	if err := doc.Decode(&v); err != nil {
		t.Fatal(err)
	}
	return v
}

// The keys of the schema and those of the reader are the same, block by block,
// and each has words for the editor to show.
func TestSchemaHasTheReadersKeys(t *testing.T) {
	schema, err := compiled()
	if err != nil {
		t.Fatal(err)
	}
	got := make(map[string][]string)
	walk(t, got, "", schema)
	want := site.Keys()
	for block, keys := range want {
		slices.Sort(keys)
		slices.Sort(got[block])
		if !slices.Equal(got[block], keys) {
			t.Errorf("%q: the schema has %q, the reader %q", block, got[block], keys)
		}
	}
	if len(got) != len(want) {
		t.Errorf("the schema has %d blocks, the reader %d", len(got), len(want))
	}
}

func walk(t *testing.T, got map[string][]string, path string, s *jsonschema.Schema) {
	described := s.Description != ""
	for s.Ref != nil {
		s = s.Ref
		described = described || s.Description != ""
	}
	if !described && !strings.HasSuffix(path, "*") {
		t.Errorf("%q has no description", path)
	}
	if named, ok := s.AdditionalProperties.(*jsonschema.Schema); ok {
		walk(t, got, strings.TrimPrefix(path+".*", "."), named)
		return
	}
	if s.Properties == nil {
		return
	}
	if s.AdditionalProperties != false {
		t.Errorf("%q takes any key", path)
	}
	for key, below := range s.Properties {
		got[path] = append(got[path], key)
		walk(t, got, strings.TrimPrefix(path+"."+key, "."), below)
	}
}

// The examples are changed in one place at a time, many ways, in every place but
// those that are like another. What the schema then refuses, the reader refuses
// as well.
func TestReaderIsAsStrictAsTheSchema(t *testing.T) {
	for name, text := range examples(t) {
		t.Run(name, func(t *testing.T) {
			t.Parallel()
			refused := 0
			eachMutant(t, text, func(doc *yaml.Node, what string) {
				refusal := validateTree(t, doc)
				if refusal == nil {
					return
				}
				refused++
				changed, err := yaml.Marshal(doc)
				if err != nil {
					t.Fatal(err)
				}
				if _, err := site.Parse(name, changed); err == nil {
					t.Errorf("the schema refuses what the reader takes: %s\n%v", what, refusal)
				}
			})
			t.Logf("the schema refuses %d of the changed files", refused)
			if refused < 300 {
				t.Errorf("the schema refuses %d changed files; too few to tell", refused)
			}
		})
	}
}

// The wrong files of the reader's own tests are refused by both, where the
// schema has a say: most faults are about units and ranges, and a doubled key
// (loads.yaml) does not get as far as a schema.
func TestWrongFiles(t *testing.T) {
	paths, err := filepath.Glob("../agent/site/testdata/wrong/*.yaml")
	if err != nil || len(paths) < 10 {
		t.Fatalf("%d wrong files, %v", len(paths), err)
	}
	var refused []string
	for _, path := range paths {
		text, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		var doc yaml.Node
		var v any
		if yaml.Unmarshal(text, &doc) == nil && doc.Decode(&v) == nil && validateTree(t, &doc) != nil {
			refused = append(refused, strings.TrimSuffix(filepath.Base(path), ".yaml"))
		}
		var faults site.Faults
		if _, err := site.Load(path); !errors.As(err, &faults) {
			t.Errorf("%s: the reader answers %v", path, err)
		}
	}
	for _, name := range []string{"alive", "basis", "broker", "corrections", "counters", "credentials", "exchangers", "fluids", "list", "payloads", "screens", "signals", "tags", "vessels"} {
		if !slices.Contains(refused, name) {
			t.Errorf("the schema takes %s.yaml", name)
		}
	}
}

// What a share is counted by and what a molar mass is for the schema knows as the reader
// does.
func TestSchemaKnowsTheBasis(t *testing.T) {
	const gas = "{table: {source: a sheet, phase: gas, pressure: 1 bar, molar_mass: 27 g/mol, points: [[0 °C, 1 kJ/(kg K), 1.2 kg/m3], [90 °C, 1 kJ/(kg K), 0.9 kg/m3]]}}"
	for _, tt := range []struct {
		fluid string
		good  bool
	}{
		{"{gas: {CO2: 500 g/kg, N2: 500 g/kg}}", false},
		{"{gas: {CO2: 500 g/kg, N2: 500 g/kg}, by: mole}", false},
		{"{gas: {CO2: 500 g/kg, N2: 500 g/kg}, by: mass}", true},
		{"{gas: {CO2: 50 %, N2: 50 per cent}}", true},
		{"{gas: {CO2: 500 ‰, N2: 500000 ppm}, by: volume}", true},
		{"{ethanol: 250 g/kg, by: volume}", false},
		{"{ethanol: 25 %, by: volume, uncertainty: 5 g/kg}", false},
		{"{ethanol: 25 %, by: volume, uncertainty: 5 ‰}", true},
		{"{ethanol: 250 g/kg, by: mass}", true},
		{"{ethanol: 250 g/kg}", true},
		{"{flue gas: {fuel: {CH4: 100 %}, oxygen: 30 g/kg}}", false},
		{"{flue gas: {fuel: {CH4: 1 kg/kg}, oxygen: 3 %}}", false},
		{"{flue gas: {elements: {C: 860 g/kg, H: 140 g/kg}, oxygen: 3 %}}", true},
		{gas, true},
		{strings.Replace(gas, "phase: gas, pressure: 1 bar", "phase: solid", 1), false},
	} {
		text := examples(t)["brackwater-creamery.yaml"]
		at := bytes.Index(text, []byte("\nfluids:\n")) + len("\nfluids:\n")
		text = slices.Concat(text[:at], []byte("  another: "+tt.fluid+"\n"), text[at:])
		refusal := validate(t, text)
		_, err := site.Parse("plant.yaml", text)
		if (refusal == nil) != tt.good || (err == nil) != tt.good {
			t.Errorf("%s: the schema says %v, the reader %v; good: %v", tt.fluid, refusal, err, tt.good)
		}
	}
}

// In the spelling of names the reader is wider than the schema, which says so, and in
// nothing else: as the schema writes them, both take the same.
func TestSchemaKnowsOneSpelling(t *testing.T) {
	if !bytes.Contains(configs.Schema, []byte("in any case, with spaces or hyphens; this schema knows them as they are written here")) {
		t.Error("the schema does not say that it is narrower")
	}
	for _, tt := range []struct{ free, strict string }{
		{"{Propylene-Glycol: 32 %}", "{propylene glycol: 32 %}"},
		{"{Gas: {n2: 79 %, o2: 21 %}}", "{gas: {N2: 79 %, O2: 21 %}}"},
		{"{gas: {N2: 100 %}, model: Ideal}", "{gas: {N2: 100 %}, model: ideal}"},
		{"{SEAWATER: 35 g/kg}", "{seawater: 35 g/kg}"},
		{"{food: {Water: 100 %}}", "{food: {water: 100 %}}"},
	} {
		text := examples(t)["brackwater-creamery.yaml"]
		for fluid, good := range map[string]bool{tt.free: false, tt.strict: true} {
			file := bytes.Replace(text, []byte("\nfluids:\n"), []byte("\nfluids:\n  another: "+fluid+"\n"), 1)
			if refusal := validate(t, file); (refusal == nil) != good {
				t.Errorf("%s: the schema says %v", fluid, refusal)
			}
			if _, err := site.Parse("plant.yaml", file); err != nil {
				t.Errorf("%s: the reader says %v", fluid, err)
			}
		}
	}
}

// The pressures above which the schema and the README say that the ideal gas is refused are
// those of the gases.
func TestIdealGasEndsWhereItIsSaid(t *testing.T) {
	readme, err := os.ReadFile("../README.md")
	if err != nil {
		t.Fatal(err)
	}
	for _, g := range []struct{ formula, said string }{
		{"N2", "968 kPa for N2"}, {"CH4", "591 kPa for CH4"}, {"CO2", "191 kPa for CO2"}, {"H2O", "120 kPa for H2O and NH3"}, {"NH3", "120 kPa for H2O and NH3"},
	} {
		f, err := site.ParseFluid("{gas: {" + g.formula + ": 100 %}, model: ideal}")
		if err != nil {
			t.Fatal(err)
		}
		if most := fmt.Sprintf("%.0f kPa ", f.Bounds().MaxP/1e3); !strings.HasPrefix(g.said, most) {
			t.Errorf("%s ends at %s", g.formula, most)
		}
		for name, text := range map[string][]byte{"schema": configs.Schema, "README": readme} {
			if !bytes.Contains(text, []byte(g.said)) {
				t.Errorf("the %s does not say %q", name, g.said)
			}
		}
	}
}

func TestSchemaRefersToNothingElse(t *testing.T) {
	if _, err := fs.Stat(configs.Files, "site.schema.json"); err == nil {
		t.Error("the schema is among the example files")
	}
	if bytes.Contains(configs.Schema, []byte(`"$ref": "http`)) {
		t.Error("the schema needs the network")
	}
}
