package store

import (
	"os"
	"syscall"
)

const (
	memoryFolder = "/dev/shm"
	memoryRoom   = 256 << 20 // several times what the tests have open together
)

// init puts the files of the tests in memory, if there is room and TMPDIR does not name
// another place: nearly all of their time on a disk is spent on syncs, and no test can see
// whether these reach it. What a power cut leaves is made up from the writes (see watch).
func init() {
	var fs syscall.Statfs_t
	if os.Getenv("TMPDIR") != "" || syscall.Statfs(memoryFolder, &fs) != nil || uint64(fs.Bsize)*fs.Bavail < memoryRoom {
		return
	}
	if probe, err := os.MkdirTemp(memoryFolder, "heatreeve-store"); err == nil {
		os.Remove(probe)
		os.Setenv("TMPDIR", memoryFolder)
	}
}
