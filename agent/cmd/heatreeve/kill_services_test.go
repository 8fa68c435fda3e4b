//go:build services

package main

import (
	"bytes"
	"cmp"
	"encoding/json"
	"errors"
	"fmt"
	"heatreeve/agent/answer"
	"math"
	"math/rand/v2"
	"os/exec"
	"slices"
	"strconv"
	"strings"
	"sync"
	"syscall"
	"testing"
	"time"

	mqtt "github.com/eclipse/paho.mqtt.golang"
)

// mixed is a plant with a load of each kind: by flow rate with gaps that are bridged, by
// the register of a volume meter that rolls over, beside a heat meter, by pulses that are
// told one by one, and a vessel.
const mixed = `
site: Test Bench
timezone: UTC
barometer: 101.3 kPa
broker: {url: "mqtt://127.0.0.1:%PORT%", client_id: %ID%}
timing: {commit: 1 s, bridge: 35 s}
fluids: {brine: {propylene glycol: 32 %}}
tags:
  TT-1: {topic: bench/tt-1, unit: °C, value: /v, time: /ts, accuracy: IEC 60751 A, max_age: 15 s}
  TT-2: {topic: bench/tt-2, unit: °C, value: /v, time: /ts, accuracy: IEC 60751 A, max_age: 15 s}
  FT-1: {topic: bench/ft-1, unit: m3/h, value: /v, time: /ts, accuracy: 0.5 % of reading, max_age: 15 s}
  TT-3: {topic: bench/tt-3, unit: °C, value: /v, time: /ts, accuracy: IEC 60751 A, max_age: 15 s}
  FT-2: {topic: bench/ft-2, unit: kg/s, value: /v, time: /ts, accuracy: 0.5 % of reading, max_age: 15 s}
  QT-1: {topic: bench/qt-1, unit: m3, value: /v, time: /ts, accuracy: 0.5 % of reading, resolution: 10 L, counts: {rolls_over_at: 10 000 m3, largest: 60 m3/h}, max_age: 5 min}
  PQ-1: {topic: bench/pq-1, unit: pulses, value: /v, time: /ts, accuracy: 1 % of reading, counts: {pulse: 2.5 L, since: last message}, max_age: 1 min}
  ET-1: {topic: bench/et-1, unit: kWh, value: /v, time: /ts, accuracy: 2 % of reading, counts: {}, max_age: 5 min}
loads:
  circuit:
    stream: {fluid: water, flow: FT-1, inlet: TT-1, outlet: TT-2, pressure: 3 barg, meter_at: inlet, gives: heat}
    design: {duty: 600 kW, allow: 8 %}
  chilled:
    stream: {fluid: brine, flow: FT-2, inlet: TT-3, outlet: TT-2, pressure: 2 barg, takes: heat, pair: 0.9, corrections: {pump: 2.2 kW}}
  metered:
    stream: {fluid: water, flow: QT-1, inlet: TT-1, outlet: TT-2, pressure: 3 barg, meter_at: inlet, gives: heat}
    witness: ET-1
  pulsed:
    stream: {fluid: water, flow: PQ-1, inlet: TT-1, outlet: TT-2, pressure: 3 barg, meter_at: inlet, gives: heat}
  tank:
    vessel: {fluid: water, temperature: TT-1, pressure: 1 barg, content: 3 m3, shell: 500 kg steel, over: 2 min, takes: heat}
`

// reading is one message of the stream.
type reading struct {
	topic, payload string
	sent           float64 // order of publishing, s
}

// stream makes seconds of readings of every tag, each second, from base (Unix
// milliseconds) on: values that wander, stamps that are not round, up to two and a half
// seconds out of order, one in fifty published twice; the meters count every ten seconds.
// Of the pulses each message has an amount of its own. For a while the flow is silent, and
// later everything.
func stream(rng *rand.Rand, base int64, seconds int) []reading {
	tags := []struct {
		topic     string
		value, by float64
	}{{"bench/tt-1", 80, 0.4}, {"bench/tt-2", 55, 0.3}, {"bench/ft-1", 24, 0.5}, {"bench/tt-3", 3, 0.1}, {"bench/ft-2", 9, 0.2}, {"bench/pq-1", 0, 0}}
	var all []reading
	volume, heat := 9997.0, 120.0 // m3, kWh
	for s := range seconds {
		volume, heat = math.Mod(volume+0.007, 10_000), heat+0.2
		if s%10 == 3 && (s <= 700 || s >= 760) {
			at := base + int64(s)*1000
			all = append(all, reading{"bench/qt-1", fmt.Sprintf(`{"v":%.2f,"ts":%d}`, volume, at), float64(s)},
				reading{"bench/et-1", fmt.Sprintf(`{"v":%.0f,"ts":%d}`, heat, at), float64(s)})
		}
		for i := range tags {
			x := &tags[i]
			x.value += x.by * (rng.Float64() - 0.5)
			if x.topic == "bench/pq-1" {
				x.value = float64(rng.IntN(6))
			}
			at := float64(s) + 0.9*rng.Float64()
			if s > 300 && s < 340 && i == 2 || s > 700 && s < 760 {
				continue
			}
			r := reading{x.topic, fmt.Sprintf(`{"v":%.3f,"ts":%d}`, x.value, base+int64(at*1000)), at + 2.5*rng.Float64()}
			for range 1 + (50+rng.IntN(50))/99 {
				all = append(all, r)
			}
		}
	}
	slices.SortStableFunc(all, func(a, b reading) int { return cmp.Compare(a.sent, b.sent) })
	return all
}

