//go:build services

package deploy

import (
	"errors"
	"fmt"
	"maps"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strings"
	"syscall"
	"testing"
	"time"
	"unsafe"

	mqtt "github.com/eclipse/paho.mqtt.golang"
)

// drillSite has a circuit that heats a second one in an exchanger, and one whose flow is never heard.
const drillSite = `site: Brackwater Creamery
timezone: UTC
broker: {url: "mqtt://127.0.0.1:PORT", username: heatreeve, password_file: PASSWORD}
tags:
  TI: {topic: creamery/TI, unit: °C, value: /v, time: /ts, accuracy: 0.05 K, max_age: 12 s}
  TO: {topic: creamery/TO, unit: °C, value: /v, time: /ts, accuracy: 0.05 K, max_age: 12 s}
  FT: {topic: creamery/FT, unit: kg/s, value: /v, time: /ts, accuracy: 0.5 % of reading, max_age: 12 s, quality: {at: /q, good: ok, uncertain: held, bad: fault}}
  CI: {topic: creamery/CI, unit: °C, value: /v, time: /ts, accuracy: 0.05 K, max_age: 12 s}
  CO: {topic: creamery/CO, unit: °C, value: /v, time: /ts, accuracy: 0.05 K, max_age: 12 s}
  FC: {topic: creamery/FC, unit: kg/s, value: /v, time: /ts, accuracy: 0.5 % of reading, max_age: 12 s}
  FN: {topic: creamery/FN, unit: kg/s, value: /v, time: /ts, accuracy: 0.5 % of reading, max_age: 12 s}
loads:
  circuit:
    stream: {fluid: water, flow: FT, inlet: TI, outlet: TO, pressure: 4 bar, gives: heat}
    design: {duty: 167.4 kW, allow: 10 %, lasting: 2 min}
  cold:
    stream: {fluid: water, flow: FC, inlet: CI, outlet: CO, pressure: 4 bar, takes: heat}
  spare:
    stream: {fluid: water, flow: FN, inlet: TI, outlet: TO, pressure: 4 bar, gives: heat}
exchangers:
  plates:
    hot: circuit
    cold: cold
    arrangement: counterflow
    design: {duty: 167.4 kW, hot_inlet: 80 °C, hot_outlet: 60 °C, cold_inlet: 40 °C, cold_outlet: 60 °C}
    lasting: 3 min
timing: {commit: 1 s, lateness: 0 s}
`

// drill is a plant that runs as it is told, the real broker, agent and Prometheus, and what that one says.
type drill struct {
	broker     *broker
	agent      *process
	dir        string
	listen     string // of the agent
	prometheus *process
	address    string // of prometheus

	client  mqtt.Client
	stamp   time.Time
	values  map[string]float64 // of the tags, in their units
	quality string
	silent  map[string]bool // tags
}

func startDrill(t *testing.T) *drill {
	t.Helper()
	d := &drill{broker: startBroker(t), dir: t.TempDir(), silent: map[string]bool{"FN": true}}
	d.healthy()
	password := filepath.Join(d.dir, "password")
	if err := os.WriteFile(password, []byte(agentPassword+"\n"), 0o400); err != nil {
		t.Fatal(err)
	}
	text := strings.NewReplacer("PORT", d.broker.port, "PASSWORD", password).Replace(drillSite)
	d.agent, d.listen = startService(t, d.dir, text)
	d.agent.listening(t, d.listen)
	d.connect(t)
	d.observe(t)
	return d
}

// healthy puts the plant where it should be: 2 kg/s from 80 to 60 °C give 167.4 kW, which 2.002 kg/s take from 40 to 60 °C
// (enthalpies of water by steam tables, from memory: 335.2 and 251.5, 167.9 and 251.5 kJ/kg).
func (d *drill) healthy() {
	d.values = map[string]float64{"TI": 80, "TO": 60, "FT": 2, "CI": 40, "CO": 60, "FC": 2.002, "FN": 1}
	d.quality = "ok"
}

func (d *drill) connect(t *testing.T) {
	t.Helper()
	d.client = mqtt.NewClient(mqtt.NewClientOptions().AddBroker("mqtt://127.0.0.1:" + d.broker.port).SetClientID("drill").
		SetUsername("plant").SetPassword(plantPassword).SetAutoReconnect(false))
	settle(t, d.client.Connect())
	t.Cleanup(func() { d.client.Disconnect(100) })
}

