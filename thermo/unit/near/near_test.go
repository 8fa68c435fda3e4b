package near_test

import (
	"fmt"
	"slices"
	"strings"
	"testing"

	"heatreeve/thermo/unit/near"
)

// Distances counted by hand; "ca" to "abc" is 3 by optimal string alignment,
// where the unrestricted measure of Damerau would find 2.
func TestDistance(t *testing.T) {
	for _, tt := range []struct {
		a, b string
		want int
	}{
		{"", "", 0}, {"", "abc", 3}, {"bar", "bar", 0}, {"bar", "barg", 1}, {"inlet", "inlte", 1},
		{"kitten", "sitting", 3}, {"°C", "C", 1}, {"ca", "abc", 3},
	} {
		for _, got := range []int{near.Distance(tt.a, tt.b), near.Distance(tt.b, tt.a)} {
			if got != tt.want {
				t.Errorf("Distance(%q, %q) = %d, want %d", tt.a, tt.b, got, tt.want)
			}
		}
	}
}

func TestNames(t *testing.T) {
	known := []string{"TT-201", "TT-202", "FT-201", "mw", "MW", "outlet_pressure"}
	for _, tt := range []struct {
		name string
		want []string
	}{
		{"TT-20", []string{"TT-201", "TT-202"}},
		{"tt-201", []string{"TT-201"}},
		{"Mw", []string{"mw", "MW"}},
		{"outlet-pressure", []string{"outlet_pressure"}},
		{"nothing like it", nil},
		{strings.Repeat("x", 10000), nil},
	} {
		if got := near.Names(tt.name, known); !slices.Equal(got, tt.want) {
			t.Errorf("Names(%q) = %q, want %q", tt.name, got, tt.want)
		}
	}
}

func ExampleNames() {
	fmt.Printf("%q\n", near.Names("inelt", []string{"flow", "inlet", "outlet", "pressure"}))
	// Output: ["inlet"]
}
