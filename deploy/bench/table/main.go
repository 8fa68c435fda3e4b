// Command table reads the output of the benchmarks on standard input and writes the table of
// what Heatreeve costs, in Markdown, with each bound and whether it is kept. A figure that was
// measured several times is the least of them. Lines that begin with "machine: " come first.
//
// It fails when a row lacks its figures, not when a bound is not kept.
package main

import (
	"bufio"
	"fmt"
	"io"
	"os"
	"strconv"
	"strings"
)

func main() {
	if err := run(os.Stdin, os.Stdout); err != nil {
		fmt.Fprintln(os.Stderr, "error:", err)
		os.Exit(1)
	}
}

func run(in io.Reader, out io.Writer) error {
	f, machine, err := read(in)
	if err != nil {
		return err
	}
	for _, line := range machine {
		fmt.Fprintf(out, "%s\n", line)
	}
	fmt.Fprint(out, "\n| | measured | bound | beside |\n|---|---|---|---|\n")
	for _, r := range rows {
		got, beside := r.measure(f)
		mark := ""
		if !r.kept(got) {
			mark = " **missed**"
		}
		fmt.Fprintf(out, "| %s | %s%s | %s | %s |\n", r.what, r.show(got), mark, r.bound(), beside)
	}
	if len(f.lacking) > 0 {
		return fmt.Errorf("not measured: %s", strings.Join(f.lacking, ", "))
	}
	return nil
}

// figures are the least of what was measured, by benchmark and unit.
type figures struct {
	least   map[string]float64
	lacking []string
}

// of returns a figure, such as of("Seal/50-tags", "B/sealed").
func (f *figures) of(benchmark, unit string) float64 {
	key := benchmark + " " + unit
	v, ok := f.least[key]
	if !ok {
		f.lacking = append(f.lacking, key)
	}
	return v
}

// read understands lines such as "BenchmarkSeal/50-tags-2  3  12 ns/op  0.7 B/sealed".
func read(in io.Reader) (*figures, []string, error) {
	f := &figures{least: make(map[string]float64)}
	var machine []string
	lines := bufio.NewScanner(in)
	for lines.Scan() {
		if about, ok := strings.CutPrefix(lines.Text(), "machine: "); ok {
			machine = append(machine, about)
		}
		fields := strings.Fields(lines.Text())
		if len(fields) < 4 || !strings.HasPrefix(fields[0], "Benchmark") {
			continue
		}
		name := strings.TrimPrefix(fields[0], "Benchmark")
		if i := strings.LastIndexByte(name, '-'); i >= 0 && isNumber(name[i+1:]) {
			name = name[:i] // how many processors Go used
		}
		for k := 2; k+1 < len(fields); k += 2 {
			v, err := strconv.ParseFloat(fields[k], 64)
			if err != nil {
				return nil, nil, fmt.Errorf("line %q: %w", lines.Text(), err)
			}
			key := name + " " + fields[k+1]
			if old, ok := f.least[key]; !ok || v < old {
				f.least[key] = v
			}
		}
	}
	return f, machine, lines.Err()
}

func isNumber(s string) bool {
	_, err := strconv.Atoi(s)
	return err == nil
}
