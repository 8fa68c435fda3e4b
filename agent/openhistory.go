package agent

import (
	"context"
	"errors"
	"os"
	"syscall"
	"time"

	"heatreeve/store"
)

const (
	// lookForReaders is how often the agent looks whether a history is still being read.
	lookForReaders = 500 * time.Millisecond
	// tellReaders is how often the log tells that the start waits for that.
	tellReaders = time.Minute
	// readersStatus tells a service manager so, and asks for time beyond the next look.
	readersStatus = "STATUS=waits until nobody reads the history any more\nEXTEND_TIMEOUT_USEC=30000000"
)

// openHistory opens the history at path. While it is only read, as reports and exports do
// where no agent runs, it waits; another agent does not go away, and is an error. The
// error is that of ctx where it ends meanwhile.
func openHistory(ctx context.Context, path string, o store.Options) (*store.Store, error) {
	for {
		db, err := store.Open(path, o)
		if !errors.Is(err, store.ErrLocked) || !lockable(path, syscall.LOCK_SH) {
			return db, salvageable(path, err)
		}
		o.Log.Warn("the history is being read, and the start waits for that: end the report or export on it", "history", path)
		if err := awaitReaders(ctx, path, time.Now().Add(tellReaders)); err != nil {
			return nil, err
		}
	}
}

// awaitReaders waits until nobody reads the history, somebody writes it, or the deadline has
// passed.
func awaitReaders(ctx context.Context, path string, deadline time.Time) error {
	look := time.NewTicker(lookForReaders)
	defer look.Stop()
	for {
		select {
		case <-ctx.Done():
			return ctx.Err()
		case now := <-look.C:
			if lockable(path, syscall.LOCK_EX) || !lockable(path, syscall.LOCK_SH) || now.After(deadline) {
				return nil
			}
			notify(readersStatus)
		}
	}
}

// lockable tells whether the file's lock can be had now, alone or with readers. It is given
// back at once.
func lockable(path string, how int) bool {
	f, err := os.Open(path)
	if err != nil {
		return false
	}
	defer f.Close()
	return syscall.Flock(int(f.Fd()), how|syscall.LOCK_NB) == nil
}
