package sparkplug

import (
	"errors"
	"fmt"
	"math"
	"testing"

	"heatreeve/ingest/quality"
)

const (
	start  = int64(1_700_000_000_000) // ms
	second = int64(1e9)
)

var (
	nodeN   = Source{Group: "G", Node: "N"}
	deviceD = Source{Group: "G", Node: "N", Device: "D"}
)

// wanted numbers metrics and sources: "G/N/flow", "G/N/D/temperature", "G/N".
type wanted map[string]int

func (w wanted) want(s Source, name []byte) int {
	key := s.String()
	if name != nil {
		key += ":" + string(name)
	}
	if id, ok := w[key]; ok {
		return id
	}
	return -1
}

const (
	flow = iota
	level
	temperature
	nodeAlive
	deviceAlive
)

// plant is a space with two metrics of the node and one of its device.
type plant struct {
	t *testing.T
	*Space
	now int64 // arrival of the next message, ns
}

func newPlant(t *testing.T, o Options) *plant {
	w := wanted{"G/N:flow": flow, "G/N:level": level, "G/N/D:temperature": temperature, "G/N": nodeAlive, "G/N/D": deviceAlive}
	o.Want, o.Ahead = w.want, 30*second
	s := NewSpace(o)
	s.Follow(deviceD)
	return &plant{t: t, Space: s, now: start * 1e6}
}

// take puts a message in a second after the one before, and returns what it says in words.
func (p *plant) take(s Source, k Kind, m *message) []string {
	p.t.Helper()
	p.now += second
	out, err := p.Take(Topic{Kind: k, Source: s}, m.b, p.now, nil)
	if err != nil {
		p.t.Fatalf("%v of %v: %v", k, s, err)
	}
	return words(out)
}

// words writes readings as "flow=2.5@3s", the instant counted from start; an arrival
// has a ~ in front, and what is of the past an h behind.
func words(out []Reading) []string {
	names := []string{"flow", "level", "temperature", "node", "device"}
	var all []string
	for _, r := range out {
		text := fmt.Sprintf("%s=%v", names[r.ID], r.Value)
		if r.Mark != quality.None {
			text = fmt.Sprintf("%s:%v", names[r.ID], r.Mark)
		}
		if r.Wrong != Right {
			all = append(all, fmt.Sprintf("%s!%v", names[r.ID], r.Wrong))
			continue
		}
		text += "@"
		if !r.Stamped {
			text += "~"
		}
		text += fmt.Sprintf("%gs", float64(r.At-start*1e6)/1e9)
		if r.Historical {
			text += "h"
		}
		all = append(all, text)
	}
	return all
}

func (p *plant) says(what string, got []string, want ...string) {
	p.t.Helper()
	if fmt.Sprint(got) != fmt.Sprint(want) {
		p.t.Errorf("%s: %q; want %q", what, got, want)
	}
}

// sec is the instant n seconds from start, ms.
func sec(n float64) uint64 { return uint64(start) + uint64(n*1000) }

func nbirth(session, seq uint64, sent float64) *message {
	return at(sec(sent)).seq(seq).with(bdSeq(session)).
		with(named("flow").alias(1).kind(Double).stamped(sec(sent)).double(2.5)).
		with(named("level").alias(2).kind(Int16).stamped(sec(sent)).integer(0xFFFFFFD8)).
		with(named("other").alias(3).kind(Double).double(1))
}

func dbirth(seq uint64, sent float64) *message {
	return at(sec(sent)).seq(seq).with(named("temperature").alias(7).kind(Float).stamped(sec(sent)).float(60))
}

func ndeath(session uint64) *message { return at(sec(0)).with(bdSeq(session)) }

func aliased(n uint64, sent float64) *message { return new(message).alias(n).stamped(sec(sent)) }

