//go:build services

package main

import (
	"fmt"
	"io"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
)

// edgeScript is an edge node with a device: it is born, publishes by alias what it reads
// five times a second, answers a command to be born again, and dies with its connection
// when told so on its standard input. Beside it the same values go out as JSON.
const edgeScript = `
import mqtt from 'mqtt'
import readline from 'node:readline'
import sparkplug from 'sparkplug-payload'
const {encodePayload, decodePayload} = sparkplug.get('spBv1.0')
const url = process.argv[2]
const read = ms => ({
  flow: Math.fround(3 + Math.cos(ms / 3000)),
  inlet: -7 + Math.round(Math.sin(ms / 2000)),
  outlet: -1.5 + 0.3 * Math.sin(ms / 1700),
})
const plain = mqtt.connect(url)
let node, session = 0, seq = 0

const send = (kind, below, payload, qos = 0) => {
  node.publish('spBv1.0/plant/' + kind + '/gw 1' + below, encodePayload({...payload, seq: seq++ % 256}), {qos})
}
const beside = (ms, x) => {
  for (const [name, value] of Object.entries(x)) plain.publish('plant/' + name, JSON.stringify({v: value, ts: ms}), {qos: 1})
}
const births = ms => { // a birth carries values too, so these have their JSON
  const x = read(ms)
  beside(ms, x)
  seq = 0
  send('NBIRTH', '', {timestamp: ms, metrics: [
    {name: 'bdSeq', type: 'Int64', value: session, timestamp: ms},
    {name: 'Node Control/Rebirth', type: 'Boolean', value: false, timestamp: ms},
    {name: 'Flow', alias: 1, type: 'Float', value: x.flow, timestamp: ms, properties: {Quality: {type: 'Int32', value: 192}}},
    {name: 'Serial', alias: 2, type: 'String', value: 'A-1', timestamp: ms},
  ]})
  send('DBIRTH', '/loop', {timestamp: ms, metrics: [
    {name: 'T/in', alias: 11, type: 'Int8', value: x.inlet, timestamp: ms},
    {name: 'T/out', alias: 12, type: 'Double', value: x.outlet, timestamp: ms},
  ]})
}
const live = () => {
  const death = encodePayload({timestamp: Date.now(), metrics: [{name: 'bdSeq', type: 'Int64', value: session, timestamp: Date.now()}]})
  const mine = node = mqtt.connect(url, {reconnectPeriod: 0, keepalive: 60, will: {topic: 'spBv1.0/plant/NDEATH/gw 1', payload: death, qos: 1, retain: false}})
  mine.on('connect', () => {
    mine.subscribe('spBv1.0/plant/NCMD/gw 1', () => {
      births(Date.now())
      mine.born = true
      mine.publish('plant/born', '1', {qos: 1}, () => console.log('born')) // the broker has had the births by then
    })
  })
  mine.on('message', (topic, payload) => {
    const asked = decodePayload(payload).metrics.some(m => m.name === 'Node Control/Rebirth' && m.type === 'Boolean' && m.value === true)
    console.log(asked ? 'asked' : 'strange command')
    if (asked) births(Date.now())
  })
}
setInterval(() => {
  const ms = Date.now(), x = read(ms)
  beside(ms, x)
  if (!node?.born) return
  send('NDATA', '', {timestamp: ms, metrics: [{alias: 1, type: 'Float', value: x.flow, timestamp: ms}]})
  send('DDATA', '/loop', {timestamp: ms, metrics: [
    {alias: 11, type: 'Int8', value: x.inlet, timestamp: ms}, {alias: 12, type: 'Double', value: x.outlet, timestamp: ms}]})
}, 200)
readline.createInterface({input: process.stdin}).on('line', line => {
  if (line === 'live') { live(); return }
  const mine = node
  node = undefined
  session++
  mine.stream.destroy() // without a goodbye
}).on('close', () => process.exit(0))
console.log('ready')
`

const edgeSite = `
site: Sparkplug beside JSON
timezone: UTC
broker: {url: mqtt://127.0.0.1:%PORT%, commands: rebirth}
tags:
  FT: {sparkplug: plant/gw 1, metric: Flow, unit: kg/s, accuracy: 0.5 % of reading, reports: on change}
  TI: {sparkplug: plant/gw 1/loop, metric: T/in, unit: °C, accuracy: IEC 60751 A, reports: on change}
  TO: {sparkplug: plant/gw 1/loop, metric: T/out, unit: °C, accuracy: IEC 60751 A, reports: on change}
  jFT: {topic: plant/flow, value: /v, time: /ts, unit: kg/s, accuracy: 0.5 % of reading}
  jTI: {topic: plant/inlet, value: /v, time: /ts, unit: °C, accuracy: IEC 60751 A}
  jTO: {topic: plant/outlet, value: /v, time: /ts, unit: °C, accuracy: IEC 60751 A}
loads:
  sparkplug:
    stream: {fluid: propylene glycol 32 %, flow: FT, inlet: TI, outlet: TO, pressure: 3 bar, takes: heat}
  json:
    stream: {fluid: propylene glycol 32 %, flow: jFT, inlet: jTI, outlet: jTO, pressure: 3 bar, takes: heat}
timing: {lateness: 2 s, commit: 1 s}
`

// edgeNode is the script, run by node.
type edgeNode struct {
	*process
	in io.Writer
}

// tell gives the node an order.
func (e *edgeNode) tell(t *testing.T, order string) {
	t.Helper()
	if _, err := fmt.Fprintln(e.in, order); err != nil {
		t.Fatal(err)
	}
}

