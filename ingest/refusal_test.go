package ingest

import (
	"strings"
	"testing"
)

// A refusal shows a payload that people can read as it is, and the first bytes of another.
func TestRefusalShowsThePayload(t *testing.T) {
	for _, tt := range []struct{ payload, want string }{
		{"12,4", `tag "T": payload "12,4" is so`},
		{"{\n\t\"v\": 20.5 °C}\r\n", `tag "T": payload "{\n\t\"v\": 20.5 °C}\r\n" is so`},
		{strings.Repeat("9", 200), `tag "T": payload "` + strings.Repeat("9", shownPayload) + `"… is so`},
		{"\xff\xfe", `tag "T": binary payload ff fe is so`},
		{"\x08\x88\x92\xf3\xa3\xa34\x12\x11\x10\x01\x18\x88\x92\xf3", `tag "T": binary payload 08 88 92 f3 a3 a3 34 12 11 10 01 18… is so`},
		{"1\x00", `tag "T": binary payload 31 00 is so`},
	} {
		text, cut := excerpt([]byte(tt.payload))
		r := &Refusal{Tag: "T", Payload: text, Cut: cut, Detail: "is so"}
		if got := r.Error(); got != tt.want {
			t.Errorf("%s, want %s", got, tt.want)
		}
	}
}
