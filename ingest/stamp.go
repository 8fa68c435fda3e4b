package ingest

import (
	"math"
	"strconv"
	"time"

	"github.com/go-json-experiment/json/jsontext"
)

// A stamp before this instant comes from a clock that was never set; devices
// start at 1970 or at the year of their firmware.
var clockSet = time.Date(2000, 1, 1, 0, 0, 0, 0, time.UTC).UnixNano()

// Magnitudes that part seconds, milliseconds and microseconds. Read as the
// smaller unit, each bound is 1973-03-03; as the larger, the year 5138.
const (
	leastMillis = 1e11
	leastMicros = 1e14
	leastNanos  = 1e17
)

// stamp reads a JSON value as an instant in Unix nanoseconds.
func stamp(format string, kind jsontext.Kind, raw []byte) (int64, *fault) {
	switch {
	case kind == '0' && format != TimeRFC3339:
		return numericStamp(format, raw)
	case kind == '"' && (format == TimeRFC3339 || format == TimeAny):
		return textStamp(raw)
	case kind == 'n':
		return 0, faultf(TimeMissing, "has null as its time stamp; publish the time of measurement")
	case format == TimeAny:
		return 0, faultf(TimeWrong, "has a time stamp that is neither a number nor text")
	case format == TimeRFC3339:
		return 0, faultf(TimeWrong, "has a time stamp that is not text, but the tag's time format is %q", format)
	}
	return 0, faultf(TimeWrong, "has a time stamp that is not a number, but the tag's time format is %q", format)
}

// numericStamp keeps integers and decimals exact to the nanosecond (digits
// beyond are cut off); with an exponent the stamp is as exact as a float64.
func numericStamp(format string, raw []byte) (int64, *fault) {
	x, f := parse(raw)
	if f != nil {
		return 0, faultf(TimeWrong, "has time stamp %s, which is no instant", shortened(raw))
	}
	unit, ok := stampUnit(format, x)
	if !ok || math.Abs(x) >= math.MaxInt64/float64(unit) {
		return 0, faultf(TimeWrong, "has time stamp %s, too large for seconds, milliseconds or microseconds since 1970", shortened(raw))
	}
	if ns, ok := exactNanos(raw, int64(unit)); ok {
		return ns, nil
	}
	whole, part := math.Modf(x)
	return int64(whole)*int64(unit) + int64(part*float64(unit)), nil
}

func stampUnit(format string, x float64) (time.Duration, bool) {
	switch format {
	case TimeSeconds:
		return time.Second, true
	case TimeMillis:
		return time.Millisecond, true
	case TimeMicros:
		return time.Microsecond, true
	}
	switch x = math.Abs(x); {
	case x < leastMillis:
		return time.Second, true
	case x < leastMicros:
		return time.Millisecond, true
	case x < leastNanos:
		return time.Microsecond, true
	}
	return 0, false
}

// exactNanos reads a JSON number without exponent; unit is a power of ten in
// nanoseconds and the product is known to fit.
func exactNanos(raw []byte, unit int64) (int64, bool) {
	text := skipSign(raw)
	whole := digits(text)
	ns, err := strconv.ParseInt(string(text[:whole]), 10, 64)
	if err != nil {
		return 0, false
	}
	ns *= unit
	if text = text[whole:]; len(text) > 0 {
		if text[0] != '.' || digits(text[1:]) != len(text)-1 {
			return 0, false
		}
		for _, c := range text[1:] {
			unit /= 10
			ns += int64(c-'0') * unit
		}
	}
	if raw[0] == '-' {
		ns = -ns
	}
	return ns, true
}

const longestStamp = 64 // bytes in quotes; "2024-03-31T01:30:00.123456789+01:00" has 37

// textStamp reads an RFC 3339 date and time. As its section 5.6 allows, T and Z
// may be small and a space may part date from time. A leap second (:60) is
// refused, for Unix time has no place for it.
func textStamp(raw []byte) (int64, *fault) {
	wrong := func() (int64, *fault) {
		return 0, faultf(TimeWrong, "has time stamp %s; write RFC 3339, such as \"2024-03-31T01:30:00.5+01:00\", or a number", shortened(raw))
	}
	if len(raw) > longestStamp || len(raw) < len(`"2006-01-02T15:04:05Z"`) {
		return wrong()
	}
	var room [longestStamp]byte
	text := append(room[:0], raw[1:len(raw)-1]...)
	if text[10] == 't' || text[10] == ' ' {
		text[10] = 'T'
	}
	if last := len(text) - 1; text[last] == 'z' {
		text[last] = 'Z'
	}
	var t time.Time
	if err := t.UnmarshalText(text); err != nil {
		return wrong()
	}
	if y := t.Year(); y < 1678 || y > 2261 { // what an int64 of nanoseconds holds
		return wrong()
	}
	return t.UnixNano(), nil
}
