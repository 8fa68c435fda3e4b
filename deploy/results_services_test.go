//go:build services

package deploy

import (
	"bufio"
	"context"
	"encoding/json"
	"fmt"
	"log/slog"
	"net"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"heatreeve/agent"
	sitefile "heatreeve/agent/site"
)

// listener is a client with the npm package mqtt: it prints what is on the agent's topics, a
// line each: topic, whether the broker had kept it, payload.
const listener = `
import fs from 'node:fs'
import mqtt from 'mqtt'
const [url, certs, user, password] = process.argv.slice(2)
const at = name => fs.readFileSync(certs + '/' + name)
const c = mqtt.connect(url, {username: user, password, ca: at('ca.crt'), cert: at('client.crt'), key: at('client.key')})
c.on('message', (topic, payload, packet) => console.log(topic, packet.retain, payload.toString()))
c.on('error', e => { console.error(e); process.exit(1) })
c.on('connect', () => c.subscribe('heat/#', {qos: 1}, () => console.log('ready false -')))
`

const resultsSite = `
site: Bench
timezone: UTC
broker: {url: "mqtts://127.0.0.1:PORT", ca: CERTS/ca.crt, certificate: CERTS/client.crt, key: CERTS/client.key, min_tls: 1.2,
  username: heatreeve, password_file: PASSWORD, availability: heat/agent, queue: 65000}
tags:
  TI: {topic: creamery/TI, unit: °C, accuracy: IEC 60751 A}
  TO: {topic: creamery/TO, unit: °C, accuracy: IEC 60751 A}
  FT: {topic: creamery/FT, unit: kg/s, accuracy: 0.5 % of reading}
loads:
  hot/water: {stream: {fluid: water, flow: FT, inlet: TI, outlet: TO, pressure: 4 bar, gives: heat}}
timing: {commit: 1 s, lateness: 0 s}
publish: {topic: heat/loads, every: 1 s}
`

// heardLine is a line of the listener.
type heardLine struct {
	topic, payload string
	kept           bool
}

// listen starts the listener and returns what it hears.
func (b *broker) listen(t *testing.T) <-chan heardLine {
	t.Helper()
	dir := t.TempDir()
	must(t, "npm", "install", "--prefix", dir, "--no-audit", "--no-fund", "--ignore-scripts", "mqtt@5.16.0")
	script := filepath.Join(dir, "listener.mjs")
	if err := os.WriteFile(script, []byte(listener), 0o600); err != nil {
		t.Fatal(err)
	}
	cmd := exec.CommandContext(within(t), program(t, "node"), script, "mqtts://127.0.0.1:"+b.portTLS, filepath.Join(b.dir, "certs"), "plant", plantPassword)
	out, err := cmd.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	cmd.Stderr = os.Stderr
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	lines := make(chan heardLine, 1000)
	done := make(chan struct{})
	go func() {
		defer close(done)
		for s := bufio.NewScanner(out); s.Scan(); {
			topic, rest, _ := strings.Cut(s.Text(), " ")
			kept, payload, _ := strings.Cut(rest, " ")
			lines <- heardLine{topic, payload, kept == "true"}
		}
	}()
	t.Cleanup(func() {
		_ = cmd.Process.Kill() // it may have ended
		<-done
		_ = cmd.Wait() // killed
	})
	return lines
}

// await returns the first line that ok is content with.
func await(t *testing.T, lines <-chan heardLine, what string, ok func(heardLine) bool) heardLine {
	t.Helper()
	late := time.After(patience)
	for {
		select {
		case l := <-lines:
			if ok(l) {
				return l
			}
		case <-late:
			t.Fatalf("waited in vain for %s", what)
		}
	}
}

// startOnTLS runs an agent on the encrypted listener.
func (b *broker) startOnTLS(t *testing.T) (stop func()) {
	t.Helper()
	b.authority.Issue(t, "client")
	password := filepath.Join(b.dir, "password")
	if err := os.WriteFile(password, []byte(agentPassword+"\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	text := strings.NewReplacer("PORT", b.portTLS, "CERTS", filepath.Join(b.dir, "certs"), "PASSWORD", password).Replace(resultsSite)
	s, err := sitefile.Parse("bench.yaml", []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	a, err := agent.New(s, agent.Options{Data: t.TempDir(), Listen: "127.0.0.1:0", Log: slog.New(slog.DiscardHandler), Ready: func(net.Addr) {}})
	if err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithCancel(t.Context())
	ended := make(chan error, 1)
	go func() { ended <- a.Run(ctx) }()
	return func() {
		cancel()
		if err := <-ended; err != nil {
			t.Error(err)
		}
	}
}

// Readings in by mosquitto_pub, results out to the npm package mqtt: with TLS, certificates
// on both sides, passwords and the access list of this folder, the agent's line let in.
func TestResultsThroughTheBroker(t *testing.T) {
	b := startBroker(t)
	acl := filepath.Join(b.dir, "heatreeve.acl")
	open := moved(t, read(t, "mosquitto/heatreeve.acl"), "# topic write heat/#", "topic write heat/#", "topic write creamery/#", "topic write creamery/#\ntopic read heat/#")
	if err := os.WriteFile(acl, []byte(open), 0o644); err != nil {
		t.Fatal(err)
	}
	b.stop(t)
	b.run(t)
	stop := b.startOnTLS(t)
	lines := b.listen(t)
	await(t, lines, "the agent", func(l heardLine) bool { return l.topic == "heat/agent" && l.payload == "online" })
	tick := time.NewTicker(time.Second)
	defer tick.Stop()
	for range 5 {
		for topic, value := range map[string]string{"TI": "80", "TO": "60", "FT": "2"} {
			must(t, "mosquitto_pub", b.plant("-t", "creamery/"+topic, "-m", value)...)
		}
		<-tick.C
	}
	// Water at 80 and 60 °C and 4 bar: 335.2 and 251.5 kJ/kg (steam tables, from memory), so 2 kg/s
	// give 167.4 kW, to a tenth of a percent.
	l := await(t, lines, "a duty", func(l heardLine) bool {
		var doc struct {
			Duty *float64 `json:"duty_watts"`
		}
		return l.topic == "heat/loads/hot%2Fwater" && json.Unmarshal([]byte(l.payload), &doc) == nil && doc.Duty != nil && *doc.Duty > 167.2e3 && *doc.Duty < 167.8e3
	})
	t.Log(l.payload)
	stop()
	await(t, lines, "the end", func(l heardLine) bool { return l.topic == "heat/agent" && l.payload == "offline" })
	got := must(t, "mosquitto_sub", b.plant("-t", "heat/#", "-C", "2", "-W", "20", "-F", "%t %r")...)
	if want := "heat/agent 1\nheat/loads/hot%2Fwater 1\n"; got != want {
		t.Errorf("kept by the broker: %q, want %q", got, fmt.Sprint(want))
	}
}
