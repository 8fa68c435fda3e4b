//go:build services

package main

import (
	"fmt"
	"sync/atomic"
	"syscall"
	"testing"
	"time"

	mqtt "github.com/eclipse/paho.mqtt.golang"
)

const (
	liveMaxAge   = 4 * time.Second
	liveLateness = time.Second
)

// liveSite has two loads of which one loses a tag.
const liveSite = `
site: Test Bench
timezone: UTC
broker: {url: "mqtt://127.0.0.1:%PORT%", client_id: live}
timing: {lateness: 1 s, commit: 1 s}
tags:
  TT-1: {topic: bench/tt-1, unit: °C, value: /v, time: /ts, accuracy: IEC 60751 A, max_age: 4 s}
  TT-2: {topic: bench/tt-2, unit: °C, value: /v, time: /ts, accuracy: IEC 60751 A, max_age: 4 s}
  TT-3: {topic: bench/tt-3, unit: °C, value: /v, time: /ts, accuracy: IEC 60751 A, max_age: 4 s}
  FT-1: {topic: bench/ft-1, unit: m3/h, value: /v, time: /ts, accuracy: 0.5 % of reading, max_age: 4 s}
loads:
  cut:
    stream: {fluid: water, flow: FT-1, inlet: TT-1, outlet: TT-2, pressure: 3.2 bar, meter_at: inlet, gives: heat}
    design: {duty: 700 kW, allow: 8 %}
  whole:
    stream: {fluid: water, flow: FT-1, inlet: TT-1, outlet: TT-3, pressure: 3.2 bar, meter_at: inlet, gives: heat}
`

// plant publishes the tags of liveSite five times a second, but for one that may be cut; and at
// once those of the last three minutes, so that there is an account.
type plant struct {
	cut  atomic.Bool
	last atomic.Int64 // stamp of TT-2, Unix ms
}

func (b *broker) plant(t *testing.T) *plant {
	t.Helper()
	p, c := new(plant), b.publisher(t)
	stopping, stopped := make(chan struct{}), make(chan struct{})
	go func() {
		defer close(stopped)
		pace := time.NewTicker(200 * time.Millisecond)
		defer pace.Stop()
		for past := 3 * time.Minute; past > 0; past -= 2 * time.Second {
			p.publish(c, time.Now().Add(-past).UnixMilli())
		}
		for {
			p.publish(c, time.Now().UnixMilli())
			select {
			case <-stopping:
				return
			case <-pace.C:
			}
		}
	}()
	t.Cleanup(func() { close(stopping); <-stopped })
	return p
}

func (p *plant) publish(c mqtt.Client, ms int64) {
	for topic, value := range map[string]float64{"tt-1": 85, "tt-2": 60, "tt-3": 50 + float64(ms/1000%10), "ft-1": 25} {
		if topic == "tt-2" {
			if p.cut.Load() {
				continue
			}
			p.last.Store(ms)
		}
		c.Publish("bench/"+topic, 1, false, fmt.Sprintf(`{"v":%g,"ts":%d}`, value, ms))
	}
}

const (
	verdictOf = `document.querySelector('[data-load="%s"] .verdict').textContent`
	dutyOf    = `document.querySelector('[data-load="%s"] .duty').textContent`
	// watchCut notes the event time of the page as long as the load has a figure.
	watchCut = `(() => {
		window.sameDocument = true;
		const duty = document.querySelector('[data-load="cut"] .duty'), at = document.getElementById("at");
		const note = () => { if (duty.textContent !== "–") window.lastShown = new Date(at.dateTime).getTime(); };
		new MutationObserver(note).observe(at, {attributes: true, childList: true, characterData: true, subtree: true});
		note();
		return true;
	})()`
	atOf = `new Date(document.getElementById("at").dateTime).getTime()`
)

// live follows a plant through the loss of a tag and of the agent.
func (b *browser) live(t *testing.T) {
	m := startBroker(t)
	a := startAgent(t, m.site(t, liveSite))
	p := m.plant(t)
	x := b.tab(t, a.address)
	x.open("/")
	x.until("both loads are measured", fmt.Sprintf("%s !== '–' && %s !== '–'", fmt.Sprintf(dutyOf, "cut"), fmt.Sprintf(dutyOf, "whole")))
	x.until("the page is watched", watchCut)

	p.cut.Store(true)
	x.until("the load whose tag is cut is blind", fmt.Sprintf(verdictOf, "cut")+" === 'blind'")
	since := time.Since(time.UnixMilli(p.last.Load()))
	x.until("the page is beyond the age of the last reading", fmt.Sprintf("%s > %d", atOf, p.last.Load()+(liveMaxAge+time.Second).Milliseconds()))
	if verdict := eval[string](x, fmt.Sprintf(verdictOf, "cut")); verdict != "blind" {
		t.Errorf("the load whose tag is cut is %s", verdict)
	}
	// A figure of an event time beyond the last reading's age is none; the page has it when
	// event time, which waits for stragglers, has come there: with the next second and beat.
	if over := time.Duration(eval[int64](x, "window.lastShown")-p.last.Load()) * time.Millisecond; over > liveMaxAge {
		t.Errorf("the page shows a duty %v after the last reading of a tag, of which the age is %v", over, liveMaxAge)
	}
	if longest := liveMaxAge + liveLateness + 7*time.Second; since > longest {
		t.Errorf("the page calls the load blind after %v, want at most %v", since, longest)
	}
	t.Logf("blind %v after the last reading, with an age of %v", since.Round(time.Millisecond), liveMaxAge)
	x.until("a load without a figure says why", `document.querySelector('[data-load="cut"] .note').textContent.includes("TT-2")`)
	x.until("the other load is measured", fmt.Sprintf(dutyOf, "whole")+" !== '–'")

	p.cut.Store(false)
	x.until("the load has its figure again", fmt.Sprintf("%s !== 'blind' && %s !== '–'", fmt.Sprintf(verdictOf, "cut"), fmt.Sprintf(dutyOf, "cut")))
	x.lostAndFound(a)
}

// lostAndFound kills the agent and starts it again on the same port.
func (x *tab) lostAndFound(a *agentUnderTest) {
	x.Helper()
	x.mu.Lock()
	x.lossy = true
	x.mu.Unlock()
	at := eval[int64](x, atOf)
	a.end(x.T, syscall.SIGKILL)
	x.until("the page tells that its agent is lost", `document.documentElement.dataset.link === "lost"`)
	x.until("it says since when", `/since \d\d:\d\d:\d\d/.test(document.getElementById("link").textContent)`)
	x.until("the figures are grey", `[...document.querySelectorAll(".band .figure")].every(f => {
		const s = getComputedStyle(f);
		return s.filter.includes("grayscale") || parseFloat(s.opacity) < 0.7;
	})`)
	a.start(x.T)
	x.until("the page follows again", fmt.Sprintf(`document.documentElement.dataset.link !== "lost" && %s > %d`, atOf, at))
	x.until("the figures are not grey", `[...document.querySelectorAll(".band .figure")].every(f => getComputedStyle(f).opacity === "1")`)
	x.until("and are there", fmt.Sprintf("%s !== '–'", fmt.Sprintf(dutyOf, "whole")))
	if !eval[bool](x, "window.sameDocument === true") {
		x.Error("the page was loaded again")
	}
}
