package agent

import (
	"bytes"
	"errors"
	"io"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/parquet"
	"heatreeve/ingest/quality"
	"heatreeve/store"
)

// directly is the Parquet file of readings without a text between.
func directly(t *testing.T, value string, all []store.Reading) []byte {
	t.Helper()
	var b bytes.Buffer
	w := parquet.NewWriter(&b, []parquet.Column{{Name: "time", Kind: parquet.Instant}, {Name: value, Kind: parquet.Number}, {Name: "stamped", Kind: parquet.Truth}, {Name: "quality", Kind: parquet.Text}, {Name: "reason", Kind: parquet.Text}})
	for _, r := range all {
		w.Instant(r.At)
		w.Number(r.Value)
		w.Truth(r.Stamped)
		mark := quality.Mark(r.Mark)
		w.Text(mark.Quality().String())
		if mark == quality.None {
			w.Null()
		} else {
			w.Text(mark.String())
		}
		if err := w.End(); err != nil {
			t.Fatal(err)
		}
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// A Parquet file of what an agent gives has every reading with the same bits that went in, in
// several row groups.
func TestParquetOfReadings(t *testing.T) {
	dir := t.TempDir()
	db, all := noted(t, filepath.Join(dir, HistoryFile), 200_000)
	h := historyIn(t, db, "UTC")
	h.units = map[string]string{"TT-1": "K"}
	s := newExports(newReports(h))
	server, at := own(s)
	defer server.Close()
	if err := leaveAddress(dir, at); err != nil {
		t.Fatal(err)
	}
	var b bytes.Buffer
	var last Progress
	if err := Extract(t.Context(), dir, Selection{Tag: "TT-1", Format: "parquet"}, &b, func(p Progress) { last = p }); err != nil || last.Rows != int64(len(all)) {
		t.Fatalf("%d rows, %v", last.Rows, err)
	}
	if !bytes.Equal(b.Bytes(), directly(t, "value_K", all)) {
		t.Error("the file is not that of the readings")
	}
	csv, err := exported(h, Selection{Tag: "TT-1"})
	if err != nil || b.Len() > len(csv)/4 {
		t.Errorf("%d bytes of Parquet, %d of csv, %v", b.Len(), len(csv), err)
	}
}

// What there is none of in a minute is null, and every other figure the same.
func TestParquetOfMinutes(t *testing.T) {
	var got, want bytes.Buffer
	f := newParquetFile(&got)
	names := minuteColumns()
	var columns []parquet.Column
	for i, name := range names {
		kind := parquet.Number
		if i == 0 {
			kind = parquet.Instant
		}
		columns = append(columns, parquet.Column{Name: name, Kind: kind})
	}
	w := parquet.NewWriter(&want, columns)
	r := newRows(f, false, names)
	minutes := []store.Minute{
		{Start: week.UnixNano(), Measured: 60, Given: 7e5, Duty: 11666.5, Inlet: 353.25, Random: 3, Witness: 1, Systematic: [store.Shares]float64{-5}, Expected: 11700, ExpectedError: 23.5},
		{Start: week.Add(time.Minute).UnixNano(), Missing: 60},
	}
	for i, figures := range []map[string]float64{
		{"measured_s": 60, "given_J": 7e5, "duty_W": 11666.5, "inlet_K": 353.25, "random_variance_J2": 3, "witness_counted_J": 1, "systematic_flow_J": -5, "expected_duty_W": 11700, "expected_duty_uncertainty_W": 23.5},
		{"missing_s": 60},
	} {
		minuteRow(r, &minutes[i])
		if err := r.end(); err != nil {
			t.Fatal(err)
		}
		w.Instant(minutes[i].Start)
		for _, name := range names[1:] {
			means := slices.Contains([]string{"duty_W", "lowest_duty_W", "highest_duty_W", "duty_uncertainty_W", "mass_flow_kg_per_s"}, name)
			some := slices.Contains([]string{"inlet_K", "outlet_K", "pressure_Pa", "content_K", "expected_duty_W", "expected_duty_uncertainty_W"}, name)
			if figures[name] == 0 && (means && minutes[i].Measured == 0 || some) {
				w.Null()
			} else {
				w.Number(figures[name])
			}
		}
		if err := w.End(); err != nil {
			t.Fatal(err)
		}
	}
	if err := errors.Join(r.flush(), f.close(), w.Close()); err != nil || !bytes.Equal(got.Bytes(), want.Bytes()) {
		t.Errorf("%d bytes, %v; want %d others", got.Len(), err, want.Len())
	}
}

// An export that breaks off has no end, however its lines are cut, and what is no export is
// none.
func TestParquetIsWholeOrNone(t *testing.T) {
	db, all := noted(t, filepath.Join(t.TempDir(), HistoryFile), 2000)
	h := historyIn(t, db, "UTC")
	if _, err := exported(h, Selection{Tag: "TT-1", Format: "parquet"}); err == nil || !strings.Contains(err.Error(), "the agent's page gives csv and json") {
		t.Errorf("parquet by the page: %v", err)
	}
	text, err := exported(h, Selection{Tag: "TT-1"})
	if err != nil {
		t.Fatal(err)
	}
	var b bytes.Buffer
	f := newParquetFile(&b)
	for piece := range slices.Chunk([]byte(text), 7) {
		if _, err := f.Write(piece); err != nil {
			t.Fatal(err)
		}
	}
	if bytes.HasSuffix(b.Bytes(), []byte("PAR1")) && b.Len() > 4 {
		t.Error("a file that is not closed has its end")
	}
	if err := f.close(); err != nil || !bytes.Equal(b.Bytes(), directly(t, "value_SI", all)) {
		t.Errorf("%d bytes, %v", b.Len(), err)
	}
	for _, wrong := range []string{"time,x\n2026,1\n", "time,x\n2026-10-24T00:00:00Z,a\n", "time,x\n2026-10-24T00:00:00Z\n", "time,x\n2026-10-24T00:00:00Z,1,2\n", "time,stamped\n2026-10-24T00:00:00Z,\n"} {
		if _, err := newParquetFile(io.Discard).Write([]byte(wrong)); err == nil {
			t.Errorf("%q is taken for an export", wrong)
		}
	}
	if _, err := newParquetFile(fullDisk{}).Write([]byte("time,x\n2026-10-24T00:00:00Z,1\n")); !errors.Is(err, errFull) {
		t.Errorf("a full disk: %v", err)
	}
}

// One that is cancelled is not closed, and one of a history with damage is.
func TestParquetOfAnExportThatFails(t *testing.T) {
	for _, ended := range []bool{false, true} {
		var b bytes.Buffer
		m := &meter{w: &b, tell: func(Progress) {}}
		failed := errors.New("failed")
		err := m.exportAs(Selection{Tag: "TT-1", Format: "parquet"}, func(s Selection) error {
			if s.Format != "csv" {
				t.Errorf("asks for %q", s.Format)
			}
			io.WriteString(m, "time,value_K,stamped\r\n2026-10-24T00:00:00.000000000Z,1,true\r\n")
			m.ended = ended
			return failed
		})
		if whole := bytes.HasSuffix(b.Bytes(), []byte("PAR1")) && b.Len() > 8; !errors.Is(err, failed) || whole != ended {
			t.Errorf("all rows came: %v; whole: %v, %v", ended, whole, err)
		}
	}
}
