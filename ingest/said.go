package ingest

import (
	"bytes"
	"errors"
	"fmt"
	"strconv"

	"github.com/go-json-experiment/json/jsontext"

	"heatreeve/ingest/quality"
	"heatreeve/thermo/unit"
)

// QualityCode is how a source writes what it thinks of a value.
type QualityCode uint8

// The codes. Of each, package quality tells what it means.
const (
	OwnWords  QualityCode = iota // by the words and numbers of [Quality.Words]
	OPCUA                        // a status code of OPC UA, by its number or its symbolic name
	NE107                        // a status signal of NAMUR NE 107: F, C, S, M, or nothing
	Sparkplug                    // 0, 192 or 500, as of Sparkplug B
)

var codeNames = [...]string{"the words of the tag", "the status codes of OPC UA", "the letters of NE 107", "0, 192 and 500"}

// Quality says where a message tells how good its value is, and in which code. A quality
// that is none of its code is refused as [UnknownQuality].
type Quality struct {
	At    string // JSON Pointer; into each element of samples
	Code  QualityCode
	Words map[string]quality.Mark // with OwnWords; a number among them is equal to any way to write it
	// AbsentIsGood says that a source leaves the quality out, or null, of a good value;
	// otherwise that is refused as well.
	AbsentIsGood bool
}

func (q *Quality) check() error {
	switch {
	case q == nil:
		return nil
	case q.At == "":
		return errors.New("quality without a pointer")
	case int(q.Code) >= len(codeNames):
		return fmt.Errorf("quality in code %d, which is none", q.Code)
	case (q.Code == OwnWords) != (len(q.Words) > 0):
		return errors.New("quality has words of its own, or a code, and not both or neither")
	}
	return nil
}

// numbers are the words that are numbers.
func (q *Quality) numbers() map[float64]quality.Mark {
	if q == nil {
		return nil
	}
	all := make(map[float64]quality.Mark)
	for word, m := range q.Words {
		if !decimal([]byte(word)) {
			continue
		}
		if x, err := strconv.ParseFloat(word, 64); err == nil {
			all[x] = m
		}
	}
	return all
}

// quality is what the source says of a tag's value.
func (t *Tag) quality(w *wanted, at []found) (quality.Mark, *fault) {
	if w.quality < 0 {
		return quality.None, nil
	}
	q, said := t.Quality, &at[w.quality]
	switch said.kind {
	case 0, 'n':
		if q.AbsentIsGood {
			return quality.None, nil
		}
		return quality.None, faultf(UnknownQuality, "has no quality at %q%s; check its pointer, or say that its absence is good", q.At, t.ofSample())
	case '{', '[':
		return quality.None, faultf(UnknownQuality, "has %s at %q%s where a quality should be", kindName(said.kind), q.At, t.ofSample())
	}
	if m, ok := q.mark(w, said); ok {
		return m, nil
	}
	return quality.None, faultf(UnknownQuality, "has quality %s at %q%s, which is none of %s", shortened(said.raw), q.At, t.ofSample(), codeNames[q.Code])
}

// mark reads a scalar in the code.
func (q *Quality) mark(w *wanted, said *found) (quality.Mark, bool) {
	text := said.text()
	switch q.Code {
	case OPCUA:
		if len(text) > 0 && said.kind == '"' && !isDigit(text[0]) {
			return quality.OPCUAName(text)
		}
		n, ok := status(text)
		if !ok {
			return quality.None, false
		}
		return quality.OPCUA(n)
	case NE107:
		if said.kind != '"' {
			return quality.None, false
		}
		return quality.NE107(text)
	case Sparkplug:
		n, err := strconv.ParseInt(string(text), 10, 32)
		if err != nil {
			return quality.None, false
		}
		return quality.Sparkplug(n)
	}
	if m, ok := q.Words[string(text)]; ok {
		return m, true
	}
	if said.kind != '0' {
		return quality.None, false
	}
	x, f := parse(text)
	m, ok := w.numbers[x]
	return m, ok && f == nil
}

// status reads a status code in decimal digits or, as "0x808C0000", in hexadecimal ones.
func status(text []byte) (uint32, bool) {
	base := 10
	if hex, ok := bytes.CutPrefix(text, []byte("0x")); ok {
		text, base = hex, 16
	}
	n, err := strconv.ParseUint(string(text), base, 32)
	return uint32(n), err == nil
}

func isDigit(c byte) bool { return '0' <= c && c <= '9' }

// text is a scalar without its quotes and escapes.
func (v *found) text() []byte {
	if v.kind != '"' {
		return v.raw
	}
	bare := v.raw[1 : len(v.raw)-1]
	for _, c := range bare {
		if c == '\\' {
			plain, err := jsontext.AppendUnquote(nil, v.raw)
			if err != nil {
				return nil // the scanner has accepted the text, so this cannot happen
			}
			return plain
		}
	}
	return bare
}

// longestUnit is of a name of a unit in its quotes, bytes: that of "standard air cfm (0.075
// lb/ft3)" has 34.
const longestUnit = 64

// unit holds the unit that a message names to the tag's. The spelling that was accepted
// last is compared as it stands; any other is looked up.
func (t *Tag) unit(w *wanted, said *found) *fault {
	if said.kind == '"' && string(said.raw) == string(w.spelled) {
		return nil
	}
	switch {
	case said.kind == '"' && len(said.raw) <= longestUnit:
	case said.kind == '"':
		return faultf(UnitMismatch, "has text of %d bytes at %q where a unit should be", len(said.raw), t.UnitAt)
	case said.kind == 0 || said.kind == 'n':
		return faultf(UnitMismatch, "names no unit at %q; check the pointer", t.UnitAt)
	default:
		return faultf(UnitMismatch, "has %s at %q where a unit should be", said.kindName(), t.UnitAt)
	}
	u, err := unit.LookupAs(string(said.text()), t.Unit.Dimension)
	switch {
	case err != nil:
		return faultf(UnitMismatch, "is in %s, and the tag in %v; check the publisher's unit", shortened(said.raw), t.Unit)
	case u.Factor != t.Unit.Factor || u.Offset != t.Unit.Offset || u.Gauge != t.Unit.Gauge:
		return faultf(UnitMismatch, "is in %v, and the tag in %v; give the tag the unit of its payload", u, t.Unit)
	}
	w.spelled = append(w.spelled[:0], said.raw...)
	return nil
}

// kindName names what was found.
func (v *found) kindName() string {
	if v.kind == '0' {
		return "a number"
	}
	return kindName(v.kind)
}
