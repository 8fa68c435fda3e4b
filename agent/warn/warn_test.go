package warn

import (
	"bytes"
	"encoding/json"
	"math"
	"reflect"
	"slices"
	"strings"
	"testing"
	"time"

	"github.com/santhosh-tekuri/jsonschema/v6"

	"heatreeve/agent/design"
	"heatreeve/agent/design/cause"
	"heatreeve/configs"
)

const (
	minute = int64(time.Minute)
	hour   = int64(time.Hour)
	// base is 2023-11-14 22:14:00 UTC.
	base = 1_700_000_040 * int64(time.Second)
)

// numbers gives numbers from one on.
func numbers() func() uint64 {
	n := uint64(0)
	return func() uint64 { n++; return n }
}

func short(begin, end int64, part float64) design.Warning {
	return design.Warning{Kind: design.WarnShort, Subject: "hall", Begin: begin, End: end, Since: begin - hour, Now: part, Greatest: part,
		Causes: []cause.Cause{{Kind: cause.FlowAway, Says: "the flow is low", Weight: 0.8, Subject: "FT-1"}}}
}

// course is a roll and what it told.
type course struct {
	Roll
	number func() uint64
}

func (c *course) begin(at int64) []Change {
	w := short(at, 0, -0.2)
	return c.Observe([]design.Warning{w}, []design.Warning{w}, at, c.number)
}

func (c *course) end(begin, at int64) []Change {
	return c.Observe([]design.Warning{short(begin, at, -0.1)}, nil, at, c.number)
}

func whats(all []Change) string {
	var words []string
	for _, c := range all {
		words = append(words, c.What)
	}
	return strings.Join(words, ", ")
}

var joan = Mark{By: "J. Marsh", Reason: "pump is being changed", At: base}

// The states and their changes are those of ANSI/ISA-18.2-2016: normal, unacknowledged,
// acknowledged, returned to normal unacknowledged.
func TestStates(t *testing.T) {
	c := course{number: numbers()}
	state := func(want State) {
		t.Helper()
		if got := c.Entries[0].State(); got != want {
			t.Errorf("state %q, want %q", got, want)
		}
	}
	if got := whats(c.begin(base)); got != Began {
		t.Errorf("told %q", got)
	}
	state(Unacknowledged)
	if _, err := c.Acknowledge("hall", "", joan); err != nil {
		t.Fatal(err)
	}
	state(Acknowledged)
	if _, err := c.Acknowledge("hall", "", joan); err == nil {
		t.Error("acknowledged twice")
	}
	if got := whats(c.end(base, base+hour)); got != Over {
		t.Errorf("told %q", got)
	}
	state(Normal)
	c.begin(base + 3*hour)
	state(Unacknowledged) // the acknowledgement has ended with its warning
	c.end(base+3*hour, base+4*hour)
	state(Returned)
	if _, err := c.Acknowledge("hall", design.WarnOver, joan); err == nil || !strings.Contains(err.Error(), "short of hall (returned, unacknowledged)") {
		t.Errorf("another kind: %v", err)
	}
	if marked, err := c.Acknowledge("hall", design.WarnShort, joan); err != nil || len(marked) != 1 || marked[0].Number != 2 {
		t.Fatalf("%+v, %v", marked, err)
	}
	state(Normal)
}

// What returned unacknowledged stays for thirty days and no longer; a later warning of the
// same kind counts it.
func TestReturnedStays(t *testing.T) {
	c := course{number: numbers()}
	c.begin(base)
	c.end(base, base+hour)
	c.Advance(base + hour + Kept - 1)
	if board := c.Board(nil); len(board.Listed()) != 1 {
		t.Error("is not listed any more before its time")
	}
	kept := c.Clone()
	kept.Advance(base + hour + Kept)
	if board := kept.Board(nil); len(board.Listed()) != 0 || len(board.All) != 1 {
		t.Errorf("%+v after its time", board)
	}
	c.begin(base + 5*hour)
	if e := c.Entries[0]; e.Earlier != 1 || e.Number != 2 || e.Times != 1 {
		t.Errorf("%+v, want one before it", e)
	}
	if _, err := c.Acknowledge("hall", "", joan); err != nil || c.Entries[0].Earlier != 0 {
		t.Errorf("%v, %d before it", err, c.Entries[0].Earlier)
	}
}