// publisher is one client, so that the broker has the readings in one order.
func (b *broker) publisher(t *testing.T) mqtt.Client {
	t.Helper()
	return b.publisherAs(t, "publisher")
}

func (b *broker) publisherAs(t *testing.T, id string) mqtt.Client {
	t.Helper()
	c := mqtt.NewClient(mqtt.NewClientOptions().AddBroker(fmt.Sprintf("tcp://127.0.0.1:%d", b.port)).SetClientID(id))
	if token := c.Connect(); !token.WaitTimeout(patience) || token.Error() != nil {
		t.Fatalf("publisher: %v", token.Error())
	}
	t.Cleanup(func() { c.Disconnect(100) })
	return c
}

// send publishes with QoS 1, evenly over the time, and returns once the broker has all.
func send(t *testing.T, c mqtt.Client, all []reading, over time.Duration) {
	t.Helper()
	var tokens []mqtt.Token
	begun := time.Now()
	for i, r := range all {
		timer := time.NewTimer(time.Until(begun.Add(over * time.Duration(i) / time.Duration(len(all)))))
		<-timer.C
		tokens = append(tokens, c.Publish(r.topic, 1, false, r.payload))
	}
	for _, token := range tokens {
		if !token.WaitTimeout(patience) || token.Error() != nil {
			t.Errorf("publish: %v", token.Error())
			return
		}
	}
}

// keepUp publishes a reading again and again, which counts once but is no silence, until
// stop: in a silence event time goes on by the clock, in each agent by its own.
func keepUp(c mqtt.Client, r reading) (stop func()) {
	stopping, stopped := make(chan struct{}), make(chan struct{})
	go func() {
		defer close(stopped)
		again := time.NewTicker(time.Second)
		defer again.Stop()
		for {
			select {
			case <-stopping:
				return
			case <-again.C:
				c.Publish(r.topic, 1, false, r.payload)
			}
		}
	}()
	return func() { close(stopping); <-stopped }
}

// victim is an agent that is killed again and again.
type victim struct {
	*agentUnderTest
	rng      *rand.Rand
	graceful bool // sometimes it is asked to stop instead
	kills    int
	stops    int
	repeats  float64 // readings delivered again and recognised, as far as they could be seen
}

// live starts the victim and ends it some time later: mostly within the first
// second, while it opens, connects, takes what the broker kept, and commits.
func (v *victim) live(t *testing.T) {
	t.Helper()
	path := binary(t)
	span := time.Duration(v.rng.Int64N(int64(700 * time.Millisecond)))
	if v.rng.IntN(8) == 0 {
		span += time.Duration(v.rng.Int64N(int64(2 * time.Second)))
	}
	how := syscall.SIGKILL
	if v.graceful && v.rng.IntN(3) == 0 {
		how = syscall.SIGTERM
	}
	args := []string{"run", "--site", v.site, "--data", v.data, "--listen", v.address}
	cmd := exec.Command(path, args...)
	var out bytes.Buffer
	cmd.Stdout, cmd.Stderr = &out, &out
	if err := cmd.Start(); err != nil {
		t.Error(err)
		return
	}
	ended := make(chan error, 1)
	go func() { ended <- cmd.Wait() }()
	seen := v.watch(ended, span)
	cmd.Process.Signal(how)
	v.repeats += seen
	err := <-ended
	var exit *exec.ExitError
	switch {
	case err == nil && how == syscall.SIGTERM:
		v.stops++
	case errors.As(err, &exit) && exit.Sys().(syscall.WaitStatus).Signaled() && exit.Sys().(syscall.WaitStatus).Signal() == how:
		v.kills++ // or asked to stop before it could listen
	default:
		t.Errorf("%s ended by itself: %v\n%s", v.data, err, out.String())
	}
}

