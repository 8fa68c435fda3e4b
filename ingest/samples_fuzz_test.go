package ingest

import (
	"encoding/json"
	"math"
	"math/rand/v2"
	"strconv"
	"strings"
	"testing"

	"heatreeve/ingest/quality"
)

// FuzzSamples claims: a list gives one outcome a sample, or one for the whole of it; what is
// accepted of quality, unit and samples is what encoding/json reads from the same bytes.
func FuzzSamples(f *testing.F) {
	r := rand.New(rand.NewPCG(5, 6))
	for _, kind := range badKinds {
		if payload := kind.make(r); len(payload) < 1000 {
			f.Add([]byte(payload))
		}
	}
	for _, c := range payloads() {
		if len(c.payload) < 1000 {
			f.Add(c.payload)
		}
	}
	f.Add([]byte(`{"s":[{"v":60,"t":1774745940,"q":"F"},{"v":61,"t":1774745941}],"u":"degC","t":1774745940}`))
	f.Add([]byte(`{"t":1774745940,"s":[60,61,null],"u":"°C","v":60,"q":"held"}`))
	list, numbers, single := sampled(), stepped(), saying(OwnWords)()
	list.Quality = &Quality{At: "/q", Code: NE107, AbsentIsGood: true}
	single.UnitAt, single.Unit = "/u", inUnit().Unit
	d, err := NewDecoder([]Tag{list, numbers, single}, 0)
	if err != nil {
		f.Fatal(err)
	}
	f.Fuzz(func(t *testing.T, payload []byte) {
		out, _ := d.Decode(list.Topic, payload, arrival, false, nil)
		var members map[string]json.RawMessage
		var elements []json.RawMessage
		broken := json.Unmarshal(payload, &members)
		notList := json.Unmarshal(members["s"], &elements)
		counts := make([]int, 3)
		for _, o := range out {
			i := counts[o.Tag]
			counts[o.Tag]++
			if o.Refusal != nil {
				continue
			}
			if broken != nil {
				t.Fatalf("payload %q was accepted; encoding/json says %v", payload, broken)
			}
			value, said := members["v"], members["q"]
			if o.Tag < 2 {
				if notList != nil || i >= len(elements) {
					t.Fatalf("payload %q gave sample %d; encoding/json reads %d, %v", payload, i, len(elements), notList)
				}
				value, said = elements[i], nil
			}
			if o.Tag == 0 {
				var sample map[string]json.RawMessage
				if err := json.Unmarshal(elements[i], &sample); err != nil {
					t.Fatalf("payload %q gave sample %d; encoding/json says %v", payload, i, err)
				}
				value, said = sample["v"], sample["q"]
			}
			checkSaid(t, payload, o.Reading, value, said)
			if o.Tag == 2 && o.Mark.Quality() < quality.Bad {
				checkUnit(t, payload, members["u"])
			}
		}
		if counts[2] != 1 || counts[0] < 1 || counts[1] < 1 || counts[0] > MaxSamples || counts[1] > MaxSamples {
			t.Errorf("payload %q gave %v outcomes", payload, counts)
		}
	})
}

// marksSaid are the qualities of the two codes as they stand in JSON.
var marksSaid = map[string]quality.Mark{
	"": quality.None, "null": quality.None,
	"F": quality.Failed, "C": quality.FunctionCheck, "S": quality.OffSpec, "M": quality.Maintenance,
	"f": quality.Failed, "c": quality.FunctionCheck, "s": quality.OffSpec, "m": quality.Maintenance,
	"NORMAL": quality.None, "FAILURE": quality.Failed, "CHECK_FUNCTION": quality.FunctionCheck, "OFF_SPEC": quality.OffSpec, "MAINTENANCE_REQUIRED": quality.Maintenance,
	"ok": quality.None, "held": quality.Doubted, "1": quality.None, "0": quality.Rejected, "false": quality.Rejected,
}

func checkSaid(t *testing.T, payload []byte, r Reading, value, said json.RawMessage) {
	word := string(said)
	if text := ""; json.Unmarshal(said, &text) == nil && word != "null" {
		word = text
	} else if x, err := strconv.ParseFloat(word, 64); err == nil {
		word = strconv.FormatFloat(x, 'g', -1, 64)
		if x == 0 { // -0 too
			word = "0"
		}
	}
	m, known := marksSaid[word]
	if string(value) == "null" {
		m = quality.Worse(m, quality.NoValue)
	}
	if !known || r.Mark != m {
		t.Errorf("payload %q gave the mark %v; quality %q, value %q", payload, r.Mark, said, value)
	}
	x, err := strconv.ParseFloat(string(value), 64)
	if r.Mark.Quality() < quality.Bad && (err != nil || r.Value != x+273.15 || r.Value < celsius().Min || r.Value > celsius().Max) || math.IsInf(r.Value, 0) {
		t.Errorf("payload %q gave %v of %q", payload, r.Value, value)
	}
	if r.At < clockSet || r.At > arrival+int64(DefaultAhead) || !r.Stamped {
		t.Errorf("payload %q gave the stamp %d, out of bounds", payload, r.At)
	}
}

// checkUnit holds the unit of what is not bad to spellings of a degree Celsius.
func checkUnit(t *testing.T, payload []byte, raw json.RawMessage) {
	var name string
	if err := json.Unmarshal(raw, &name); err != nil {
		t.Errorf("payload %q was accepted with the unit %q", payload, raw)
	}
	if bare := strings.NewReplacer(" ", "", "\t", "", "\n", "", "\r", "").Replace(name); !strings.HasSuffix(bare, "C") && !strings.HasSuffix(bare, "℃") && !strings.EqualFold(bare, "celsius") {
		t.Errorf("payload %q was accepted in %q", payload, name)
	}
}
