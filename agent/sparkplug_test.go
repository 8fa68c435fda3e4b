package agent

import (
	"fmt"
	"log/slog"
	"math"
	"path/filepath"
	"strings"
	"testing"

	"google.golang.org/protobuf/encoding/protowire"

	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/ingest"
	"heatreeve/ingest/sparkplug"
	"heatreeve/store"
)

// pluggedSite is the bench whose tags are metrics of a device, and report on change.
var pluggedSite = func() string {
	text := benchSite
	for i, name := range []string{"TI", "TO", "FT"} {
		text = strings.Replace(text, fmt.Sprintf("topic: %c", 'a'+i), "sparkplug: bench/gw/loop, metric: "+name+", reports: on change", 1)
	}
	return strings.ReplaceAll(text, "value: /v, time: /ts, ", "")
}()

var loop = sparkplug.Source{Group: "bench", Node: "gw", Device: "loop"}

// payload writes a message of the loop: doubles by alias, in a birth under their names.
func payload(seq uint64, ms int64, birth bool, values ...float64) []byte {
	return spelled(seq, ms, birth, 0, []string{"TI", "TO", "FT"}[:len(values)], values...)
}

// spelled writes one of any source, whose aliases count up from the first.
func spelled(seq uint64, ms int64, birth bool, first uint64, names []string, values ...float64) []byte {
	field := func(b []byte, num protowire.Number, v uint64) []byte {
		return protowire.AppendVarint(protowire.AppendTag(b, num, protowire.VarintType), v)
	}
	b := field(nil, 1, uint64(ms))
	for i, x := range values {
		var m []byte
		if birth {
			m = protowire.AppendString(protowire.AppendTag(m, 1, protowire.BytesType), names[i])
			m = field(m, 4, 10)
		}
		m = field(field(m, 2, first+uint64(i)), 3, uint64(ms))
		m = protowire.AppendFixed64(protowire.AppendTag(m, 13, protowire.Fixed64Type), math.Float64bits(x))
		b = protowire.AppendBytes(protowire.AppendTag(b, 2, protowire.BytesType), m)
	}
	return field(b, 3, seq)
}

// played is a bench that one kind of message is played to.
type played struct {
	t       *testing.T
	site    *site.Site
	decoder *ingest.Decoder
	books   *accounts
}

func playOn(t *testing.T, text string) *played {
	t.Helper()
	s := parsed(t, text)
	d, err := ingest.NewDecoder(signalsOf(s), s.Timing.Ahead)
	if err != nil {
		t.Fatal(err)
	}
	books, err := newAccounts(plantOf(s), designOf(s), s.Digest, s.Zone)
	if err != nil {
		t.Fatal(err)
	}
	return &played{t, s, d, books}
}

// at puts in what comes in the n-th second, and moves the accounts there.
func (p *played) at(n int, topic string, payload []byte) {
	p.t.Helper()
	now := clock.UnixNano() + int64(n)*sec
	beat := loads.Beat{Through: now - 1}
	if topic != "" {
		out, known := p.decoder.Decode(topic, payload, now, false, nil)
		if !known {
			p.t.Fatalf("no tag reads %q", topic)
		}
		for _, o := range out {
			if o.Refusal != nil && !o.Void {
				p.t.Fatal(o.Refusal)
			}
			beat.Readings = append(beat.Readings, loads.Reading{Tag: o.Tag, At: o.At, Value: o.Value, Mark: o.Mark})
		}
	}
	p.books.advance(beat)
}

func (p *played) totals() loads.Totals { return p.books.engine.Snapshot().Loads[0].Totals }

