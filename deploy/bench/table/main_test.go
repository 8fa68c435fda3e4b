package main

import (
	"strings"
	"testing"
)

// The least of several runs counts, whatever the number of processors behind the name.
func TestLeastOfSeveral(t *testing.T) {
	f, machine, err := read(strings.NewReader("machine: 2 cores\nBenchmarkStart/killed-2 5 88 ns/op 40.5 ms-least\nBenchmarkStart/killed-16 \t 5 77 ns/op\t41 ms-least\nPASS\n"))
	if err != nil {
		t.Fatal(err)
	}
	if ns, ms := f.of("Start/killed", "ns/op"), f.of("Start/killed", "ms-least"); ns != 77 || ms != 40.5 || len(machine) != 1 {
		t.Errorf("%g ns/op, %g ms, machine %q; want 77, 40.5, and one line", ns, ms, machine)
	}
}

// A name of the benchmark's own that ends in a number is not cut: Go puts the processors after it.
func TestNameKeepsItsOwnNumber(t *testing.T) {
	f, _, err := read(strings.NewReader("BenchmarkMessage/a-7-2 1 3 ns/op\n"))
	if err != nil || f.least["Message/a-7 ns/op"] != 3 {
		t.Errorf("%v, %v", f.least, err)
	}
}

func TestBounds(t *testing.T) {
	most, least := row{unit: "ms", limit: 20}, row{unit: "×", limit: 60, least: true}
	if !most.kept(20) || most.kept(20.1) || !least.kept(60) || least.kept(59) {
		t.Error("a bound is not kept as it should be")
	}
	if got := most.show(3.14159) + ", " + least.bound(); got != "3.14 ms, 1/60" {
		t.Errorf("shown as %q", got)
	}
}

func TestLackingFiguresAreTold(t *testing.T) {
	var out strings.Builder
	err := run(strings.NewReader("BenchmarkBinary-2 1 5 ns/op 9.5 MiB\n"), &out)
	if err == nil || !strings.Contains(err.Error(), "Seal/50-tags B/sealed") || strings.Contains(err.Error(), "Binary") {
		t.Errorf("error %v; want what was not measured, and only that", err)
	}
	if !strings.Contains(out.String(), "| binary, stripped, arm/v7 | 9.5 MiB | 20 MiB |") {
		t.Errorf("no row for what was measured:\n%s", &out)
	}
}
