package page

import (
	"bytes"
	"compress/gzip"
	"strconv"
	"strings"
	"sync"
)

// leastPacked is the length from which an answer is compressed: less is one packet either way.
const leastPacked = 1400

var packers = sync.Pool{New: func() any {
	z, _ := gzip.NewWriterLevel(nil, gzip.BestSpeed) // a level that there is
	return z
}}

// packedUp is a body compressed, for one who reads it once.
func packedUp(body []byte) []byte {
	z := packers.Get().(*gzip.Writer)
	defer packers.Put(z)
	var b bytes.Buffer
	z.Reset(&b)
	_, _ = z.Write(body) // into memory
	_ = z.Close()
	return b.Bytes()
}

// takesGzip tells whether who sends these lines of Accept-Encoding takes gzip (RFC 9110,
// 12.5.3): by its name or by *, unless its weight is 0.
func takesGzip(lines []string) bool {
	named, any := -1.0, -1.0
	for part := range strings.SplitSeq(strings.Join(lines, ","), ",") {
		name, parameters, _ := strings.Cut(part, ";")
		weight := 1.0
		if q, ok := strings.CutPrefix(strings.ReplaceAll(strings.ToLower(parameters), " ", ""), "q="); ok {
			weight, _ = strconv.ParseFloat(q, 64) // what is no number is 0
		}
		switch strings.ToLower(strings.TrimSpace(name)) {
		case "gzip", "x-gzip":
			named = weight
		case "*":
			any = weight
		}
	}
	return named > 0 || named < 0 && any > 0
}