func TestFromBirthToDeath(t *testing.T) {
	p := newPlant(t, Options{})
	p.says("birth", p.take(nodeN, NBirth, nbirth(5, 0, 1)), "node=1@1s", "flow=2.5@1s", "level=-40@1s")
	p.says("device's birth", p.take(deviceD, DBirth, dbirth(1, 2)), "device=1@2s", "temperature=60@2s")
	p.says("data by alias", p.take(nodeN, NData, at(sec(3)).seq(2).
		with(aliased(1, 2.5).double(3)).with(aliased(2, 2.75).integer(0xFFFFFFFF)).with(aliased(3, 2).double(4))), "flow=3@2.5s", "level=-1@2.75s")
	p.says("data without their own stamp", p.take(nodeN, NData, at(sec(4)).seq(3).with(new(message).alias(1).double(4))), "flow=4@4s")
	p.says("data without any stamp", p.take(nodeN, NData, new(message).seq(4).with(new(message).alias(1).double(5))), "flow=5@~5s")
	p.says("device's death", p.take(deviceD, DDeath, at(sec(5.5)).seq(5)), "temperature:offline@5.5s", "device=0@5.5s")
	p.says("node's death", p.take(nodeN, NDeath, ndeath(5)), "flow:offline@~7s", "level:offline@~7s", "node=0@~7s")
	if c := p.Counts(); c != (Counts{Births: 2, Deaths: 2}) {
		t.Errorf("counts %+v", c)
	}
}

func TestNodeDeathTakesDevicesWithIt(t *testing.T) {
	p := newPlant(t, Options{})
	p.take(nodeN, NBirth, nbirth(5, 250, 1))
	p.take(deviceD, DBirth, dbirth(251, 2))
	p.says("death", p.take(nodeN, NDeath, ndeath(5)), "temperature:offline@~3s", "device=0@~3s", "flow:offline@~3s", "level:offline@~3s", "node=0@~3s")
	p.says("a second one", p.take(nodeN, NDeath, ndeath(5)))
	p.says("data of the dead by alias", p.take(nodeN, NData, at(sec(5)).seq(252).with(aliased(1, 5).double(3))), "node=1@5s")
	if c := p.Counts(); c.Unborn != 1 || c.UnknownAlias != 1 {
		t.Errorf("counts %+v; want one message before birth", c)
	}
}

// The will of an earlier connection may come after the birth of the next one.
func TestLateDeathIsIgnored(t *testing.T) {
	p := newPlant(t, Options{})
	p.take(nodeN, NBirth, nbirth(5, 0, 1))
	p.take(nodeN, NBirth, nbirth(6, 0, 2))
	p.says("late death", p.take(nodeN, NDeath, ndeath(5)))
	p.says("data", p.take(nodeN, NData, at(sec(4)).seq(1).with(aliased(1, 4).double(3))), "flow=3@4s")
	if c := p.Counts(); c.LateDeaths != 1 || c.Deaths != 0 {
		t.Errorf("counts %+v", c)
	}
}

func TestNewSessionTakesDevicesAway(t *testing.T) {
	p := newPlant(t, Options{})
	p.take(nodeN, NBirth, nbirth(255, 0, 1))
	p.take(deviceD, DBirth, dbirth(1, 2))
	p.says("asked to be born again", p.take(nodeN, NBirth, nbirth(255, 0, 3)), "flow=2.5@3s", "level=-40@3s")
	p.says("data before the device's birth", p.take(deviceD, DData, at(sec(4)).seq(1).with(aliased(7, 4).float(61))))
	p.says("its birth", p.take(deviceD, DBirth, dbirth(2, 5)), "temperature=60@5s")
	p.says("another session", p.take(nodeN, NBirth, nbirth(0, 0, 6)), "temperature:offline@6s", "device=0@6s", "flow=2.5@6s", "level=-40@6s")
	p.says("the device's data", p.take(deviceD, DData, at(sec(7)).seq(1).with(aliased(7, 7).float(61))), "device=1@7s")
}

// A birth without a metric that it had is the end of that metric.
func TestDroppedMetric(t *testing.T) {
	p := newPlant(t, Options{})
	p.take(nodeN, NBirth, nbirth(5, 0, 1))
	p.says("birth without level", p.take(nodeN, NBirth, at(sec(2)).seq(0).with(bdSeq(6)).with(named("flow").alias(2).kind(Double).double(7))),
		"flow=7@2s", "level:offline@2s")
	p.says("the alias has changed hands", p.take(nodeN, NData, at(sec(3)).seq(1).with(aliased(2, 3).double(8))), "flow=8@3s")
}