// watch looks at the counters for the span and returns the repeats seen last.
func (v *victim) watch(ended chan error, span time.Duration) (seen float64) {
	over := time.NewTimer(span)
	defer over.Stop()
	look := time.NewTicker(100 * time.Millisecond)
	defer look.Stop()
	for {
		select {
		case <-over.C:
			return seen
		case err := <-ended:
			ended <- err
			return seen
		case <-look.C:
			if all, err := v.series(); err == nil {
				seen = repeats(all)
			}
		}
	}
}

// repeats adds up the readings delivered again.
func repeats(series map[string]string) (sum float64) {
	for name, value := range series {
		if strings.HasPrefix(name, "heatreeve_tag_repeated_readings_total{") {
			x, _ := strconv.ParseFloat(value, 64)
			sum += x
		}
	}
	return sum
}

// settled waits until the agent has booked so many seconds, and has them on its disk.
func (a *agentUnderTest) settled(t *testing.T, total float64) map[string]string {
	t.Helper()
	var last map[string]string
	eventually(t, "everything is on disk", func() error {
		all, err := a.series()
		if err != nil {
			return err
		}
		last = all
		spent := 0.0
		for _, kind := range []string{"measured", "bridged", "missing"} {
			x, _ := strconv.ParseFloat(all[`heatreeve_load_time_seconds_total{kind="`+kind+`",load="circuit"}`], 64)
			spent += x
		}
		if spent < total {
			return fmt.Errorf("%v s are on disk, want %v", spent, total)
		}
		return nil
	})
	return last
}

// booked keeps the registers among the series.
func booked(all map[string]string) map[string]string {
	kept := make(map[string]string)
	for name, value := range all {
		for _, prefix := range []string{"heatreeve_load_heat_joules_total", "heatreeve_load_time_seconds_total", "heatreeve_load_bridged_heat_joules_total"} {
			if strings.HasPrefix(name, prefix) {
				kept[name] = value
			}
		}
	}
	return kept
}

// accounts returns what a stopped agent keeps on disk of a load: its minutes,
// and its report by the hour.
func (a *agentUnderTest) accounts(t *testing.T, load string) (minutes, report string) {
	t.Helper()
	out := func(args ...string) string {
		var stderr bytes.Buffer
		cmd := exec.Command(binary(t), append(args, "--data", a.data, "--load", load, "--format", "json")...)
		cmd.Stderr = &stderr
		text, err := cmd.Output()
		if err != nil {
			t.Fatalf("%v: %v\n%s", args, err, stderr.String())
		}
		return string(text)
	}
	return out("export"), apart(t, out("report", "--by", "hour", "--from", "2020-01-01"), &a.events)
}

// apart takes the events out of a report, which are those of the agent's own life, and the site
// file, which has a client of its own for each agent.
func apart(t *testing.T, text string, events *[]answer.Event) string {
	t.Helper()
	var r answer.Report
	if err := json.Unmarshal([]byte(text), &r); err != nil {
		t.Fatal(err)
	}
	*events = r.Events
	if len(r.SiteFiles) != 1 {
		t.Errorf("%d site files are told, want the one: %v", len(r.SiteFiles), r.SiteFiles)
	}
	var all map[string]any
	if err := json.Unmarshal([]byte(text), &all); err != nil {
		t.Fatal(err)
	}
	delete(all, "events")
	delete(all, "site_files")
	rest, err := json.Marshal(all)
	if err != nil {
		t.Fatal(err)
	}
	return string(rest)
}

// checkEvents looks at the events of an agent that was started, killed and stopped so often:
// none is there twice, and there is none but starts and stops. Which of these there are hangs
// on whether the agent had opened its history before it was ended.
func checkEvents(t *testing.T, events []answer.Event, kills, stops int) {
	t.Helper()
	seen := map[string]int{}
	counts := map[string]int{}
	for _, e := range events {
		counts[e.Kind]++
		if key := fmt.Sprint(e.Kind, e.At.UnixNano()); seen[key] > 0 {
			t.Errorf("twice: %+v", e)
		} else {
			seen[key]++
		}
	}
	starts := counts["started"]
	stopped := counts["stopped"]
	if stopped < (stops+1)/2 || stopped > stops || starts < stopped || starts > kills+stops || len(events) != starts+stopped {
		t.Errorf("events %v after %d kills and %d stops", counts, kills, stops)
	}
	t.Logf("events %v after %d kills and %d stops", counts, kills, stops)
}

// heatOf adds up the minutes of an export.
func heatOf(t *testing.T, minutes string) (heat float64, n int) {
	t.Helper()
	for line := range strings.Lines(minutes) {
		var m map[string]any
		if err := json.Unmarshal([]byte(line), &m); err != nil {
			t.Fatal(err)
		}
		for _, key := range []string{"given_J", "taken_J"} {
			x, ok := m[key].(float64)
			if !ok {
				t.Fatalf("a minute without %s: %s", key, line)
			}
			heat += x
		}
		n++
	}
	return heat, n
}

