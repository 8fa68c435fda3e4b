package oil

import (
	"encoding/csv"
	"os"
	"strconv"
	"testing"

	"heatreeve/thermo"
)

const atm = 101325.0

func must(t testing.TB) func(thermo.Fluid, error) thermo.Fluid {
	return func(f thermo.Fluid, err error) thermo.Fluid {
		t.Helper()
		if err != nil {
			t.Fatal(err)
		}
		return f
	}
}

// record is a line of a table in testdata, by column.
type record map[string]string

func (r record) number(t *testing.T, column string) float64 {
	t.Helper()
	v, err := strconv.ParseFloat(r[column], 64)
	if err != nil {
		t.Fatalf("%v: column %q: %v", r, column, err)
	}
	return v
}

func records(t *testing.T, name string) []record {
	t.Helper()
	file, err := os.Open("testdata/" + name)
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	c := csv.NewReader(file)
	c.Comment = '#'
	lines, err := c.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var out []record
	for _, line := range lines[1:] {
		r := record{}
		for k, head := range lines[0] {
			r[head] = line[k]
		}
		out = append(out, r)
	}
	return out
}
