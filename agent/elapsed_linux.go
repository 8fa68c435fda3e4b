package agent

import (
	"time"

	"golang.org/x/sys/unix"
)

// boottime is the time since this machine was started, what it slept included
// (CLOCK_BOOTTIME), which CLOCK_MONOTONIC leaves out; ok is false where the kernel has none.
func boottime() (d time.Duration, ok bool) {
	var t unix.Timespec
	if unix.ClockGettime(unix.CLOCK_BOOTTIME, &t) != nil {
		return 0, false
	}
	return time.Duration(t.Nano()), true
}
