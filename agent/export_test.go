package agent

import (
	"bytes"
	"context"
	"encoding/csv"
	"encoding/json"
	"errors"
	"fmt"
	"iter"
	"log/slog"
	"math"
	"net/http"
	"net/http/httptest"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/loads"
	"heatreeve/ingest/quality"
	"heatreeve/store"
)

// noted writes readings of two tags, n of each: one a second, some late, some by arrival.
func noted(t testing.TB, path string, n int) (*store.Store, []store.Reading) {
	t.Helper()
	db, err := store.Open(path, store.Options{})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { db.Close() })
	ids, err := db.IDs("tag", []string{"TT-1", "FT-1"})
	if err != nil {
		t.Fatal(err)
	}
	var all []store.Reading
	var b store.Batch
	for k := range n {
		at := week.UnixNano() + int64(k)*int64(time.Second) + int64(k%3)*123_456_789
		if k%10 == 9 {
			at -= int64(5 * time.Second)
		}
		r := store.Reading{Tag: ids[0], At: at, Value: 273.15 + math.Round(1000*math.Sin(float64(k)))/10, Stamped: k%4 != 0}
		if k%50 < 10 {
			r.Mark = []uint8{uint8(quality.Maintenance), uint8(quality.OffSpec), uint8(quality.Failed)}[k/50%3]
		}
		all = append(all, r)
		b.Beats = append(b.Beats, store.Beat{Through: week.UnixNano() + int64(k)*int64(time.Second), Readings: []store.Reading{r, {Tag: ids[1], At: at, Value: 1e-7 * float64(k)}}})
		if len(b.Beats) == 600 || k == n-1 {
			b.Checkpoint = []byte{}
			if err := db.Commit(b); err != nil {
				t.Fatal(err)
			}
			b.Beats = nil
		}
	}
	return db, all
}

func exported(h history, s Selection) (string, error) {
	x, err := h.export(s)
	if err != nil {
		return "", err
	}
	var b bytes.Buffer
	err = errors.Join(x.write(context.Background(), &b), x.whole())
	return b.String(), err
}

// Every reading comes out of either form with the same bits that went in.
func TestExportOfReadings(t *testing.T) {
	db, all := noted(t, filepath.Join(t.TempDir(), HistoryFile), 5000)
	h := historyIn(t, db, "Europe/Dublin")
	h.units = map[string]string{"TT-1": "K"}
	from, to := week.Add(10*time.Minute), week.Add(70*time.Minute)
	for _, s := range []Selection{{Tag: "TT-1"}, {Tag: "TT-1", From: "2026-10-24T00:10", To: "2026-10-24T01:10"}, {Tag: "TT-1", From: "2026-10-23T23:10Z", To: "2026-10-24T04:40", Zone: "Asia/Kolkata"}} {
		want := all
		if s.From != "" {
			end := to
			if s.Zone != "" {
				end = week.Add(10 * time.Minute) // nothing left
			}
			want = slices.DeleteFunc(slices.Clone(all), func(r store.Reading) bool { return r.At < from.UnixNano() || r.At >= end.UnixNano() })
		}
		text, err := exported(h, s)
		if len(want) == 0 {
			var wrong *answer.QueryError
			if !errors.As(err, &wrong) || !strings.Contains(err.Error(), "is not after from") {
				t.Errorf("%+v: %v", s, err)
			}
			continue
		}
		if err != nil {
			t.Fatalf("%+v: %v", s, err)
		}
		if got := fromCSV(t, text, all[0].Tag); !slices.Equal(got, want) {
			t.Errorf("%+v: %d readings by csv, not the %d that there are", s, len(got), len(want))
		}
		s.Format = "json"
		if text, err = exported(h, s); err != nil {
			t.Fatal(err)
		}
		if got := fromJSON(t, text, all[0].Tag); !slices.Equal(got, want) {
			t.Errorf("%+v: %d readings by json, not the %d that there are", s, len(got), len(want))
		}
	}
}

