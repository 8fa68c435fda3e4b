package agent

import (
	"context"
	"heatreeve/agent/answer"
	"net/http"
	"slices"
	"strconv"
	"time"
)

const (
	exportPath = answer.Path + "export"
	// untilHeader tells to where an export can go.
	untilHeader = "Heatreeve-Until"
	// noteHeader tells what is to know about all of an export, if anything.
	noteHeader = "Heatreeve-Note"
	// rowsTrailer follows an export that has come to its end, and tells its rows;
	// damageTrailer what of the history could not be read.
	rowsTrailer   = "Heatreeve-Rows"
	damageTrailer = "Heatreeve-Damage"
	// stallTime is how long who asked may take nothing before the export ends.
	stallTime = 10 * time.Minute
)

// exports gives readings and records out while the agent runs, one export at a time. It
// reads a group of records at a time, each in a short transaction, and holds none while
// it waits for who asked.
type exports struct {
	history history
	turn    turn // holds one while an export is under way
}

func newExports(r *reports) *exports {
	return &exports{history: r.history, turn: newTurn(1, "another export is under way; try again when it has ended")}
}

func (s *exports) ServeHTTP(w http.ResponseWriter, r *http.Request) {
	q, err := selectionOf(r.URL.Query())
	if err != nil {
		refuse(w, err)
		return
	}
	x, err := s.history.export(q)
	if err != nil {
		refuse(w, err)
		return
	}
	if r.Method == http.MethodHead { // for whom no row need be read
		x.head(w)
		return
	}
	if !s.turn.taken(r.Context(), w) {
		return
	}
	defer s.turn.free()
	x.serve(r.Context(), w)
}

// head tells what is known before the rows.
func (x *export) head(w http.ResponseWriter) {
	kind := "text/csv; charset=utf-8; header=present"
	if x.json {
		kind = "application/jsonl"
	}
	w.Header().Set("Content-Type", kind)
	w.Header().Set("Cache-Control", "no-store")
	w.Header().Set(untilHeader, x.until().Format(time.RFC3339Nano))
	if x.note != "" {
		w.Header().Set(noteHeader, x.note)
	}
}

// serve writes the answer. One that breaks off has no proper end, so that nobody takes it
// for whole.
func (x *export) serve(ctx context.Context, w http.ResponseWriter) {
	body := &steady{ResponseWriter: w, control: http.NewResponseController(w), stall: stallTime}
	body.extend()
	x.head(w)
	w.Header().Set("Trailer", rowsTrailer+", "+damageTrailer)
	err := x.write(ctx, body)
	switch {
	case err != nil && body.begun:
		panic(http.ErrAbortHandler)
	case err != nil:
		w.Header().Del("Trailer")
		w.Header().Del(noteHeader)
		refuse(w, err)
		return
	}
	w.Header().Set(rowsTrailer, strconv.FormatInt(x.rows, 10))
	if err := x.whole(); err != nil {
		w.Header().Set(damageTrailer, err.Error())
	}
}

// steady is an answer that may take as long as it gets on, and no longer than to its end
// where it has one. It goes out in pieces, each of which must be taken within stall.
type steady struct {
	http.ResponseWriter
	control *http.ResponseController
	stall   time.Duration
	end     time.Time
	begun   bool
}

func (s *steady) Write(p []byte) (n int, err error) {
	s.begun = true
	for piece := range slices.Chunk(p, rowsAPiece) {
		s.extend()
		k, err := s.ResponseWriter.Write(piece)
		if n += k; err != nil {
			return n, err
		}
	}
	return n, nil
}

// extend grants another while; where that cannot be set, there is no bound.
func (s *steady) extend() {
	until := time.Now().Add(s.stall)
	if !s.end.IsZero() && until.After(s.end) {
		until = s.end
	}
	_ = s.control.SetWriteDeadline(until)
}