// Two agents are ended two hundred times each at moments drawn by lot, one always
// by SIGKILL, the other now and then by a request to stop, while twenty minutes of
// readings come through a broker with the in-flight limit that it has by itself.
// Registers, minutes and reports are to the last bit those of an agent that ran
// undisturbed.
func TestTwoHundredKills(t *testing.T) {
	t.Parallel() // it waits more than it works
	const rounds, seconds = 200, 1200
	b := startBrokerWith(t, "max_queued_messages 65000\nlog_type all\nlog_dest stderr\n")
	agents := make(map[string]*agentUnderTest)
	for _, id := range []string{"calm", "hit", "mixed"} {
		a := startAgent(t, b.site(t, strings.ReplaceAll(mixed, "%ID%", id)))
		a.subscribed(t, b, "bench/tt-1", "TT-1")
		agents[id] = a
	}
	victims := []*victim{
		{agentUnderTest: agents["hit"], rng: rand.New(rand.NewPCG(4, 1))},
		{agentUnderTest: agents["mixed"], rng: rand.New(rand.NewPCG(4, 2)), graceful: true},
	}
	for _, v := range victims {
		v.end(t, syscall.SIGKILL)
	}
	base := time.Now().Add(-time.Hour).Truncate(time.Minute)
	all := stream(rand.New(rand.NewPCG(4, 3)), base.UnixMilli(), seconds)
	pub := b.publisher(t)
	for round := range rounds {
		var lives sync.WaitGroup
		for _, v := range victims {
			lives.Go(func() { v.live(t) })
		}
		send(t, pub, all[len(all)*round/rounds:len(all)*(round+1)/rounds], 500*time.Millisecond)
		if lives.Wait(); t.Failed() {
			t.FailNow()
		}
	}
	quiet := keepUp(pub, all[len(all)-1])
	for _, v := range victims {
		v.start(t)
	}
	total := span(t, all)
	want := booked(agents["calm"].settled(t, total))
	for _, v := range victims {
		if got := booked(v.settled(t, total)); fmt.Sprint(got) != fmt.Sprint(want) {
			t.Errorf("after %d kills and %d stops the registers are\n%v\nwant\n%v", v.kills, v.stops, got, want)
		}
		if v.repeats == 0 {
			t.Error("no reading was seen twice: the kills show nothing")
		}
	}
	for _, a := range agents {
		a.end(t, syscall.SIGTERM)
	}
	quiet()
	for _, load := range []string{"circuit", "chilled", "metered", "pulsed", "tank"} {
		minutes, report := agents["calm"].accounts(t, load)
		if heat, n := heatOf(t, minutes); n < seconds/60-3 || !(heat > 0) || math.IsInf(heat, 0) {
			t.Errorf("%s: %d minutes hold %g J", load, n, heat)
		}
		for _, v := range victims {
			m, r := v.accounts(t, load)
			if m != minutes {
				t.Errorf("%s: minutes differ\n%s\nwant\n%s", load, m, minutes)
			}
			if r != report {
				t.Errorf("%s: report differs\n%s\nwant\n%s", load, r, report)
			}
		}
	}
	for _, v := range victims { // with the kill at the beginning and the stop at the end
		checkEvents(t, v.events, v.kills+1, v.stops+1)
	}
	said := b.out.String()
	for i, id := range []string{"hit", "mixed"} {
		v := victims[i]
		again := strings.Count(said, "Sending PUBLISH to "+id+" (d1,")
		if v.kills+v.stops != rounds || again == 0 {
			t.Errorf("%s: %d kills and %d stops, %d messages sent again", id, v.kills, v.stops, again)
		}
		t.Logf("%s: %d messages; %d kills, %d stops, %d restarts; the broker sent %d messages again, at least %.0f were on disk by then and counted once", id, len(all), v.kills, v.stops, rounds, again, v.repeats)
	}
	t.Logf("registers, as without: %v", want)
	if want[`heatreeve_load_time_seconds_total{kind="bridged",load="circuit"}`] == "0" || want[`heatreeve_load_time_seconds_total{kind="missing",load="circuit"}`] == "0" {
		t.Error("nothing bridged, or nothing missing: the stream does not show all")
	}
}

// span returns how many whole seconds an agent books of the stream: from the first
// stamp to the newest, less the lateness.
func span(t *testing.T, all []reading) float64 {
	t.Helper()
	first, last := int64(math.MaxInt64), int64(0)
	for _, r := range all {
		var p struct{ TS int64 }
		if err := json.Unmarshal([]byte(r.payload), &p); err != nil {
			t.Fatal(err)
		}
		first, last = min(first, p.TS), max(last, p.TS)
	}
	return math.Floor(float64(last)/1000-5) - math.Ceil(float64(first)/1000)
}