func fromCSV(t *testing.T, text string, tag uint32) (all []store.Reading) {
	t.Helper()
	if strings.Count(text, "\r\n") != strings.Count(text, "\n") {
		t.Error("not all lines end as RFC 4180 says")
	}
	records, err := csv.NewReader(strings.NewReader(text)).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if !slices.Equal(records[0], []string{"time", "value_K", "stamped", "quality", "reason"}) {
		t.Errorf("header %q", records[0])
	}
	for _, f := range records[1:] {
		at, err := time.Parse("2006-01-02T15:04:05.000000000Z", f[0])
		x, err2 := strconv.ParseFloat(f[1], 64)
		stamped, err3 := strconv.ParseBool(f[2])
		if err := errors.Join(err, err2, err3); err != nil {
			t.Fatal(err)
		}
		all = append(all, store.Reading{Tag: tag, At: at.UnixNano(), Value: x, Stamped: stamped, Mark: markOf(t, f[3], f[4])})
	}
	return all
}

// markOf is the mark that an export tells by its quality and its reason.
func markOf(t *testing.T, grade, reason string) uint8 {
	t.Helper()
	for n := range 256 {
		m := quality.Mark(n)
		if m.Quality().String() == grade && (m == quality.None && reason == "" || m != quality.None && m.String() == reason) {
			return uint8(n)
		}
	}
	t.Fatalf("no mark is %q for %q", grade, reason)
	return 0
}

func fromJSON(t *testing.T, text string, tag uint32) (all []store.Reading) {
	t.Helper()
	for line := range strings.Lines(text) {
		var v struct {
			Time    time.Time `json:"time"`
			Value   *float64  `json:"value_K"`
			Stamped *bool     `json:"stamped"`
			Quality string    `json:"quality"`
			Reason  *string   `json:"reason"`
		}
		if err := json.Unmarshal([]byte(line), &v); err != nil || v.Value == nil || v.Stamped == nil {
			t.Fatalf("%s: %v", line, err)
		}
		reason := ""
		if v.Reason != nil {
			reason = *v.Reason
		}
		all = append(all, store.Reading{Tag: tag, At: v.Time.UnixNano(), Value: *v.Value, Stamped: *v.Stamped, Mark: markOf(t, v.Quality, reason)})
	}
	return all
}

// Minutes have means where something was measured, and sums always.
func TestExportOfMinutes(t *testing.T) {
	db := keep(t, filepath.Join(t.TempDir(), HistoryFile), store.Options{}, 3000, func(load string, k int) (store.Minute, bool) {
		m, _ := ramp(load, k)
		m.Flow, m.Inlet, m.Outlet, m.Pressure = 2.5, 353.15, 333.15, 3e5
		if k == 61 {
			m = store.Minute{Missing: 60, Expected: 6100, ExpectedError: 0.1}
		}
		if k == 60 {
			m.Uncertain = 17.5
		}
		return m, k != 62
	}, "other", "ramp")
	h := historyIn(t, db, "UTC")
	parts := strings.Repeat(",0", int(loads.Parts))
	text, err := exported(h, Selection{Load: "ramp", From: "2026-10-24T00:00", To: "2026-10-24T00:04"})
	want := strings.Join(minuteColumns(), ",") + "\r\n" +
		"2026-10-24T00:00:00Z,58,2,348000,0,6000,5995,6005,60,2.5,353.15,333.15,300000,,0,0,0,0,17.5,0,0,0" + parts + ",,\r\n" +
		"2026-10-24T00:01:00Z,0,60,0,0,,,,,,,,,,0,0,0,0,0,0,0,0" + parts + ",6100,0.1\r\n" +
		"2026-10-24T00:03:00Z,58,2,365400,0,6300,6295,6305,63,2.5,353.15,333.15,300000,,0,0,0,0,0,0,0,0" + parts + ",,\r\n"
	if err != nil || text != want {
		t.Errorf("%v\n%s\nwant\n%s", err, text, want)
	}
	text, err = exported(h, Selection{Load: "ramp", From: "2026-10-24T00:01", To: "2026-10-24T00:02", Format: "json"})
	want = `{"start":"2026-10-24T00:01:00Z","measured_s":0,"missing_s":60,"given_J":0,"taken_J":0,"duty_W":null,"lowest_duty_W":null,"highest_duty_W":null,"duty_uncertainty_W":null,"mass_flow_kg_per_s":null,"inlet_K":null,"outlet_K":null,"pressure_Pa":null,"content_K":null,"bridged_s":0,`
	if err != nil || !strings.HasPrefix(text, want) || !strings.HasSuffix(text, `,"`+minuteColumns()[len(minuteColumns())-1]+`":0.1}`+"\n") {
		t.Errorf("%v\n%s\nwant\n%s", err, text, want)
	}
	if text, err = exported(h, Selection{Load: "ramp"}); err != nil || strings.Count(text, "\n") != 3000 {
		t.Errorf("all: %d lines, %v; want a header and 2999", strings.Count(text, "\n"), err)
	}
}

