package agent

import (
	"bytes"
	"context"
	"errors"
	"io"
	"net/http"
	"net/http/httptest"
	"path/filepath"
	"strings"
	"testing"
	"testing/iotest"
	"time"

	"heatreeve/agent/doors"
	"heatreeve/store"
)

// An agent gives out the same bytes as its file, and both tell how far they are.
func TestExtractFromAgentAndFile(t *testing.T) {
	dir := t.TempDir()
	db, all := noted(t, filepath.Join(dir, HistoryFile), 20_000)
	through := week.Add(19_999 * time.Second)
	extract := func(format string) string {
		t.Helper()
		var b bytes.Buffer
		var last Progress
		err := Extract(t.Context(), dir, Selection{Tag: "TT-1", Format: format}, &b, func(p Progress) {
			if p.Rows <= last.Rows || !p.First.Equal(time.Unix(0, all[0].At)) || !p.At.Equal(time.Unix(0, all[p.Rows-1].At)) || !p.Until.Equal(through) {
				t.Errorf("progress %+v after %+v", p, last)
			}
			last = p
		})
		if err != nil || last.Rows != int64(len(all)) {
			t.Fatalf("%d rows of %d, %v", last.Rows, len(all), err)
		}
		return b.String()
	}
	s := newExports(newReports(historyIn(t, db, "Europe/Dublin")))
	server, at := own(s)
	defer server.Close()
	if err := leaveAddress(dir, at); err != nil {
		t.Fatal(err)
	}
	asked := map[string]string{"csv": extract("csv"), "json": extract("json")}
	if err := forgetAddress(dir); err != nil {
		t.Fatal(err)
	}
	if err := Extract(t.Context(), dir, Selection{Tag: "TT-1"}, io.Discard, func(Progress) {}); !errors.Is(err, store.ErrLocked) {
		t.Errorf("a history that is open elsewhere: %v", err)
	}
	// The file tells event time by its state, which these readings come without.
	h := historyIn(t, db, "Europe/Dublin")
	for format, want := range asked {
		if got, err := exported(h, Selection{Tag: "TT-1", Format: format}); err != nil || got != want {
			t.Errorf("%s: %d bytes of the agent, %d of the file, %v", format, len(want), len(got), err)
		}
	}
}

// An export ends with its context, in the file and at the agent, and says that it is not
// whole; the agent is free for the next one then.
func TestExtractIsCancelled(t *testing.T) {
	dir := t.TempDir()
	db, all := noted(t, filepath.Join(dir, HistoryFile), 100_000)
	h := historyIn(t, db, "UTC")
	ctx, cancel := context.WithCancel(t.Context())
	x, err := h.export(Selection{Tag: "TT-1"})
	if err != nil {
		t.Fatal(err)
	}
	m := &meter{w: io.Discard, tell: func(Progress) { cancel() }}
	if err := x.write(ctx, m); !errors.Is(err, context.Canceled) || m.Rows == 0 || m.Rows > int64(len(all)/10) {
		t.Errorf("%d rows of %d, %v", m.Rows, len(all), err)
	}

	s := newExports(newReports(h))
	server, at := own(s)
	defer server.Close()
	if err := leaveAddress(dir, at); err != nil {
		t.Fatal(err)
	}
	ctx, cancel = context.WithCancel(t.Context())
	defer cancel()
	err = Extract(ctx, dir, Selection{Tag: "TT-1"}, io.Discard, func(Progress) {
		w := httptest.NewRecorder()
		s.ServeHTTP(w, httptest.NewRequest("GET", exportPath+"?tag=FT-1", nil))
		if w.Code != http.StatusServiceUnavailable || !strings.Contains(said(w), "another export is under way") {
			t.Errorf("a second export: status %d, %.80s", w.Code, w.Body)
		}
		cancel()
	})
	if !errors.Is(err, context.Canceled) || !strings.HasPrefix(err.Error(), "stopped after ") {
		t.Errorf("cancelled: %v", err)
	}
	select {
	case s.turn.one <- struct{}{}: // it has ended there too
	case <-time.After(10 * time.Second):
		t.Error("the agent is still at the export that nobody waits for")
	}
}