func TestSequence(t *testing.T) {
	p := newPlant(t, Options{})
	p.take(nodeN, NBirth, nbirth(5, 254, 1))
	data := func(seq uint64) {
		t.Helper()
		p.says(fmt.Sprint("data ", seq), p.take(nodeN, NData, at(sec(2)).seq(seq).with(aliased(1, 2).double(float64(seq)))), fmt.Sprintf("flow=%d@2s", seq))
	}
	data(255)
	data(0)
	if c := p.Counts(); c.Gaps != 0 {
		t.Errorf("255 and 0 make a gap: %+v", c)
	}
	data(3)
	if c := p.Counts(); c.Gaps != 1 || c.Missed != 2 {
		t.Errorf("1 and 2 are missing: %+v", c)
	}
	data(2)
	data(1)
	data(4)
	if c := p.Counts(); c.Gaps != 1 || c.Reordered != 2 {
		t.Errorf("1 and 2 came later: %+v", c)
	}
	data(4) // a number from before
	if c := p.Counts(); c.Gaps != 2 {
		t.Errorf("4 stands twice: %+v", c)
	}
	data(5)
	if c := p.Counts(); c.Gaps != 2 {
		t.Errorf("it goes on from there: %+v", c)
	}
}

// Numbers in order are never a gap, whatever they begin with, and one that is left out is
// found as one.
func TestSequenceRound(t *testing.T) {
	for first := range uint64(256) {
		var q sequence
		q.start(first)
		for i := first + 1; i < first+600; i++ {
			if gap, late := q.take(i % 256); gap != 0 || late {
				t.Fatalf("from %d: %d is a gap of %d, late %v", first, i, gap, late)
			}
		}
		if gap, _ := q.take((first + 601) % 256); gap != 1 {
			t.Fatalf("from %d: a number left out is a gap of %d", first, gap)
		}
		if gap, late := q.take((first + 600) % 256); gap != 0 || !late || q.open != 0 {
			t.Fatalf("from %d: the number left out came and is gap %d, late %v, %d open", first, gap, late, q.open)
		}
	}
}

func TestBeforeTheBirth(t *testing.T) {
	p := newPlant(t, Options{})
	p.says("names work", p.take(nodeN, NData, at(sec(1)).seq(9).
		with(named("flow").stamped(sec(1)).double(3)).with(named("level").stamped(sec(1)).integer(4)).with(aliased(1, 1).double(5))),
		"flow=3@1s", "level!no datatype", "node=1@1s")
	p.says("a datatype with the data", p.take(nodeN, NData, at(sec(2)).seq(10).with(named("level").kind(Int16).stamped(sec(2)).integer(4))), "level=4@2s")
	if c := p.Counts(); c.Unborn != 2 || c.UnknownAlias != 1 || c.Gaps != 0 {
		t.Errorf("counts %+v", c)
	}
	p.take(nodeN, NBirth, nbirth(5, 0, 3))
	p.says("by name after the birth", p.take(nodeN, NData, at(sec(4)).seq(1).with(named("level").stamped(sec(4)).integer(0xFFFF))), "level=-1@4s")
}

func TestPastAndNull(t *testing.T) {
	p := newPlant(t, Options{})
	p.now += 99 * second
	p.take(nodeN, NBirth, nbirth(5, 0, 100))
	past := func(m *message) *message { return m.varint(metricHistorical, 1) }
	p.says("of the past", p.take(nodeN, NData, at(sec(101)).seq(1).with(past(aliased(1, 50).double(9))).with(past(new(message).alias(2).integer(3)))), "flow=9@50sh", "level!undated")
	p.says("null", p.take(nodeN, NData, at(sec(102)).seq(2).with(aliased(1, 102).varint(metricNull, 1))), "flow:no-value@102s")
	p.says("bad by its quality", p.take(nodeN, NData, at(sec(103)).seq(3).with(aliased(1, 103).double(4).rated(0)).with(aliased(2, 103).integer(5).rated(500))), "flow:rejected-by-source@103s", "level:stale-at-source@103s")
	p.says("transient", p.take(nodeN, NData, at(sec(104)).seq(4).with(aliased(1, 104).double(4).varint(metricTransient, 1))), "flow!transient")
}