// Every figure of a minute has its column, and one that there is none of is empty.
func TestMinuteRow(t *testing.T) {
	m := store.Minute{
		Start: week.UnixNano(), Measured: 40, Bridged: 15, Missing: 5, Given: 1, Taken: 2, BridgedGiven: 3, BridgedTaken: 4, Latent: 6, Uncertain: 33,
		Duty: 7, DutyMin: -8, DutyMax: 9, DutyUncertainty: 10, Content: 338.15, Random: 11, Witness: 12, Compared: 13,
		Expected: 0, ExpectedError: 17,
	}
	for p := range loads.Parts {
		m.Systematic[p] = -100 - float64(p)
	}
	var b bytes.Buffer
	columns := minuteColumns()
	r := newRows(&b, true, columns)
	if minuteRow(r, &m); r.column != len(columns) {
		t.Errorf("%d fields in %d columns", r.column, len(columns))
	}
	if err := errors.Join(r.end(), r.flush()); err != nil {
		t.Fatal(err)
	}
	var got map[string]any
	if err := json.Unmarshal(b.Bytes(), &got); err != nil {
		t.Fatal(err)
	}
	for name, want := range map[string]any{
		"start": "2026-10-23T23:00:00Z", "measured_s": 40., "bridged_s": 15., "missing_s": 5., "given_J": 1., "taken_J": 2., "bridged_given_J": 3., "bridged_taken_J": 4.,
		"latent_s": 6., "uncertain_s": 33., "duty_W": 7., "lowest_duty_W": -8., "highest_duty_W": 9., "duty_uncertainty_W": 10., "mass_flow_kg_per_s": 0., "inlet_K": nil, "pressure_Pa": nil,
		"content_K": 338.15, "random_variance_J2": 11., "witness_counted_J": 12., "witness_served_J": 13., "expected_duty_W": 0., "expected_duty_uncertainty_W": 17.,
		"systematic_flow_J": -100., "systematic_heat_capacity_J": -100 - float64(loads.PartCp), "systematic_density_J": -100 - float64(loads.PartDensity),
	} {
		if got[name] != want {
			t.Errorf("%s is %v, want %v", name, got[name], want)
		}
	}
	if len(got) != len(columns) {
		t.Errorf("%d names of %d columns", len(got), len(columns))
	}
}

// A number is written so that it is read as the same, and what is none has no number.
func TestRowNumbers(t *testing.T) {
	for x, want := range map[float64]string{0: "0", -0.5: "-0.5", 353.15: "353.15", 1e-6: "0.000001", 1.5e-7: "1.5e-07", 123456789: "123456789", 1e21: "1e+21", math.Inf(1): "", math.NaN(): ""} {
		var b bytes.Buffer
		r := newRows(&b, false, []string{"x"})
		r.number(x)
		if err := errors.Join(r.end(), r.flush()); err != nil || b.String() != "x\r\n"+want+"\r\n" {
			t.Errorf("%v is %q, %v; want %q", x, &b, err, want)
		}
	}
}

func TestValueColumn(t *testing.T) {
	for unit, want := range map[string]string{"K": "value_K", "Pa": "value_Pa", "kg/s": "value_kg_per_s", "m3/s": "value_m3_per_s", "mol/s": "value_mol_per_s", "1": "value_ratio", "": "value_SI", changedUnit: "value_SI"} {
		if got := valueColumn(unit); got != want {
			t.Errorf("%q: %q, want %q", unit, got, want)
		}
	}
}

