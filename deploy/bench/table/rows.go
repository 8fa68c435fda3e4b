package main

import "fmt"

// row is one line of the table.
type row struct {
	what  string
	unit  string // of the figure; "×" for a ratio
	limit float64
	least bool // the limit is the least, not the most
	// measure returns the figure, and what stands beside it.
	measure func(f *figures) (got float64, beside string)
}

func (r *row) kept(got float64) bool {
	if r.least {
		return got >= r.limit
	}
	return got <= r.limit
}

func (r *row) show(v float64) string {
	switch {
	case r.unit == "×" && r.least:
		return fmt.Sprintf("1/%.0f", v)
	case r.unit == "×":
		return fmt.Sprintf("%.2f×", v)
	}
	return fmt.Sprintf("%.3g %s", v, r.unit)
}

func (r *row) bound() string {
	if r.unit == "×" {
		return r.show(r.limit)
	}
	return fmt.Sprintf("%g %s", r.limit, r.unit)
}

var rows = []row{
	message("CPU per message, 4,000 tags at 1 Hz, 1,000 loads", "Message/1000-loads"),
	message("CPU per message, 40 tags at 1 Hz, 10 loads", "Message/10-loads"),
	water("exact", 60),
	water("table", 200),
	{"stored readings, decimals 0.01 apart, in sealed blocks", "B", 0.9, false, func(f *figures) (float64, string) {
		return f.of("Seal/50-tags", "B/sealed"), fmt.Sprintf("%.2f B by the XOR scheme in K, %.2f B in °C; %.1f B under a key each; a week's file with its journal %.2f B",
			f.of("Stored/xor-kelvin", "B/sample"), f.of("Stored/xor-celsius", "B/sample"), f.of("Stored/plain-keys", "B/sample"), f.of("Stored/history", "B/sample"))
	}},
	disk("10s", 200),
	disk("60s", 50),
	{"scrape of 5,000 series and more", "×", 0.5, false, func(f *figures) (float64, string) {
		ours, theirs := f.of("Scrape", "ns/series"), f.of("Scrape", "ns/series-gaugevecs")
		return ours / theirs, fmt.Sprintf("%.0f ns a series; %.0f ns in GaugeVecs", ours, theirs)
	}},
	{"30 days of one load by the hour, from a year", "ms", 20, false, func(f *figures) (float64, string) {
		return f.of("Report/30d-by-hour", "ms-least"), ""
	}},
	memory("resident, 10 loads, 40 tags at 1 Hz", "Message/10-loads", 24),
	memory("resident, 1,000 loads, 4,000 tags at 1 Hz", "Message/1000-loads", 96),
	start("closed", "after a stop"),
	start("killed", "after a kill ten minutes from the checkpoint"),
	{"binary, stripped, arm/v7", "MiB", 20, false, func(f *figures) (float64, string) { return f.of("Binary", "MiB"), "" }},
}

// message adds what sealing takes of a reading, because it comes an hour later.
func message(what, benchmark string) row {
	return row{what, "×", 1.25, false, func(f *figures) (float64, string) {
		ours, bare, seal := f.of(benchmark, "µs/message"), f.of(benchmark, "µs/message-bare"), f.of("Seal/50-tags", "ns/reading")/1e3
		return (ours + seal) / bare, fmt.Sprintf("%.1f µs and %.2f µs to seal; %.1f µs by the bare subscriber", ours, seal, bare)
	}}
}

func water(form string, limit float64) row {
	return row{"liquid water h, v and cp at one state, " + form, "×", limit, true, func(f *figures) (float64, string) {
		naive, ours := f.of("Balance/water/naive", "ns/op"), f.of("Balance/water/"+form, "ns/op")
		return naive / ours, fmt.Sprintf("%.1f ns; %.0f ns by `math.Pow`", ours, naive)
	}}
}

func disk(every string, limit float64) row {
	name := "Commit/" + every
	return row{"written per reading, 50 tags every 10 s, commit every " + every, "B", limit, false, func(f *figures) (float64, string) {
		return f.of(name+"/grouped", "B/reading"), fmt.Sprintf("%.0f B for a key each; %.0f B with minutes, registers and checkpoints of 10 loads",
			f.of(name+"/one-key-each", "B/reading"), f.of(name+"/with-loads", "B/reading"))
	}}
}

func memory(what, benchmark string, limit float64) row {
	return row{what, "MiB", limit, false, func(f *figures) (float64, string) {
		return f.of(benchmark, "MiB"), fmt.Sprintf("%.1f MiB of it anonymous; the libraries idle %.1f MiB, the bare subscriber %.1f MiB",
			f.of(benchmark, "MiB-anonymous"), f.of("Idle", "MiB"), f.of(benchmark, "MiB-bare"))
	}}
}

func start(how, what string) row {
	return row{"start to first scrape, a year of history, " + what, "ms", 250, false, func(f *figures) (float64, string) {
		return f.of("Start/"+how, "ms-least"), fmt.Sprintf("%.0f ms of the processor; %.0f ms on average", f.of("Start/"+how, "ms-cpu"), f.of("Start/"+how, "ns/op")/1e6)
	}}
}