func TestStamps(t *testing.T) {
	p := newPlant(t, Options{Earliest: 946684800e9})
	p.take(nodeN, NBirth, nbirth(5, 0, 1))
	p.says("stamps", p.take(nodeN, NData, at(sec(2)).seq(1).with(aliased(1, 32).double(1)).with(aliased(1, 33).double(1)).
		with(new(message).alias(1).stamped(1000).double(2)).with(new(message).alias(1).stamped(math.MaxUint64).double(2))),
		"flow=1@32s", "flow!ahead", "flow!unset clock", "flow!no instant")
	p.says("a death without a clock", p.take(deviceD, DBirth, dbirth(2, 3)), "device=1@3s", "temperature=60@3s")
	p.says("is at its arrival", p.take(deviceD, DDeath, at(5).seq(3)), "temperature:offline@~4s", "device=0@~4s")
	p.says("and never before the last reading", p.take(nodeN, NDeath, ndeath(5)), "flow:offline@~32.000000001s", "level:offline@~5s", "node=0@~5s")
}

// A birth says what is so now, however long ago it was acquired: the value must not lie
// hidden behind the end of the session before.
func TestBirthStandsAfterTheDeath(t *testing.T) {
	p := newPlant(t, Options{})
	p.take(nodeN, NBirth, nbirth(5, 0, 1))
	p.take(nodeN, NDeath, ndeath(5))
	p.says("acquired before the death", p.take(nodeN, NBirth, at(sec(3)).seq(0).with(bdSeq(6)).with(named("flow").kind(Double).stamped(sec(1)).double(4))), "node=1@3s", "flow=4@3s")
	p.take(nodeN, NDeath, ndeath(6))
	p.says("sent by a clock that is a little slow", p.take(nodeN, NBirth, at(sec(3.5)).seq(0).with(bdSeq(7)).with(named("flow").kind(Double).stamped(sec(3.5)).double(4))), "node=1@4.000000001s", "flow=4@4.000000001s")
}

// A clock that is minutes off is followed: the end of a session lies on it where its last
// readings do.
func TestDeathByTheNodesClock(t *testing.T) {
	for _, off := range []float64{-120, 20} {
		p := newPlant(t, Options{})
		p.take(nodeN, NBirth, nbirth(5, 0, 1+off))
		p.take(nodeN, NData, at(sec(2+off)).seq(1).with(aliased(1, 2+off).double(3)))
		death, birth := fmt.Sprintf("%gs", 3+off), fmt.Sprintf("%gs", 4+off)
		p.says("death", p.take(nodeN, NDeath, ndeath(5)), "flow:offline@~"+death, "level:offline@~"+death, "node=0@~"+death)
		p.says("birth", p.take(nodeN, NBirth, nbirth(6, 0, 4+off)), "node=1@"+birth, "flow=2.5@"+birth, "level=-40@"+birth)
	}
}

func TestLostConnection(t *testing.T) {
	p := newPlant(t, Options{})
	p.take(nodeN, NBirth, nbirth(5, 0, 1))
	p.says("lost", words(p.Lost(p.now+second, nil)), "flow:offline@~2s", "level:offline@~2s", "node=0@~2s")
	p.says("twice", words(p.Lost(p.now+second, nil)))
	p.now += second
	p.says("the sequence goes on", p.take(nodeN, NData, at(sec(3)).seq(1).with(aliased(1, 1.5).double(3))), "flow=3@3s", "node=1@3s")
	p.Lost(p.now, nil)
	p.says("the sequence does not", p.take(nodeN, NData, at(sec(4)).seq(5).with(aliased(1, 4).double(3)).with(named("level").kind(Int32).stamped(sec(4)).integer(1))), "level=1@4s", "node=1@4s")
	if c := p.Counts(); c.Gaps != 1 || c.UnknownAlias != 1 || c.Unborn != 1 {
		t.Errorf("counts %+v; a birth may have been missed", c)
	}
}

