package survey

import (
	"strings"
	"testing"
)

// Each is told with an example, and with no signal that a draft would make a wrong tag of.
func TestHurdles(t *testing.T) {
	for _, tt := range []struct {
		payload string
		want    Hurdle
		example string
	}{
		{"60.12 °C", Spelled, `"60.12 °C"`}, {"8.5 m3/h", Spelled, `"8.5 m3/h"`}, {"81,5", Spelled, `"81,5"`}, {`{"v": "60.1"}`, Spelled, `"60.1" at /v`},
		{`{"values": [{"id": "TT-1", "v": 20}, {"id": "TT-2", "v": 160}]}`, Parted, "/values/*/v, named by id"},
		{`[{"rows": [{"v": 1}]}]`, Nested, "/*/rows/*/v"},
		{"60.1", "", ""}, {"online", "", ""}, {"fw 2.1.7", "", ""}, {"7 apples", "", ""}, {`{"v": 60.1, "id": "17"}`, "", ""}, {`{"v": 1, "at": "2026-09-21T14:13:20Z"}`, "", ""},
		{`[{"id": "TT-1", "v": 20}, {"id": "TT-1", "v": 21}]`, "", ""},
	} {
		topics := heard(map[string][]string{"a/b": {tt.payload}}).Topics()
		got := topics[0].Hurdles
		told := Hurdles(topics)
		if tt.want == "" {
			if len(got) > 0 || len(told) > 0 {
				t.Errorf("%s: %v, %q; want none", tt.payload, got, told)
			}
			continue
		}
		if len(got) != 1 || got[tt.want] != tt.example || len(told) != 1 || !strings.Contains(told[0], tt.example+" on a/b") {
			t.Errorf("%s: %v, %q; want %s, %s", tt.payload, got, told, tt.want, tt.example)
		}
		for _, s := range topics[0].Signals {
			if s.Guess.dimension != 0 || s.Guess.Why == "" {
				t.Errorf("%s: guess %+v; want no tag, and why", tt.payload, s.Guess)
			}
		}
	}
}

// A text is cut between characters.
func TestSampleOfText(t *testing.T) {
	if got := sample([]byte(strings.Repeat("x", longestText-1) + "°C")); got != strings.Repeat("x", longestText-1) {
		t.Errorf("%q", got)
	}
}