// Begun again within an hour it is the same warning: one event, unacknowledged again.
func TestFlapping(t *testing.T) {
	c := course{number: numbers()}
	c.begin(base)
	if _, err := c.Acknowledge("hall", "", joan); err != nil {
		t.Fatal(err)
	}
	for at := base; at < base+10*hour; at += 2 * hour {
		c.end(at, at+hour)
		if got := whats(c.begin(at + 2*hour)); got != BeganAgain {
			t.Fatalf("told %q", got)
		}
	}
	e := c.Entries[0]
	if len(c.Entries) != 1 || e.Number != 1 || e.Begin != base || e.Times != 6 || e.State() != Unacknowledged || e.Greatest != -0.2 {
		t.Errorf("%d entries, %+v", len(c.Entries), e)
	}
	c.end(base, base+11*hour)
	if got := whats(c.begin(base + 12*hour + minute)); got != Began || c.Entries[0].Number != 2 {
		t.Errorf("after more than an hour: told %q, %+v", got, c.Entries[0])
	}
}

// What stands follows its warning, and is over where that is gone without a word.
func TestStandingFollows(t *testing.T) {
	c := course{number: numbers()}
	c.begin(base)
	w := short(base, 0, -0.3)
	w.Significance = 7
	if told := c.Observe(nil, []design.Warning{w}, base+minute, c.number); len(told) != 0 {
		t.Errorf("told %q", whats(told))
	}
	if e := c.Entries[0]; e.Now != -0.3 || e.Greatest != -0.3 || e.Significance != 7 {
		t.Errorf("%+v", e)
	}
	if told := c.Observe(nil, nil, base+hour, c.number); whats(told) != Over || told[0].Entry.End != base+hour {
		t.Errorf("told %+v", told)
	}
	// One that came and went between two looks is told, with its end.
	gone := short(base+5*hour, base+6*hour, -0.4)
	gone.Subject = "bath"
	if told := c.Observe([]design.Warning{gone}, nil, base+7*hour, c.number); whats(told) != "began, over" || told[1].Entry.End != base+6*hour || told[1].Entry.Number != 2 {
		t.Errorf("told %+v", told)
	}
}

func TestShelves(t *testing.T) {
	var r Roll
	shelf := Shelf{Subject: "hall", Kind: design.WarnShort, Until: base + ShelfTime, Mark: joan}
	for _, until := range []int64{base, base - 1, base + MostShelfTime + 1} {
		bad := shelf
		if bad.Until = until; r.Shelve(bad) == nil {
			t.Errorf("shelved until %d ns from now", until-base)
		}
	}
	for range 2 {
		if err := r.Shelve(shelf); err != nil {
			t.Fatal(err)
		}
	}
	watched := []Watched{{Subject: "hall", Kind: design.WarnShort}, {Subject: "hall", Kind: design.WarnOver}}
	if b := r.Board(watched); len(b.Shelves) != 1 || !b.Watched[0].Shelved || b.Watched[1].Shelved {
		t.Errorf("%+v", b)
	}
	if told := r.Advance(shelf.Until - 1); len(told) != 0 {
		t.Errorf("told %q too soon", whats(told))
	}
	kept := r.Clone()
	if told := r.Advance(shelf.Until); whats(told) != RanOut || len(r.Shelves) != 0 {
		t.Errorf("told %q", whats(told))
	}
	if ended, err := kept.Unshelve("hall", "", joan); err != nil || len(ended) != 1 || len(kept.Shelves) != 0 {
		t.Errorf("%v, %v", ended, err)
	}
	if _, err := kept.Unshelve("hall", "", joan); err == nil {
		t.Error("took back what is not there")
	}
}

// Who marks must say who and why, in text of a length that an event keeps.
func TestMarksAreChecked(t *testing.T) {
	for _, m := range []Mark{{By: "a"}, {Reason: "b"}, {By: " ", Reason: "b"}, {By: "a\n", Reason: "b"}, {By: "a", Reason: "b\x1b[2J"}, {By: "a", Reason: "\xff"}, {By: strings.Repeat("a", 101), Reason: "b"}, {By: "a", Reason: strings.Repeat("b", 501)}} {
		c := course{number: numbers()}
		c.begin(base)
		before := c.Clone()
		if _, err := c.Acknowledge("hall", "", m); err == nil {
			t.Errorf("%+v: no error", m)
		}
		if err := c.Shelve(Shelf{Subject: "hall", Kind: design.WarnShort, Until: base + hour, Mark: m}); err == nil {
			t.Errorf("%+v: shelved", m)
		}
		if !reflect.DeepEqual(before, c.Roll) {
			t.Errorf("%+v changed the roll", m)
		}
	}
}