func TestMalformedMessageChangesNothing(t *testing.T) {
	whole := nbirth(5, 0, 1)
	for cut := 1; cut < len(whole.b)-2; cut++ {
		p := newPlant(t, Options{})
		_, err := p.Take(Topic{Kind: NBirth, Source: nodeN}, whole.b[:cut], p.now, nil)
		if n := p.nodes[nodeN]; err != nil && (n.born || n.alive) {
			t.Fatalf("a birth cut at byte %d was used", cut)
		}
	}
	p := newPlant(t, Options{})
	p.take(nodeN, NBirth, whole)
	bad := at(sec(2)).seq(1).with(aliased(1, 2).double(3)).bytes(payloadMetrics, []byte{0x09})
	out, err := p.Take(Topic{Kind: NData, Source: nodeN}, bad.b, p.now, nil)
	if err == nil || len(out) != 0 || p.Counts().Malformed != 1 {
		t.Errorf("%v, %v, %+v; want nothing of a broken message", out, err, p.Counts())
	}
	p.says("the next", p.take(nodeN, NData, at(sec(3)).seq(2).with(aliased(1, 2).double(3))), "flow=3@2s")
}

func TestBounds(t *testing.T) {
	p := newPlant(t, Options{Nodes: 1, Devices: 2, Metrics: 3})
	stranger := Source{Group: "G", Node: "S"}
	p.take(stranger, NData, at(sec(1)).seq(0))
	if _, err := p.Take(Topic{Kind: NData, Source: Source{Group: "G", Node: "T"}}, nil, p.now, nil); !errors.Is(err, ErrStranger) {
		t.Errorf("one node too many: %v", err)
	}
	for i := range 3 {
		_, err := p.Take(Topic{Kind: DData, Source: Source{Group: "G", Node: "N", Device: fmt.Sprint(i)}}, nil, p.now, nil)
		if (err != nil) != (i == 2) {
			t.Errorf("device %d: %v", i, err)
		}
	}
	birth := at(sec(2)).seq(0).with(bdSeq(1)).with(named(string(make([]byte, longestName+1))).alias(9)).with(named("\xff").alias(9))
	for i := range uint64(5) {
		birth.with(named(fmt.Sprint("m", i)).alias(i).kind(Double))
	}
	p.take(nodeN, NBirth, birth)
	if n, c := p.nodes[nodeN], p.Counts(); len(n.aliases) != 3 || c.Crowded != 2+2+2 {
		t.Errorf("%d aliases, %+v; want 3, and 6 things that found no room", len(n.aliases), c)
	}
}

// Two metrics with one alias: nobody can tell whose a value is.
func TestAliasOfTwo(t *testing.T) {
	p := newPlant(t, Options{})
	p.take(nodeN, NBirth, nbirth(5, 0, 1))
	p.take(deviceD, DBirth, at(sec(2)).seq(1).with(named("temperature").alias(1).kind(Float).float(60)))
	p.says("data", p.take(nodeN, NData, at(sec(3)).seq(2).with(aliased(1, 3).double(3)).with(aliased(2, 3).integer(3))), "level=3@3s")
	if c := p.Counts(); c.UnknownAlias != 1 {
		t.Errorf("counts %+v", c)
	}
	p.says("data of a device under a node's alias", p.take(deviceD, DData, at(sec(4)).seq(3).with(aliased(2, 4).integer(3))))
}

func TestKnownAliasesCostNoAllocation(t *testing.T) {
	s, topic, payload := steady(t)
	var out []Reading
	now := start * 1e6
	if n := testing.AllocsPerRun(1000, func() {
		now++
		out, _ = s.Take(topic, payload, now, out[:0])
	}); n != 0 || len(out) != 20 {
		t.Errorf("%v allocations for %d readings; want 0 for 20", n, len(out))
	}
}