// What an agent answers is not taken for an export unless it is a whole one.
func TestExtractOfWrongAnswers(t *testing.T) {
	for _, tt := range []struct {
		what   string
		answer func(w http.ResponseWriter)
		says   string
	}{
		{"no end told", func(w http.ResponseWriter) { w.Header().Del(untilHeader) }, "its export tells no end"},
		{"broken off", func(w http.ResponseWriter) {
			io.WriteString(w, "time,value_K,stamped\r\n2026-10-24T00:00:00.000000000Z,1,true\r\n2026-10-24T00")
			w.(http.Flusher).Flush()
			panic(http.ErrAbortHandler)
		}, "its export breaks off after 1 rows"},
		{"too few rows", func(w http.ResponseWriter) {
			io.WriteString(w, "time,value_K,stamped\r\n2026-10-24T00:00:00.000000000Z,1,true\r\n")
			w.Header().Set(rowsTrailer, "2")
		}, `its export has 1 rows, and should have "2"`},
		{"no count", func(w http.ResponseWriter) { io.WriteString(w, "time,value_K,stamped\r\n") }, `should have ""`},
		{"damage", func(w http.ResponseWriter) {
			io.WriteString(w, "time,value_K,stamped\r\n")
			w.Header().Set(rowsTrailer, "0")
			w.Header().Set(damageTrailer, "1 parts of the history cannot be read")
		}, "1 parts of the history cannot be read"},
		{"no rows at all", func(w http.ResponseWriter) {
			for range 100 {
				w.Write(bytes.Repeat([]byte("x"), rowsAPiece))
			}
		}, "a row of more than 32768 bytes"},
		{"busy", func(w http.ResponseWriter) { http.Error(w, "another export", http.StatusServiceUnavailable) }, "another export"},
	} {
		server := httptest.NewServer(http.HandlerFunc(func(w http.ResponseWriter, _ *http.Request) {
			w.Header().Set(doors.RunHeader, "R")
			w.Header().Set(untilHeader, "2026-10-24T00:00:00Z")
			w.Header().Set("Trailer", rowsTrailer+", "+damageTrailer)
			tt.answer(w)
		}))
		m := &meter{w: io.Discard, tell: func(Progress) {}}
		err := m.ask(t.Context(), address{strings.TrimPrefix(server.URL, "http://"), "R", ""}, Selection{Tag: "TT-1"})
		if err == nil || !strings.Contains(err.Error(), tt.says) {
			t.Errorf("%s: %v, want ...%q...", tt.what, err, tt.says)
		}
		server.Close()
	}
}

// Where the writer takes no more, its own error is told.
func TestExtractToAFullDisk(t *testing.T) {
	db, _ := noted(t, filepath.Join(t.TempDir(), HistoryFile), 2000)
	s := newExports(newReports(historyIn(t, db, "UTC")))
	server, at := own(s)
	defer server.Close()
	m := &meter{w: fullDisk{}, tell: func(Progress) { t.Error("progress") }}
	err := m.ask(t.Context(), at, Selection{Tag: "TT-1"})
	if !errors.Is(err, errFull) || strings.Contains(err.Error(), "breaks off") {
		t.Error(err)
	}
}

var errFull = errors.New("no space left")

type fullDisk struct{}

func (fullDisk) Write([]byte) (int, error) { return 0, errFull }

// However the pieces are cut, the meter counts the same rows and times.
func TestMeterByPieces(t *testing.T) {
	db, all := noted(t, filepath.Join(t.TempDir(), HistoryFile), 50)
	h := historyIn(t, db, "UTC")
	for _, format := range []string{"csv", "json"} {
		text, err := exported(h, Selection{Tag: "TT-1", Format: format})
		if err != nil {
			t.Fatal(err)
		}
		for _, r := range []io.Reader{iotest.OneByteReader(strings.NewReader(text)), iotest.HalfReader(strings.NewReader(text)), strings.NewReader(text)} {
			var b bytes.Buffer
			m := &meter{w: &b, tell: func(Progress) {}, json: format == "json"}
			if _, err := io.CopyBuffer(m, struct{ io.Reader }{r}, make([]byte, 777)); err != nil {
				t.Fatal(err)
			}
			if b.String() != text || m.Rows != 50 || m.First.UnixNano() != all[0].At || m.At.UnixNano() != all[49].At {
				t.Errorf("%s: %+v", format, m.Progress)
			}
		}
	}
}
