package bench

import (
	"bufio"
	"fmt"
	"math"
	"net/http"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
	"time"

	mqtt "github.com/eclipse/paho.mqtt.golang"
)

// plant is a number of water loads with a flow, two temperatures and a pressure each,
// by four tags that report once a second, evenly spread over it.
type plant struct {
	loads  int
	topics []string
	client mqtt.Client
	sent   int
	last   []mqtt.Token
}

func newPlant(loads int) *plant {
	p := &plant{loads: loads}
	for i := range loads {
		for _, kind := range []string{"F", "T", "R", "P"} {
			p.topics = append(p.topics, fmt.Sprintf("plant/%s-%d", kind, i))
		}
	}
	return p
}

// siteFile writes the site file of the plant, with further lines.
func (p *plant) siteFile(b *testing.B, broker string, more ...string) (path string) {
	b.Helper()
	var s strings.Builder
	fmt.Fprintf(&s, "site: Bench\ntimezone: UTC\nbarometer: 100 kPa\nbroker: {url: \"mqtt://%s\"}\ntags:\n", broker)
	for i := range p.loads {
		for _, tag := range [][2]string{
			{"F", "unit: m3/h, accuracy: 0.5 % of reading, range: [0 m3/h, 40 m3/h]"}, {"T", "unit: °C, accuracy: IEC 60751 A, range: [0 °C, 160 °C]"},
			{"R", "unit: °C, accuracy: IEC 60751 A, range: [0 °C, 160 °C]"}, {"P", "unit: barg, accuracy: 0.25 % of 16 bar, range: [0 barg, 16 barg]"},
		} {
			fmt.Fprintf(&s, "  %s-%d: {topic: plant/%s-%d, value: /v, time: /t, %s}\n", tag[0], i, tag[0], i, tag[1])
		}
	}
	s.WriteString("loads:\n")
	for i := range p.loads {
		fmt.Fprintf(&s, "  load-%d:\n    stream: {fluid: water, flow: F-%d, inlet: T-%d, outlet: R-%d, pressure: P-%d, meter_at: inlet, gives: heat}\n    design: {duty: 640 kW, allow: 8 %%}\n", i, i, i, i, i)
	}
	s.WriteString(strings.Join(more, "\n") + "\n")
	path = filepath.Join(b.TempDir(), "site.yaml")
	if err := os.WriteFile(path, []byte(s.String()), 0o600); err != nil {
		b.Fatal(err)
	}
	return path
}

func (p *plant) connect(b *testing.B, broker string) {
	b.Helper()
	p.client = mqtt.NewClient(mqtt.NewClientOptions().AddBroker("tcp://" + broker).SetClientID("plant"))
	if t := p.client.Connect(); t.Wait() && t.Error() != nil {
		b.Fatal(t.Error())
	}
	b.Cleanup(func() { p.client.Disconnect(100) })
}

// payload is a reading of one tag: decimals 0.01 apart that sway within minutes.
func payload(topic, at int, now time.Time) string {
	base := [...]float64{13, 80, 50, 4}[topic%4]
	swing := [...]float64{0.5, 3, 2, 0.1}[topic%4]
	v := base + swing*math.Sin(float64(at)/97+float64(topic))
	return fmt.Sprintf(`{"t":%d,"v":%.2f,"q":"good"}`, now.UnixMilli(), v)
}

// bursts is how many times a second messages go out; a plant with fewer tags sends
// each of them by itself.
const bursts = 200

// second publishes one second's messages at their times in it.
func (p *plant) second(b *testing.B) {
	b.Helper()
	parts := min(bursts, len(p.topics))
	tick := time.NewTicker(time.Second / time.Duration(parts))
	defer tick.Stop()
	at := p.sent / len(p.topics)
	for part := range parts {
		now := <-tick.C
		from, to := part*len(p.topics)/parts, (part+1)*len(p.topics)/parts
		for i := from; i < to; i++ {
			p.last = append(p.last, p.client.Publish(p.topics[i], 1, false, payload(i, at, now)))
		}
	}
	for _, t := range p.last {
		if t.Wait() && t.Error() != nil {
			b.Fatal(t.Error())
		}
	}
	p.sent += len(p.last)
	p.last = p.last[:0]
}

// scrape returns the sums of the samples that an agent shows, by name of the metric, and false if
// it does not serve yet.
func scrape(address string) (sums map[string]float64, ok bool) {
	resp, err := http.Get("http://" + address + "/metrics")
	if err != nil {
		return nil, false
	}
	defer resp.Body.Close()
	sums = make(map[string]float64)
	lines := bufio.NewScanner(resp.Body)
	for lines.Scan() {
		name, value, _ := strings.Cut(lines.Text(), " ")
		if i := strings.LastIndexByte(lines.Text(), ' '); i >= 0 {
			value = lines.Text()[i+1:]
		}
		name, _, _ = strings.Cut(name, "{")
		v, err := strconv.ParseFloat(value, 64)
		if err == nil {
			sums[name] += v
		}
	}
	return sums, lines.Err() == nil && resp.StatusCode == http.StatusOK
}