// observe starts Prometheus on the rules with every wait cut short.
func (d *drill) observe(t *testing.T) {
	t.Helper()
	dir := writePrometheus(t, "for: 1m", "for: 1s", "for: 2m", "for: 1s", "for: 5m", "for: 1s", "for: 10m", "for: 1s", "for: 30m", "for: 1s",
		"seconds, 300)", "seconds, 5)", "[5m]", "[15s]")
	config := moved(t, read(t, "prometheus/prometheus.yml"), "127.0.0.1:9617", d.listen, "interval: 15s", "interval: 1s", "timeout: 10s", "timeout: 1s")
	user := filepath.Join(dir, "user")
	if err := errors.Join(os.WriteFile(filepath.Join(dir, "prometheus.yml"), []byte(config), 0o644), os.Mkdir(user, 0o755),
		os.WriteFile(filepath.Join(user, "runbook.md"), []byte(read(t, "runbook.md")), 0o644)); err != nil {
		t.Fatal(err)
	}
	d.address = "127.0.0.1:" + freePort(t)
	d.prometheus = start(t, exec.Command(program(t, "prometheus"), "--config.file="+filepath.Join(dir, "prometheus.yml"),
		"--storage.tsdb.path="+filepath.Join(dir, "data"), "--web.listen-address="+d.address,
		"--web.user-assets="+user, "--web.external-url=http://"+d.address))
}

// step is the time between two stamps of the plant.
const step = 5 * time.Second

// run lets the plant go on for a step.
func (d *drill) run(t *testing.T) {
	t.Helper()
	d.stamp = d.stamp.Add(step)
	d.publish(t)
}

// publish sends what all tags read that are not silent, moved by a ten-thousandth, as no live signal stands still.
func (d *drill) publish(t *testing.T) {
	t.Helper()
	wave := 1 + 1e-4*math.Sin(float64(d.stamp.Unix()))
	for tag, value := range d.values {
		if !d.silent[tag] {
			settle(t, d.client.Publish("creamery/"+tag, 1, false, fmt.Sprintf(`{"v": %.4f, "q": %q, "ts": %d}`, value*wave, d.quality, d.stamp.UnixMilli())))
		}
	}
}

// pace is how the plant goes on while the drill waits.
type pace int

const (
	still pace = iota // not at all
	live              // a reading of each tag a second, stamped now
	fast              // a step every 20 ms, 250 times faster than life
)

// goOn lets the plant do what is due.
func (d *drill) goOn(t *testing.T, p pace, due *time.Time) {
	t.Helper()
	for every := map[pace]time.Duration{live: time.Second, fast: 20 * time.Millisecond}[p]; p != still && !due.After(time.Now()); *due = due.Add(every) {
		if p == fast {
			d.run(t)
			continue
		}
		d.stamp = time.Now()
		d.publish(t)
	}
}

// until runs the plant until an alert fires, or does not any more.
func (d *drill) until(t *testing.T, p pace, alert string, fires bool) {
	t.Helper()
	begun := time.Now()
	due := begun
	d.prometheus.eventually(t, func() error {
		d.goOn(t, p, &due)
		all, err := d.firing()
		if _, ok := all[alert]; err == nil && ok != fires {
			err = fmt.Errorf("%s: firing %v, want %v; all that fire: %q", alert, ok, fires, slices.Sorted(maps.Keys(all)))
		}
		return err
	})
	t.Logf("%-36s fires %-5v after %4.1f s", alert, fires, time.Since(begun).Seconds())
}

// both sees an alert fire after the fault, and clear after the remedy.
func (d *drill) both(t *testing.T, p pace, alert string, fault, remedy func()) {
	t.Helper()
	fault()
	d.until(t, p, alert, true)
	remedy()
	d.until(t, p, alert, false)
}

// alert is what Prometheus has on one that fires.
type alert struct {
	Labels, Annotations map[string]string
	State               string
}

// firing are the alerts that fire, by name and what they are about.
func (d *drill) firing() (map[string]alert, error) {
	var data struct{ Alerts []alert }
	err := ask(d.address, "/api/v1/alerts", &data)
	all := map[string]alert{}
	for _, a := range data.Alerts {
		if a.State == "firing" {
			all[strings.TrimSpace(a.Labels["alertname"]+" "+a.Labels["load"]+a.Labels["tag"]+a.Labels["subject"])] = a
		}
	}
	return all, err
}

// fileSize bounds how long a file the agent may write (RLIMIT_FSIZE, prlimit(2)): with 0 its disk takes nothing.
func (d *drill) fileSize(t *testing.T, most uint64) {
	t.Helper()
	const resource = 1 // RLIMIT_FSIZE
	limit := struct{ soft, hard uint64 }{most, math.MaxUint64}
	_, _, errno := syscall.RawSyscall6(syscall.SYS_PRLIMIT64, uintptr(d.agent.cmd.Process.Pid), resource, uintptr(unsafe.Pointer(&limit)), 0, 0, 0)
	if errno != 0 {
		t.Fatalf("prlimit: %v", errno)
	}
}
