package ingest

import (
	"encoding/json"
	"math"
	"math/big"
	"math/rand/v2"
	"strconv"
	"strings"
	"testing"
	"time"

	"heatreeve/ingest/quality"
)

// FuzzDecode claims: what is accepted is finite, in range, stamped within
// bounds, and is what encoding/json and strconv read from the same bytes. Whatever the
// payload, it is a sign of life.
func FuzzDecode(f *testing.F) {
	r := rand.New(rand.NewPCG(3, 4))
	for _, kind := range badKinds {
		if payload := kind.make(r); len(payload) < 1000 {
			f.Add([]byte(payload))
		}
	}
	for _, c := range payloads() {
		f.Add(c.payload)
	}
	f.Add([]byte(`{"v":1,"t":"2026-03-29 00:59:00z"}`))
	f.Add([]byte(`{"v":1,"t":1774745940.25}`))
	number := bare()
	number.Topic = celsius().Topic
	beat, state := alive(Liveness{}), alive(Liveness{Online: "up", Offline: "down"})
	beat.Topic, state.Topic, state.Value = celsius().Topic, celsius().Topic, "/s"
	f.Add([]byte(`{"v":1,"s":"up"}`))
	f.Add([]byte(`{"s":"\u0064own"}`))
	d, err := NewDecoder([]Tag{celsius(), number, beat, state}, 0)
	if err != nil {
		f.Fatal(err)
	}
	f.Fuzz(func(t *testing.T, payload []byte) {
		out, known := d.Decode(celsius().Topic, payload, arrival, false, nil)
		if !known || len(out) != 4 {
			t.Fatalf("%d outcomes, want 4", len(out))
		}
		for _, o := range out {
			if o.Refusal != nil && (o.Refusal.Reason >= reasons || o.Refusal.Error() == "") {
				t.Errorf("refusal without reason: %+v", o.Refusal)
			}
		}
		if out[0].Refusal == nil {
			checkJSON(t, payload, out[0].Reading)
		}
		if out[1].Refusal == nil {
			checkBare(t, payload, out[1].Reading)
		}
		if out[2].Refusal != nil || out[2].Value != 1 || out[2].At != arrival {
			t.Errorf("payload %q is no sign of life: %+v, %v", payload, out[2].Reading, out[2].Refusal)
		}
		if out[3].Refusal == nil {
			checkWord(t, payload, out[3].Reading)
		}
	})
}

func checkBare(t *testing.T, payload []byte, r Reading) {
	if r.Mark == quality.NoValue && math.IsNaN(r.Value) {
		if strings.TrimSpace(string(payload)) != "null" {
			t.Errorf("payload %q is taken for null", payload)
		}
		return
	}
	x, err := strconv.ParseFloat(strings.TrimSpace(string(payload)), 64)
	if err != nil || r.Value != x*(1./3600) || !finite(r.Value) || r.At != arrival || r.Stamped {
		t.Errorf("payload %q gave %+v; strconv reads %v, %v", payload, r, x, err)
	}
}

func checkWord(t *testing.T, payload []byte, r Reading) {
	var members map[string]json.RawMessage
	var word string
	err := json.Unmarshal(payload, &members)
	if err == nil {
		err = json.Unmarshal(members["s"], &word)
	}
	if want, ok := map[string]float64{"up": 1, "down": 0}[word]; err != nil || !ok || r.Value != want || r.At != arrival {
		t.Errorf("payload %q gave %+v; encoding/json reads %q, %v", payload, r, word, err)
	}
}

func checkJSON(t *testing.T, payload []byte, r Reading) {
	var members map[string]json.RawMessage
	if err := json.Unmarshal(payload, &members); err != nil {
		t.Fatalf("payload %q was accepted; encoding/json says %v", payload, err)
	}
	x, err := strconv.ParseFloat(string(members["v"]), 64)
	if r.Mark == quality.NoValue && math.IsNaN(r.Value) && string(members["v"]) == "null" {
		x, err, r.Value = 60, nil, 60+273.15
	}
	if err != nil || r.Value != x+273.15 || !finite(r.Value) || r.Value < celsius().Min || r.Value > celsius().Max {
		t.Errorf("payload %q gave %v; strconv reads %v, %v", payload, r.Value, x, err)
	}
	if r.At < clockSet || r.At > arrival+int64(DefaultAhead) || !r.Stamped {
		t.Errorf("payload %q gave the stamp %d, out of bounds", payload, r.At)
	}
	if want, ok := otherStamp(string(members["t"])); !ok || !(math.Abs(float64(r.At-want)) <= 1000) {
		t.Errorf("payload %q gave the stamp %d, want %d (%v)", payload, r.At, want, ok)
	}
}

// otherStamp reads a stamp by other means: rational numbers and time.Parse.
func otherStamp(raw string) (int64, bool) {
	if strings.HasPrefix(raw, `"`) {
		var text string
		if json.Unmarshal([]byte(raw), &text) != nil {
			return 0, false
		}
		at, err := time.Parse(time.RFC3339Nano, strings.Replace(strings.ToUpper(text), " ", "T", 1))
		return at.UnixNano(), err == nil
	}
	x, ok := new(big.Rat).SetString(raw)
	if !ok {
		return 0, false
	}
	year2200 := new(big.Rat).SetInt64(7258118400)
	unit := new(big.Rat).SetInt64(1e9)
	thousand := new(big.Rat).SetInt64(1000)
	for x.Cmp(year2200) > 0 { // milliseconds, microseconds
		x.Quo(x, thousand)
	}
	ns, _ := x.Mul(x, unit).Float64()
	return int64(ns), true
}
