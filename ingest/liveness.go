package ingest

import (
	"bytes"

	"github.com/go-json-experiment/json/jsontext"
)

// Liveness says how the messages of a topic tell whether their source is alive. The
// zero value is a heartbeat: each message, whatever is in it, gives 1.
type Liveness struct {
	// Online and Offline are the words of an availability topic, which give 1 and 0;
	// any other payload is refused. Letter case matters; blanks around do not.
	Online, Offline string
	// Kept says that a message which the broker kept counts, at its arrival: the last
	// word that was said holds until there is another, so its age makes no difference.
	Kept bool
}

func (t *Tag) heartbeat() bool { return t.Liveness != nil && t.Liveness.Online == "" }

// concerns tells whether a fault of a message as a whole is one for the tag.
func (t *Tag) concerns(w *wanted, f *fault) bool {
	switch {
	case f == nil:
		return false
	case t.heartbeat():
		return w.time >= 0 // whose place is in JSON
	}
	return w.value >= 0 || f.reason == Empty || f.reason == TooLarge
}

// liveness is 1 where the source says that it is alive, and 0 where it says that it
// goes.
func (d *Decoder) liveness(tag *Tag, w *wanted, payload []byte) (float64, *fault) {
	if tag.heartbeat() {
		return 1, nil
	}
	said, f := d.word(tag, w, payload)
	if f != nil {
		return 0, f
	}
	switch string(said) {
	case tag.Liveness.Online:
		return 1, nil
	case tag.Liveness.Offline:
		return 0, nil
	}
	return 0, faultf(WrongWord, "says %s, which is neither %q nor %q; check the words of the topic", shortened(said), tag.Liveness.Online, tag.Liveness.Offline)
}

// word is the text of a message, or what its pointer leads to: text without its
// quotes, or a number, true or false as it stands.
func (d *Decoder) word(tag *Tag, w *wanted, payload []byte) ([]byte, *fault) {
	if w.value < 0 {
		return bytes.Trim(payload, blanks), nil
	}
	switch v := d.found[w.value]; v.kind {
	case 0:
		return nil, faultf(ValueMissing, "has nothing at %q; check the value pointer", tag.Value)
	case 'n', '{', '[':
		return nil, faultf(WrongType, "has %s at %q where a word should be", kindName(v.kind), tag.Value)
	case '"':
		text, err := jsontext.AppendUnquote(nil, v.raw)
		if err != nil {
			return nil, faultf(NotJSON, "has text at %q that cannot be read", tag.Value)
		}
		return text, nil
	default:
		return v.raw, nil
	}
}
