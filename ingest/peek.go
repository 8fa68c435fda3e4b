package ingest

import (
	"bytes"

	"github.com/go-json-experiment/json/jsontext"

	"heatreeve/ingest/quality"
)

// Number reads a number as a [Decoder] reads one that is the whole payload; not ok where
// it is none, or not finite.
func Number(text []byte) (x float64, ok bool) {
	if len(bytes.Trim(text, blanks)) == 0 {
		return 0, false
	}
	x, mark, f := bareNumber(text)
	return x, f == nil && mark.Quality() != quality.Bad
}

// Instant reads a JSON number or string as a [Decoder] reads a stamp of [TimeAny], in
// Unix nanoseconds; not ok where it is none, or one of a clock that was never set.
func Instant(kind jsontext.Kind, raw []byte) (at int64, ok bool) {
	at, f := stamp(TimeAny, kind, raw)
	return at, f == nil && at >= clockSet
}