// What was seen of a subject that has left the plant is let go of, what was not is not.
func TestForget(t *testing.T) {
	c := course{number: numbers()}
	c.begin(base)
	c.end(base, base+hour)
	if c.Forget(nil); len(c.Entries) != 1 {
		t.Error("let go of what nobody has seen")
	}
	if _, err := c.Acknowledge("hall", "", joan); err != nil {
		t.Fatal(err)
	}
	if c.Forget([]Watched{{Subject: "hall", Kind: design.WarnShort}}); len(c.Entries) != 1 {
		t.Error("let go of what is watched")
	}
	if c.Forget(nil); len(c.Entries) != 0 {
		t.Error("kept what is gone and seen")
	}
}

// Documents in every state are as the schema says, which has their keys and words.
func TestSchema(t *testing.T) {
	doc, err := jsonschema.UnmarshalJSON(bytes.NewReader(configs.WarningSchema))
	if err != nil {
		t.Fatal(err)
	}
	compiler := jsonschema.NewCompiler()
	if err := compiler.AddResource("warning.schema.json", doc); err != nil {
		t.Fatal(err)
	}
	schema, err := compiler.Compile("warning.schema.json")
	if err != nil {
		t.Fatal(err)
	}
	valid := func(r *Roll) (d Document) {
		t.Helper()
		board := r.Board(nil)
		d = board.All[0].Document("Brackwater", time.FixedZone("", 3600))
		text, err := json.Marshal(d)
		if err != nil {
			t.Fatal(err)
		}
		back, err := jsonschema.UnmarshalJSON(bytes.NewReader(text))
		if err == nil {
			err = schema.Validate(back)
		}
		if err != nil {
			t.Errorf("%s: %v", text, err)
		}
		return d
	}
	c := course{number: numbers()}
	c.begin(base)
	c.Entries[0].Significance = math.NaN()
	if d := valid(&c.Roll); !d.Active || *d.Deviation != -0.2 || d.Begin != "2023-11-14T23:14:00+01:00" || d.End != nil || d.Significance != nil {
		t.Errorf("%+v", d)
	}
	if _, err := c.Acknowledge("hall", "", joan); err != nil {
		t.Fatal(err)
	}
	if err := c.Shelve(Shelf{Subject: "hall", Kind: design.WarnShort, Until: base + hour, Mark: joan}); err != nil {
		t.Fatal(err)
	}
	if d := valid(&c.Roll); d.Acknowledged.By != joan.By || *d.Shelved.Until != "2023-11-15T00:14:00+01:00" {
		t.Errorf("%+v", d)
	}
	c.end(base, base+hour)
	if d := valid(&c.Roll); d.Active || d.End == nil || d.State != Normal {
		t.Errorf("%+v", d)
	}
	var keys, states []string
	for i := range reflect.TypeFor[Document]().NumField() {
		key, _, _ := strings.Cut(reflect.TypeFor[Document]().Field(i).Tag.Get("json"), ",")
		keys = append(keys, key)
	}
	for key := range schema.Properties {
		if !slices.Contains(keys, key) {
			t.Errorf("the schema has %q, the document has not", key)
		}
	}
	for _, w := range schema.Properties["state"].Enum.Values {
		states = append(states, w.(string))
	}
	if want := []string{string(Unacknowledged), string(Acknowledged), string(Returned), string(Normal)}; len(schema.Properties) != len(keys) || !slices.Equal(states, want) {
		t.Errorf("%d keys, states %q", len(schema.Properties), states)
	}
	if kinds := schema.Properties["kind"].Enum.Values; len(kinds) != len(design.Kinds()) {
		t.Errorf("kinds %v", kinds)
	}
}

func TestText(t *testing.T) {
	c := course{number: numbers()}
	c.begin(base)
	if got, want := c.Entries[0].Text(time.UTC), "short: 20.0 % below what is expected when it was raised; since 2023-11-14 21:14 +00:00; first cause: the flow is low"; got != want {
		t.Errorf("%q\nwant %q", got, want)
	}
	c.end(base, base+hour)
	if got := c.Entries[0].Text(time.UTC); !strings.HasPrefix(got, "short, ended; at the greatest 20.0 %") {
		t.Errorf("%q", got)
	}
}