// What is wrong is told by the page and to the one who extracts alike, before anything is
// written.
func TestExportRefusals(t *testing.T) {
	dir := t.TempDir()
	db, _ := noted(t, filepath.Join(dir, HistoryFile), 100)
	s := newExports(newReports(historyIn(t, db, "Europe/Dublin")))
	server, at := own(s)
	defer server.Close()
	if err := leaveAddress(dir, at); err != nil {
		t.Fatal(err)
	}
	for _, tt := range []struct {
		Selection
		status int
		says   string
	}{
		{Selection{}, 400, "tag or load must be given"},
		{Selection{Tag: "TT-1", Load: "x"}, 400, `tag "TT-1" and load "x": an export is of one of them`},
		{Selection{Tag: "TT-1", Format: "xml"}, 400, `format "xml": allowed are csv, json, parquet`},
		{Selection{Tag: "tt-1"}, 400, `tag "tt-1" is not in the history; did you mean "TT-1"?`},
		{Selection{Tag: "pressure"}, 400, `tag "pressure" is not in the history; there are: TT-1, FT-1`},
		{Selection{Load: "boiler"}, 400, `load "boiler" is not in the history`},
		{Selection{Tag: "TT-1", From: "soon"}, 400, `from "soon" is no date`},
		{Selection{Tag: "TT-1", To: "2026-10-25T01:30"}, 400, `to "2026-10-25T01:30" comes twice`},
		{Selection{Tag: "TT-1", Zone: "Dublin"}, 400, `zone "Dublin" is not known`},
		{Selection{Tag: "TT-1", From: "2026-11-01", To: "2026-12-01"}, 404, `the history holds no record: no reading of tag "TT-1" from 2026-11-01 00:00 +00:00 to 2026-12-01 00:00 +00:00; it goes up to 2026-10-24 00:01 +01:00`},
	} {
		w := httptest.NewRecorder()
		s.ServeHTTP(w, httptest.NewRequest("GET", exportPath+"?"+tt.values().Encode(), nil))
		if w.Code != tt.status || !strings.Contains(said(w), tt.says) {
			t.Errorf("%+v: status %d, %s; want %d, ...%q...", tt.Selection, w.Code, w.Body, tt.status, tt.says)
		}
		var b bytes.Buffer
		err := Extract(t.Context(), dir, tt.Selection, &b, func(Progress) { t.Errorf("%+v: progress", tt.Selection) })
		var wrong *answer.QueryError
		if err == nil || !strings.Contains(err.Error(), tt.says) || errors.As(err, &wrong) != (tt.status == 400) || b.Len() > 0 {
			t.Errorf("%+v: %v, %d bytes", tt.Selection, err, b.Len())
		}
	}
	for query, want := range map[string]string{"tag=TT-1&colour=red": "colour is no parameter", "tag=TT-1&tag=FT-1": "tag is given 2 times"} {
		w := httptest.NewRecorder()
		s.ServeHTTP(w, httptest.NewRequest("GET", exportPath+"?"+query, nil))
		if w.Code != 400 || !strings.Contains(said(w), want) {
			t.Errorf("%s: status %d, %s", query, w.Code, w.Body)
		}
	}
}

// Many known names are not all told.
func TestUnknownAmongMany(t *testing.T) {
	var known []string
	for i := range 4000 {
		known = append(known, fmt.Sprintf("XX-%05d", i))
	}
	if err := unknown("tag", "pressure", known); !strings.HasSuffix(err.Error(), "XX-00018, XX-00019 and 3980 more") {
		t.Error(err)
	}
}

// Damaged parts are passed over, counted and told; any other error ends it.
func TestExportOfDamage(t *testing.T) {
	torn := fmt.Errorf("%w: here", store.ErrDamaged)
	all := func(errs ...error) iter.Seq2[store.Reading, error] {
		return func(yield func(store.Reading, error) bool) {
			for i, err := range errs {
				if !yield(store.Reading{At: int64(i)}, err) {
					return
				}
			}
		}
	}
	var b bytes.Buffer
	x := &export{}
	r := newRows(&b, false, []string{"time", "value_K", "stamped", "quality", "reason"})
	if err := each(t.Context(), x, r, all(nil, torn, nil, torn), readingRow); err != nil || r.count != 2 {
		t.Errorf("%d rows, %v", r.count, err)
	}
	if err := x.whole(); !errors.Is(err, store.ErrDamaged) || !strings.HasPrefix(err.Error(), "2 parts of the history cannot be read") {
		t.Error(err)
	}
	if err := each(t.Context(), x, r, all(nil, http.ErrServerClosed, nil), readingRow); err != http.ErrServerClosed || r.count != 3 {
		t.Errorf("%d rows, %v", r.count, err)
	}
}

