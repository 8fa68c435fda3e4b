//go:build !linux

package agent

import "time"

// boottime is not to be had here.
func boottime() (time.Duration, bool) { return 0, false }
