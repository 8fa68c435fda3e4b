package unit

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"testing"

	"heatreeve/thermo"
)

// csvDimensions are the words of testdata/units.csv for our dimensions.
var csvDimensions = map[string]Dimension{
	"temperature": Temperature, "temperature-difference": TemperatureDifference, "pressure": Pressure,
	"mass": Mass, "volume": Volume, "mass-flow": MassFlow, "volume-flow": VolumeFlow, "molar-flow": MolarFlow,
	"energy": Energy, "power": Power, "specific-heat": SpecificHeat, "specific-enthalpy": SpecificEnthalpy,
	"density": Density,
}

// The rows come from NIST SP 811 (2008) appendix B, DIN 1343, ISO 13443 and the
// named conventions, worked out outside this package. They are printed to 16
// digits, so 1e-14 leaves room for their rounding only. The gauge rows show
// the standard atmosphere as their offset; here the caller adds the barometer.
func TestTableHoldsEveryReferenceRow(t *testing.T) {
	f, err := os.Open("testdata/units.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	r.Comment = '#'
	lines, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if len(lines) != 1+91 {
		t.Fatalf("units.csv has %d lines, want a head and 91 units", len(lines))
	}
	for _, line := range lines[1:] {
		d, ok := csvDimensions[line[0]]
		if !ok {
			t.Errorf("quantity %q has no dimension", line[0])
			continue
		}
		u, err := LookupAs(line[1], d)
		if err != nil {
			t.Errorf("LookupAs(%q, %v): %v", line[1], d, err)
			continue
		}
		factor, offset := parse(t, line[3]), parse(t, line[4])
		if u.Gauge {
			offset -= 101325
		}
		if d == MolarFlow {
			factor *= 8.314462618 / thermo.R
		}
		if u.Dimension.SI() != line[2] || !(math.Abs(u.Factor/factor-1) <= 1e-14) || !(math.Abs(u.Offset-offset) <= 1e-12) {
			t.Errorf("%s: SI = %v·x + %v in %s; want %v·x + %v in %s (%s)",
				line[1], u.Factor, u.Offset, u.Dimension.SI(), factor, offset, line[2], line[6])
		}
	}
}

func parse(t *testing.T, s string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(s, 64)
	if err != nil {
		t.Fatal(err)
	}
	return x
}

// Values as printed in NIST SP 811 (2008) appendix B.8, to the digits printed
// there (quoted from memory).
func TestPrintedFactors(t *testing.T) {
	for _, tt := range []struct {
		symbol string
		want   float64
		digits float64 // relative
	}{
		{"psi", 6.894757e3, 1e-7},
		{"Btu/h", 2.930711e-1, 2e-7},
		{"gpm", 6.309020e-5, 1e-7},
		{"cfm", 4.719474e-4, 2e-7},
		{"hp", 7.456999e2, 1e-7},
		{"lb/ft3", 1.601846e1, 3e-7},
		{"inHg", 3.386389e3, 2e-7},
		{"ton of refrigeration", 3.516853e3, 1e-7},
		{"hL", 0.1, 1e-15}, {"hL/h", 0.1 / 3600, 1e-15}, // SI Brochure: 1 L = 1e-3 m³
	} {
		u, err := Lookup(tt.symbol)
		if err != nil || !(math.Abs(u.Factor/tt.want-1) <= tt.digits) {
			t.Errorf("%s: factor %v, %v; want %v", tt.symbol, u.Factor, err, tt.want)
		}
	}
}

func TestEveryUnitIsFoundUnderItsNames(t *testing.T) {
	for _, r := range table {
		if r.Factor <= 0 || r.Source == "" || !r.Dimension.valid() || (r.Gauge && r.Offset != 0) {
			t.Errorf("%q is incomplete: %+v", r.Symbol, r.Unit)
		}
		for _, name := range r.names() {
			if u, err := LookupAs(name, r.Dimension); err != nil || u != r.Unit {
				t.Errorf("LookupAs(%q, %v) = %q, %v; want %q", name, r.Dimension, u.Symbol, err, r.Symbol)
			}
		}
	}
}

func TestEveryDimensionHasItsSIUnit(t *testing.T) {
	for d := Dimension(1); d.valid(); d++ {
		found := d == Ratio // whose SI unit is 1
		for _, u := range Named(d) {
			found = found || u.Factor == 1 && u.Offset == 0
		}
		if !found {
			t.Errorf("%v has no unit of factor 1", d)
		}
	}
}

// Only temperature symbols may serve two dimensions, or Lookup would guess.
func TestNamesAreUnique(t *testing.T) {
	for key, us := range index() {
		if len(us) == 1 || len(us) == 2 && us[0].Dimension == Temperature && us[1].Dimension == TemperatureDifference {
			continue
		}
		t.Errorf("name %q is shared by %v", key, us)
	}
}

func TestThereAndBack(t *testing.T) {
	for _, r := range table {
		for _, x := range []float64{-40, 0, 0.1, 1, 12.5, 640, 1e6} {
			if got := r.Of(r.SI(x)); !(math.Abs(got-x) <= 1e-12*max(1, math.Abs(x), r.Offset)) {
				t.Errorf("%s: %v there and back is %v", r.Symbol, x, got)
			}
		}
	}
}