// startEdge has npm fetch the packages mqtt 5.16.0 and sparkplug-payload 1.0.3, and starts
// the script on them.
func startEdge(t *testing.T, b *broker) *edgeNode {
	t.Helper()
	dir := t.TempDir()
	install := exec.Command("npm", "install", "--prefix", dir, "--no-audit", "--no-fund", "--ignore-scripts", "mqtt@5.16.0", "sparkplug-payload@1.0.3")
	if out, err := install.CombinedOutput(); err != nil {
		t.Fatalf("npm (Debian's packages npm and nodejs) cannot install mqtt and sparkplug-payload: %v\n%s", err, out)
	}
	script := filepath.Join(dir, "edge.mjs")
	if err := os.WriteFile(script, []byte(edgeScript), 0o600); err != nil {
		t.Fatal(err)
	}
	r, w, err := os.Pipe()
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { w.Close(); r.Close() })
	p := startReading(t, r, program(t, "node", "nodejs"), script, "mqtt://127.0.0.1:"+strconv.Itoa(b.port))
	e := &edgeNode{p, w}
	e.says(t, "ready")
	return e
}

// says waits until the node has said a word.
func (e *edgeNode) says(t *testing.T, word string) {
	t.Helper()
	eventually(t, "the edge node says "+word, func() error {
		if !strings.Contains(e.out.String(), word) {
			return fmt.Errorf("it says %q", e.out.String())
		}
		return nil
	})
}

// TestSparkplugByAnotherPublisher: births, data by alias and deaths of a publisher that is
// not ours give the duty that the same values give as JSON.
func TestSparkplugByAnotherPublisher(t *testing.T) {
	b := startBroker(t)
	edge := startEdge(t, b)
	edge.tell(t, "live") // before the agent, which misses the birth and asks for another
	edge.says(t, "born")
	a := startAgent(t, b.site(t, edgeSite))
	a.bothMeasured(t)
	if n := strings.Count(edge.out.String(), "asked"); n != 1 || strings.Contains(edge.out.String(), "strange") {
		t.Errorf("the node was asked %d times for its birth, want once: %s", n, edge.out.String())
	}
	a.sameHeat(t)
	edge.tell(t, "die")
	eventually(t, "the node's load is blind", func() error {
		all, err := a.series()
		if duty := all[`heatreeve_load_duty_watts{load="sparkplug"}`]; err == nil && duty != "" {
			err = fmt.Errorf("it shows %s W", duty)
		}
		return err
	})
	if duty := a.value(t, `heatreeve_load_duty_watts{load="json"}`); math.IsNaN(duty) {
		t.Error("the other load is blind too")
	}
	edge.tell(t, "live")
	a.bothMeasured(t)
	a.sameHeat(t)
	for series, want := range map[string]float64{
		`heatreeve_sparkplug_messages_total{kind="death"}`:     1,
		`heatreeve_sparkplug_messages_total{kind="malformed"}`: 0,
		`heatreeve_sparkplug_messages_total{kind="retained"}`:  0,
		`heatreeve_sparkplug_messages_total{kind="birth"}`:     4,
		`heatreeve_sparkplug_gaps_total`:                       0,
		`heatreeve_sparkplug_rebirth_requests_total`:           1,
	} {
		if got := a.value(t, series); got != want {
			t.Errorf("%s is %v, want %v", series, got, want)
		}
	}
}

// bothMeasured waits until both loads show a duty.
func (a *agentUnderTest) bothMeasured(t *testing.T) {
	t.Helper()
	eventually(t, "both loads are measured", func() error {
		all, err := a.series()
		for _, load := range []string{"sparkplug", "json"} {
			if err == nil && all[`heatreeve_load_duty_watts{load="`+load+`"}`] == "" {
				err = fmt.Errorf("%s is blind; %v", load, all)
			}
		}
		return err
	})
}

// sameHeat looks at the registers of both loads over ten seconds, and at their duties.
func (a *agentUnderTest) sameHeat(t *testing.T) {
	t.Helper()
	heat := func() (h [2]float64, measured float64) {
		all, err := a.series()
		if err != nil {
			t.Fatal(err)
		}
		for i, load := range []string{"sparkplug", "json"} {
			h[i], _ = strconv.ParseFloat(all[`heatreeve_load_heat_joules_total{direction="taken",load="`+load+`"}`], 64)
		}
		measured, _ = strconv.ParseFloat(all[`heatreeve_load_time_seconds_total{kind="measured",load="sparkplug"}`], 64)
		if x, y := all[`heatreeve_load_duty_watts{load="sparkplug"}`], all[`heatreeve_load_duty_watts{load="json"}`]; x != y || x == "" {
			t.Errorf("duty by Sparkplug %q W, as JSON %q W", x, y)
		}
		return h, measured
	}
	before, from := heat()
	a.reaches(t, `heatreeve_load_time_seconds_total{kind="measured",load="sparkplug"}`, from+10)
	after, to := heat()
	got, want := after[0]-before[0], after[1]-before[1]
	// The registers are sums of some 1e5 J a second: the last digits of their difference are rounding.
	if !(math.Abs(got-want) <= 1e-9*after[1]) || !(want > 1e5) {
		t.Errorf("over %v s %.9g J by Sparkplug, %.9g J as JSON", to-from, got, want)
	}
	t.Logf("over %v s %.9g J by Sparkplug, %.9g J as JSON", to-from, got, want)
}
