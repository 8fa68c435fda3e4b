package store

import (
	"errors"
	"fmt"
	"log/slog"
	"os"
	"time"

	bolt "go.etcd.io/bbolt"
	berrors "go.etcd.io/bbolt/errors"
)

// readWait is how long a reader waits for the lock: an agent that has it keeps it.
const readWait = 200 * time.Millisecond

// OpenReadOnly opens the history in the file at path to read it only. Nothing is
// written, made or compacted, so that a medium that takes no writes will do; the
// file is checked as Open does. Any number of readers may have it open together, but
// no writer with them: the error is [ErrLocked] where one has it. A file of an older layout
// is an error, since bringing it up to this one is a write. Of what is returned, all that
// writes fails, and Bytes is the size of the file.
func OpenReadOnly(path string) (*Store, error) {
	s, err := openReadOnly(path, boltOptions(0))
	if err != nil {
		return nil, fmt.Errorf("open history %q: %w", path, err)
	}
	return s, nil
}

func openReadOnly(path string, o *bolt.Options) (s *Store, err error) {
	info, err := os.Stat(path)
	switch {
	case err != nil:
		return nil, err
	case info.Size() == 0:
		return nil, fmt.Errorf("%w: it has been cut off, or was never written; read a backup", ErrEmptied)
	}
	o.ReadOnly, o.Timeout = true, readWait
	s = &Store{path: path, log: slog.New(slog.DiscardHandler)}
	err = guard(func() (err error) {
		s.db, err = bolt.Open(path, 0, o)
		switch {
		case errors.Is(err, berrors.ErrTimeout):
			return fmt.Errorf("%w (waited %v); does an agent run on it?", ErrLocked, readWait)
		case err != nil:
			return openError(err)
		}
		return s.db.View(s.readable)
	})
	if err != nil && s.db != nil {
		err = errors.Join(err, s.db.Close())
	}
	return s, err
}

// readable looks at all pages, and at the layout.
func (s *Store) readable(tx *bolt.Tx) error {
	f, err := os.Open(s.path)
	if err != nil {
		return err
	}
	defer f.Close()
	info, err := f.Stat()
	if err != nil {
		return err
	}
	s.used.Store(info.Size())
	if err := checkPages(tx, f, info.Size()); err != nil {
		return fmt.Errorf("%w: %w%s", ErrDamaged, err, advice)
	}
	if err := checkLayout(tx); err != nil {
		return err
	}
	if v := versionOf(tx.Bucket(bucketMeta).Get(keyVersion)); v < Version {
		return fmt.Errorf("it has layout version %d, and version %d is read; start the agent once on it, or on a copy, which brings it there", v, Version)
	}
	if _, err := loadOpen(tx); err != nil {
		return fmt.Errorf("%w: %w%s", ErrDamaged, err, advice)
	}
	return nil
}