// The units of a history stay known after their tags have left the site.
func TestUnitsOutliveTheirTags(t *testing.T) {
	books := func(db *store.Store, tags ...string) *ledger {
		t.Helper()
		s := parsed(t, benchSite)
		for _, name := range tags {
			extra := s.Tags[0]
			extra.Name = name
			s.Tags = append(s.Tags, extra)
		}
		l, err := openLedger(s, db, Options{Log: slog.New(slog.DiscardHandler)}, week)
		if err != nil {
			t.Fatal(err)
		}
		return l
	}
	db, err := store.Open(filepath.Join(t.TempDir(), HistoryFile), store.Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer db.Close()
	books(db, "TT-gone")
	if unit := books(db).accounts.units["TT-gone"]; unit != "K" {
		t.Errorf("the unit of a former tag is %q, want K", unit)
	}
	if err := db.Commit(store.Batch{Beats: []store.Beat{{Through: week.UnixNano()}}}); err != nil {
		t.Fatal(err)
	}
	h, err := historyOf(db)
	if err != nil || h.units["TT-gone"] != "K" || len(h.units) != len(parsed(t, benchSite).Tags)+1 {
		t.Errorf("the file knows %v, %v", h.units, err)
	}
}

// Readings from before a tag measured something else are not told in its new unit, by the
// file as by the agent, and nor are they after it has gone back.
func TestUnitThatHasChanged(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, HistoryFile)
	volume := strings.Replace(strings.Replace(benchSite, "outlet: TO,", "outlet: TO, meter_at: inlet,", 1), "unit: kg/s,", "unit: m3/h,", 1)
	extract := func(tag string) (string, string) {
		t.Helper()
		var b bytes.Buffer
		var last Progress
		if err := Extract(t.Context(), dir, Selection{Tag: tag}, &b, func(p Progress) { last = p }); err != nil {
			t.Fatal(err)
		}
		columns, _, _ := strings.Cut(b.String(), "\r\n")
		return columns, last.Note
	}
	for i, text := range []string{benchSite, volume, benchSite} {
		l, shut := open(t, parsed(t, text), path, store.Options{})
		feed(l, int64(i)*100, int64(i+1)*100)
		if err := l.commit(clock, true); err != nil {
			t.Fatal(err)
		}
		s := newExports(newReports(history{db: l.store, zone: time.UTC, through: l.through.Load, units: l.accounts.units}))
		server, at := own(s)
		if err := leaveAddress(dir, at); err != nil {
			t.Fatal(err)
		}
		asked, askedNote := extract("FT")
		server.Close()
		shut()
		read, readNote := extract("FT")
		want := map[bool]string{true: "time,value_kg_per_s,stamped,quality,reason", false: "time,value_SI,stamped,quality,reason"}[i == 0]
		if asked != want || read != want || (readNote != "") != (i > 0) || askedNote != readNote {
			t.Errorf("site %d: the agent says %s %q, the file %s %q; want %s", i, asked, askedNote, read, readNote, want)
		}
		if steady, note := extract("TI"); steady != "time,value_K,stamped,quality,reason" || note != "" {
			t.Errorf("another tag: %s %q", steady, note)
		}
	}
}

// The head of an export needs no turn, since no row is read for it.
func TestHeadOfAnExport(t *testing.T) {
	db, _ := noted(t, filepath.Join(t.TempDir(), "history.db"), 20)
	s := newExports(newReports(historyIn(t, db, "Europe/Dublin")))
	if !s.turn.taken(t.Context(), httptest.NewRecorder()) {
		t.Fatal("there is no turn")
	}
	defer s.turn.free()
	for method, want := range map[string]int{http.MethodHead: http.StatusOK, http.MethodGet: http.StatusServiceUnavailable} {
		w := httptest.NewRecorder()
		s.ServeHTTP(w, httptest.NewRequest(method, exportPath+"?tag=TT-1&format=json", nil))
		if w.Code != want || method == http.MethodHead && (w.Header().Get("Content-Type") != "application/jsonl" || w.Header().Get(untilHeader) == "" || w.Body.Len() > 0) {
			t.Errorf("%s: %d %v, want %d", method, w.Code, w.Header(), want)
		}
	}
}
