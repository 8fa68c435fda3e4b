//go:build services

package main

import (
	"fmt"
	"math"
	"strings"
	"syscall"
	"testing"
	"time"
	"unsafe"
)

// fileSize bounds how long a file the process may write (RLIMIT_FSIZE, prlimit(2)): with
// 0 its disk takes nothing, whoever it runs as and on whatever file system. It needs no
// rights beyond those over a process of one's own.
func (p *process) fileSize(t *testing.T, most uint64) {
	t.Helper()
	const resource = 1 // RLIMIT_FSIZE
	limit := struct{ soft, hard uint64 }{most, math.MaxUint64}
	_, _, errno := syscall.RawSyscall6(syscall.SYS_PRLIMIT64, uintptr(p.cmd.Process.Pid), resource, uintptr(unsafe.Pointer(&limit)), 0, 0, 0)
	if errno != 0 {
		t.Fatalf("prlimit of process %d: %v", p.cmd.Process.Pid, errno)
	}
}

const (
	noDisk    = 0
	wholeDisk = math.MaxUint64
)

const (
	unacknowledged = "heatreeve_broker_unacknowledged_messages"
	eventTime      = "heatreeve_event_timestamp_seconds"
	writable       = "heatreeve_history_writable"
	failures       = "heatreeve_history_commit_failures_total"
)

// becomes waits until a series has the value.
func (a *agentUnderTest) becomes(t *testing.T, series string, want float64) {
	t.Helper()
	eventually(t, series, func() error {
		if v := a.value(t, series); v != want {
			return fmt.Errorf("is %v, want %v", v, want)
		}
		return nil
	})
}

// onTwo starts two agents on one broker: one with a disk that will fail, and one without.
func onTwo(t *testing.T, b *broker) (hit, calm *agentUnderTest) {
	t.Helper()
	hit, calm = startAgent(t, circuitSite(t, b, "hit")), startAgent(t, circuitSite(t, b, "calm"))
	hit.subscribed(t, b, "bench/all", "TT-1")
	calm.subscribed(t, b, "bench/all", "TT-1")
	return hit, calm
}

// wander publishes the circuit each second from base (Unix milliseconds) + from to
// + until seconds, one message each interval.
func (l *lines) wander(t *testing.T, base, from, until int64, interval time.Duration) {
	t.Helper()
	pace := time.NewTicker(interval)
	defer pace.Stop()
	for s := from; s < until; s++ {
		<-pace.C
		l.send(t, `{"ti":%.2f,"to":%.2f,"q":%.3f,"p":3.2,"ts":%d}`, 80+float64(s%37)/3, 55+float64(s%11)/7, 20+float64(s%53)/9, base+s*1000)
	}
}

// sameRegisters compares the registers of the circuit, to the last bit.
func sameRegisters(t *testing.T, got, want *agentUnderTest) {
	t.Helper()
	a, err := got.series()
	if err != nil {
		t.Fatal(err)
	}
	b, err := want.series()
	if err != nil {
		t.Fatal(err)
	}
	for _, series := range []string{given, taken, measured, missing} {
		if a[series] != b[series] {
			t.Errorf("%s = %s, want %s as with a good disk", series, a[series], b[series])
		}
	}
}

// The disk takes nothing for a while. The agent goes on with the readings that the
// broker sends, says so, acknowledges none of them, and writes all once it can; killed
// meanwhile, it has all of them again from the broker.
func TestDiskThatTakesNothing(t *testing.T) {
	t.Parallel() // it waits more than it works
	for _, how := range []string{"room returns", "killed meanwhile"} {
		t.Run(how, func(t *testing.T) {
			b := startBroker(t)
			hit, calm := onTwo(t, b)
			base := time.Now().Add(-time.Hour).Truncate(time.Minute).UnixMilli()
			pub := b.lines(t, "bench/all")
			pub.wander(t, base, 0, 100, 2*time.Millisecond)
			hit.reaches(t, measured, 90)
			hit.becomes(t, unacknowledged, 0)
			onDisk := hit.value(t, given)

			hit.fileSize(t, noDisk)
			pub.wander(t, base, 100, 500, 2*time.Millisecond)
			hit.reaches(t, failures, 2)
			hit.becomes(t, writable, 0)
			hit.reaches(t, eventTime, float64(base/1000+490))
			hit.becomes(t, unacknowledged, 400)
			if v := hit.value(t, given); v != onDisk {
				t.Errorf("given heat is %v J while nothing can be written, want %v as on disk", v, onDisk)
			}
			if _, err := hit.get("/readyz"); err == nil || !strings.Contains(err.Error(), "history: ") {
				t.Errorf("/readyz: %v; want it to tell of the history", err)
			}
			if _, err := hit.get("/healthz"); err != nil {
				t.Errorf("/healthz: %v; the agent itself is well", err)
			}
			if how == "killed meanwhile" {
				hit.end(t, syscall.SIGKILL)
				hit.start(t)
			} else {
				hit.fileSize(t, wholeDisk)
			}
			hit.becomes(t, writable, 1)
			pub.wander(t, base, 500, 600, 2*time.Millisecond)
			pub.close(t)
			for _, a := range []*agentUnderTest{hit, calm} {
				a.reaches(t, measured, 600-1-5-1)
				a.becomes(t, unacknowledged, 0)
			}
			if _, err := hit.get("/readyz"); err != nil {
				t.Errorf("/readyz: %v; all is well again", err)
			}
			sameRegisters(t, hit, calm)
		})
	}
}

// A broker with its own small limits stops sending when the disk takes nothing. The
// readings stay with it as long as its queue may be taken to have room; then the agent
// goes on in memory. Nothing is lost, though twice as much comes as the broker could keep, and none of it is acknowledged before it must be.
func TestDiskThatTakesNothingForLong(t *testing.T) {
	t.Parallel() // it waits more than it works
	b := startBrokerWith(t, "max_inflight_messages 20\nmax_queued_messages 1000\n")
	hit, calm := onTwo(t, b)
	base := time.Now().Add(-2 * time.Hour).Truncate(time.Minute).UnixMilli()
	pub := b.lines(t, "bench/all")
	const rate = 100 // messages a second
	pub.wander(t, base, 0, 1500, time.Second/rate)
	hit.reaches(t, measured, 1490)

	hit.fileSize(t, noDisk)
	begun := time.Now()
	const memory = "going on in memory"
	s := int64(1500)
	for ; s < 5000 && !strings.Contains(hit.out.String(), memory); s += 10 {
		pub.wander(t, base, s, s+10, time.Second/rate)
	}
	held := time.Since(begun)
	t.Logf("the readings stayed with the broker for %.1f s", held.Seconds())
	if held < 3*time.Second || s >= 5000 {
		t.Errorf("on in memory after %.1f s; at %d messages a second a queue of 1,000 holds for ten", held.Seconds(), rate)
	}
	pub.wander(t, base, s, s+1500, time.Second/rate)
	s += 1500
	hit.reaches(t, eventTime, float64(base/1000+s-10))
	if v := hit.value(t, writable); v != 0 {
		t.Errorf("%s is %v, want 0", writable, v)
	}
	hit.fileSize(t, wholeDisk)
	hit.becomes(t, writable, 1)
	pub.wander(t, base, s, s+100, time.Second/rate)
	pub.close(t)
	for _, a := range []*agentUnderTest{hit, calm} {
		a.reaches(t, measured, float64(s+100-1-5-1))
		a.becomes(t, unacknowledged, 0)
	}
	sameRegisters(t, hit, calm)
	if v := hit.value(t, missing); v != 0 {
		t.Errorf("missing %v s, want 0", v)
	}
}
