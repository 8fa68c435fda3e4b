package agent

import (
	"bytes"
	"encoding/json"
	"errors"
	"math"
	"path/filepath"
	"strings"
	"testing"

	"heatreeve/agent/loads"
	"heatreeve/store"
)

// Every figure of an hour has its column, and one that there is none of is empty.
func TestHourRow(t *testing.T) {
	h := store.Hour{
		Start: week.UnixNano(), Minutes: 55, Measured: 3000, Bridged: 200, Missing: 100, Given: 1, Taken: 2, BridgedGiven: 3, BridgedTaken: 4, Latent: 6, Uncertain: 5,
		Duty: 7, DutyMin: -8, DutyMax: 9, Demand: 14, Mass: 15, Content: 338.15, Random: 16, Witness: 12, Compared: 13, Untold: 12,
		Expected: 18, ExpectedError: 0.5,
	}
	h.Systematic[loads.PartInlet], h.Systematic[loads.PartCp] = 3, -4
	var b bytes.Buffer
	columns := hourColumns()
	r := newRows(&b, true, columns)
	if hourRow(r, &h); r.column != len(columns) {
		t.Errorf("%d fields in %d columns", r.column, len(columns))
	}
	if err := errors.Join(r.end(), r.flush()); err != nil {
		t.Fatal(err)
	}
	var got map[string]any
	if err := json.Unmarshal(b.Bytes(), &got); err != nil {
		t.Fatal(err)
	}
	// What lasts of the parts, 5, adds to the 12 that have none; the random 4 is apart.
	wantU := math.Hypot(math.Hypot(3, 4)+12, 4)
	for name, want := range map[string]any{
		"start": "2026-10-23T23:00:00Z", "minutes": 55., "measured_s": 3000., "bridged_s": 200., "missing_s": 100., "given_J": 1., "taken_J": 2., "bridged_given_J": 3., "bridged_taken_J": 4.,
		"latent_s": 6., "uncertain_s": 5., "uncertainty_J": wantU, "duty_W": 7., "lowest_duty_W": -8., "highest_duty_W": 9., "demand_W": 14., "mass_kg": 15., "inlet_K": nil, "pressure_Pa": nil,
		"content_K": 338.15, "random_variance_J2": 16., "unparted_uncertainty_J": 12., "witness_counted_J": 12., "witness_served_J": 13.,
		"expected_duty_W": 18., "expected_duty_uncertainty_W": 0.5, "systematic_inlet_J": 3., "systematic_heat_capacity_J": -4.,
	} {
		if got[name] != want {
			t.Errorf("%s is %v, want %v", name, got[name], want)
		}
	}
	if len(got) != len(columns) {
		t.Errorf("%d names of %d columns", len(got), len(columns))
	}
}

// An hour without anything measured has no means.
func TestHourRowOfNothing(t *testing.T) {
	var b bytes.Buffer
	r := newRows(&b, false, hourColumns())
	hourRow(r, &store.Hour{Start: week.UnixNano(), Minutes: 1, Missing: 60})
	if err := errors.Join(r.end(), r.flush()); err != nil {
		t.Fatal(err)
	}
	_, row, _ := strings.Cut(b.String(), "\r\n")
	if want := "2026-10-23T23:00:00Z,1,0,60,0,0,0,,,,,0,,,,,0,0,0,"; !strings.HasPrefix(row, want) {
		t.Errorf("row %q, want %q", row, want)
	}
}

// Hours come where their minutes are given up, in every format.
func TestExportOfHours(t *testing.T) {
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{}, 600, ramp, "ramp")
	h := historyIn(t, db, "UTC")
	text, err := exported(h, Selection{Load: "ramp", By: "hour"})
	if err != nil || strings.Count(text, "\n") != 11 || !strings.HasPrefix(text, "start,minutes,") {
		t.Fatalf("%v\n%s\nwant a header and ten hours", err, text)
	}
	one, err := exported(h, Selection{Load: "ramp", By: "hour", From: "2026-10-24T02:00", To: "2026-10-24T03:00", Format: "json"})
	if err != nil || strings.Count(one, "\n") != 1 || !strings.HasPrefix(one, `{"start":"2026-10-24T02:00:00Z","minutes":60,"measured_s":3480,"missing_s":120,`) {
		t.Errorf("%v\n%s\nwant the hour from 2:00, with 60 minutes of 58 s", err, one)
	}
	var file bytes.Buffer
	f := newParquetFile(&file)
	if _, err := f.Write([]byte(text)); err != nil {
		t.Fatal(err)
	}
	if err := f.close(); err != nil || !bytes.HasSuffix(file.Bytes(), []byte("PAR1")) || len(f.columns) != len(hourColumns()) {
		t.Errorf("parquet of %d columns and %d bytes, %v", len(f.columns), file.Len(), err)
	}
	if _, err := exported(h, Selection{Load: "ramp", By: "hour", From: "2026-11-24"}); err == nil || !strings.Contains(err.Error(), `no hour of load "ramp"`) {
		t.Errorf("none: %v", err)
	}
}