// The same values, by Sparkplug and as JSON, are the same heat to the last bit.
func TestSparkplugBooksWhatJSONBooks(t *testing.T) {
	plain, plugged := playOn(t, benchSite), playOn(t, pluggedSite)
	for n := range 600 {
		ms := clock.UnixMilli() + int64(n)*1000
		values := []float64{80 + 3*math.Sin(float64(n)/40), 60.125, 2 + math.Cos(float64(n)/90)}
		for i, x := range values {
			plain.at(n, string(rune('a'+i)), fmt.Appendf(nil, `{"v":%v,"ts":%d}`, x, ms))
		}
		k := sparkplug.DData
		if n == 0 {
			k = sparkplug.DBirth
		}
		plugged.at(n, loop.Topic(k), payload(uint64(n%256), ms, n == 0, values...))
	}
	want, got := plain.totals(), plugged.totals()
	if got.Given != want.Given || got.Measured != want.Measured || want.Given < 1e8 {
		t.Errorf("by Sparkplug %+v, as JSON %+v", got, want)
	}
}

// What does not change is not sent, and holds; from the death of the node on it does not.
func TestSparkplugHoldsUntilDeath(t *testing.T) {
	p := playOn(t, pluggedSite)
	death := protowire.AppendVarint(protowire.AppendTag(nil, 1, protowire.VarintType), 1)
	for n := range 700 {
		ms := clock.UnixMilli() + int64(n)*1000
		switch n {
		case 0:
			p.at(n, loop.Topic(sparkplug.DBirth), payload(0, ms, true, 80, 60, 2))
		case 400:
			p.at(n, loop.Topic(sparkplug.NDeath), death)
		case 500:
			p.at(n, loop.Topic(sparkplug.DBirth), payload(0, ms, true, 80, 60, 2))
		default:
			p.at(n, "", nil)
		}
	}
	got := p.totals()
	if measured := float64(got.Measured) / 1e9; measured != 599 && measured != 598 {
		t.Errorf("%v s measured of 700, and the node was gone for 100", measured)
	}
	if missing := float64(got.Missing) / 1e9; missing != 100 {
		t.Errorf("%v s missing; want the 100 of the death", missing)
	}
}

// After a start nothing is known of what happened meanwhile.
func TestMetricsEndAtTheStart(t *testing.T) {
	s, path := parsed(t, pluggedSite), filepath.Join(t.TempDir(), "h.db")
	l, shut := open(t, s, path, store.Options{})
	now := clock.UnixNano()
	l.beat([]ingest.Reading{
		{Tag: 0, At: now, Value: 353, Stamped: true}, {Tag: 1, At: now, Value: 333, Stamped: true}, {Tag: 2, At: now, Value: 2, Stamped: true}, {Tag: 3, At: now, Value: 1},
	}, now+100*sec)
	if err := l.commit(clock, true); err != nil {
		t.Fatal(err)
	}
	shut()
	l, shut = open(t, s, path, store.Options{})
	defer shut()
	a := &Agent{site: s, o: Options{Log: slog.New(slog.DiscardHandler)}}
	before := l.accounts.engine.Snapshot()
	r := &rhythm{books: l, pace: newPace(brokerOf(s), 0, 0, true)}
	r.pace.through = before.Through
	a.endMetrics(r, before)
	l.beat(nil, now+3600*sec)
	got := l.registers()[0]
	if measured := float64(got.Measured) / 1e9; measured < 99 || measured > 101 {
		t.Errorf("%v s measured; want the 100 before the stop", measured)
	}
	if missing := float64(got.Missing) / 1e9; missing < 3499 || missing > 3501 {
		t.Errorf("%v s missing; want the 3500 since", missing)
	}
}

// A metric that reports on change holds on while nothing comes, but not beyond a value that is
// refused: from there the load is blind until the next good one.
func TestRefusedValueEndsTheDuty(t *testing.T) {
	p := playOn(t, pluggedSite)
	ms := func(n int) int64 { return clock.UnixMilli() + int64(n)*1000 }
	p.at(0, loop.Topic(sparkplug.DBirth), payload(0, ms(0), true, 80, 60, 2))
	p.at(60, loop.Topic(sparkplug.DData), payload(1, ms(60), false, math.NaN()))
	p.at(120, loop.Topic(sparkplug.DData), payload(2, ms(120), false, 80))
	p.at(180, "", nil)
	if got := p.totals().Measured / sec; got < 118 || got > 120 {
		t.Errorf("%d s measured of three minutes, of which one is without the inlet; want about 119", got)
	}
}
