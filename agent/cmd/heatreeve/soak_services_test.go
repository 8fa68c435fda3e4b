//go:build services

package main

import (
	"flag"
	"fmt"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
	"time"

	mqtt "github.com/eclipse/paho.mqtt.golang"
)

// soakFor is thirty seconds in the automatic run; ten minutes and more by hand:
//
//	go test -tags services -run TestSoak -timeout 30m -v ./agent/cmd/heatreeve -soak 10m
var (
	soakFor      = flag.Duration("soak", 30*time.Second, "how long TestSoak publishes")
	soakInFlight = flag.Int("inflight", 1000, "max_inflight_messages of TestSoak's broker")
)

// footprint is what an agent takes up, and how far it is behind.
type footprint struct {
	anonymous, mapped             float64 // MiB of memory: its own, and pages of files such as the history's
	fds, goroutines, waiting, cpu float64 // waiting in messages, cpu in s
	lag                           float64 // s of event time behind the clock
}

func (f footprint) String() string {
	return fmt.Sprintf("%.1f MiB of its own and %.1f MiB of files in memory, %.0f descriptors, %.0f goroutines, event time %.1f s behind, %.0f messages unacknowledged, %.1f s of CPU", f.anonymous, f.mapped, f.fds, f.goroutines, f.lag, f.waiting, f.cpu)
}

func (a *agentUnderTest) footprint(t *testing.T) (f footprint) {
	t.Helper()
	proc := filepath.Join("/proc", strconv.Itoa(a.cmd.Process.Pid))
	status, err := os.ReadFile(filepath.Join(proc, "status"))
	if err != nil {
		t.Fatal(err)
	}
	for field, to := range map[string]*float64{"RssAnon:": &f.anonymous, "RssFile:": &f.mapped} {
		_, rest, _ := strings.Cut(string(status), field)
		if _, err := fmt.Sscan(rest, to); err != nil {
			t.Fatalf("%s in %q: %v", field, status, err)
		}
		*to /= 1024
	}
	open, err := os.ReadDir(filepath.Join(proc, "fd"))
	if err != nil {
		t.Fatal(err)
	}
	all, err := a.series()
	if err != nil {
		t.Fatal(err)
	}
	f.fds = float64(len(open))
	for series, to := range map[string]*float64{"go_goroutines": &f.goroutines, eventTime: &f.lag, unacknowledged: &f.waiting, "process_cpu_seconds_total": &f.cpu} {
		if *to, err = strconv.ParseFloat(all[series], 64); err != nil {
			t.Fatalf("%s: %v", series, err)
		}
	}
	f.lag = float64(time.Now().UnixMilli())/1000 - f.lag
	return f
}

// A thousand loads of four tags each, every tag once a second, for as long as is asked:
// the agent keeps up, takes every reading, measures all of the time, and what it takes
// up does not grow.
func TestSoak(t *testing.T) {
	const loads = 1000
	b := startBrokerWith(t, fmt.Sprintf("max_inflight_messages %d\nmax_queued_messages 65000\n", *soakInFlight))
	a := startAgent(t, b.site(t, large(loads, b.port, "commit: 10 s")))
	a.reaches(t, "heatreeve_broker_subscribed_topics", 4*loads)
	pub := b.publisher(t)
	end := time.Now().Add(*soakFor)
	settle := time.Now().Add(min(time.Minute, *soakFor/2))
	var early footprint
	sent := 0
	var last mqtt.Token
	tick := time.NewTicker(10 * time.Millisecond)
	defer tick.Stop()
	for begun := time.Now(); time.Now().Before(end); {
		<-tick.C
		for due := int(time.Since(begun).Seconds() * 4 * loads); sent < due; sent++ {
			topic, v := sweep(sent % (4 * loads))
			last = pub.Publish(topic, 1, false, fmt.Sprintf(`{"v":%.2f,"ts":%d}`, v+float64(sent%97)/100, time.Now().UnixMilli()))
		}
		if early == (footprint{}) && time.Now().After(settle) {
			early = a.footprint(t)
		}
	}
	late := a.footprint(t)
	if !last.WaitTimeout(patience) || last.Error() != nil {
		t.Fatalf("publish: %v", last.Error())
	}
	t.Logf("%d readings in %v; after %v: %v", sent, *soakFor, min(time.Minute, *soakFor/2), early)
	t.Logf("at the end: %v", late)
	t.Logf("%.0f µs of CPU a reading, %.0f %% of one core", 1e6*late.cpu/float64(sent), 100*late.cpu/soakFor.Seconds())
	if late.anonymous > 1.25*early.anonymous+16 || late.fds > early.fds+4 || late.goroutines > early.goroutines+4 {
		t.Error("what the agent takes up grows")
	}
	if late.lag > 30 {
		t.Errorf("event time is %.1f s behind", late.lag)
	}
	eventually(t, "every reading is accepted", func() error { return a.accepted(t, sent) })
	a.wholeTime(t, loads, soakFor.Seconds()-10)
}

// accepted tells whether so many readings have been, over all tags.
func (a *agentUnderTest) accepted(t *testing.T, want int) error {
	t.Helper()
	all, err := a.series()
	if err != nil {
		return err
	}
	sum := 0.0
	for series, value := range all {
		if strings.HasPrefix(series, "heatreeve_tag_readings_total{") {
			x, _ := strconv.ParseFloat(value, 64)
			sum += x
		}
	}
	if int(sum) != want {
		return fmt.Errorf("%.0f of %d", sum, want)
	}
	return nil
}

// wholeTime checks that each load has measured for so long, and that no more is missing
// than the first seconds, in which not all of its tags had come.
func (a *agentUnderTest) wholeTime(t *testing.T, loads int, least float64) {
	t.Helper()
	eventually(t, "all time is measured", func() error {
		all, err := a.series()
		if err != nil {
			return err
		}
		for i := range loads {
			load := fmt.Sprintf(`load="load-%d"}`, i)
			spent, _ := strconv.ParseFloat(all[`heatreeve_load_time_seconds_total{kind="measured",`+load], 64)
			lost, _ := strconv.ParseFloat(all[`heatreeve_load_time_seconds_total{kind="missing",`+load], 64)
			if spent < least || lost > 2 {
				return fmt.Errorf("load-%d: %v s measured, want at least %v; %v s missing, want at most 2", i, spent, least, lost)
			}
		}
		return nil
	})
}
