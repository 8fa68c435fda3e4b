package store

import (
	"errors"
	"fmt"
	"log/slog"
	"strings"
	"sync"
	"sync/atomic"
	"syscall"
	"time"

	bolt "go.etcd.io/bbolt"
	berrors "go.etcd.io/bbolt/errors"
)

var (
	bucketMeta      = []byte("meta")
	bucketNames     = []byte("names")
	bucketJournal   = []byte("journal")
	bucketRecent    = []byte("recent")
	bucketMinutes   = []byte("minutes")
	bucketHours     = []byte("hours")
	bucketSealed    = []byte("sealed")
	bucketEvents    = []byte("events")
	bucketRegisters = []byte("registers")
	bucketState     = []byte("state")
	bucketSites     = []byte("sites") // in that of the state

	keyVersion    = []byte("version")
	keyCreated    = []byte("created")
	keyHours      = []byte("hours")
	keyRecords    = []byte("r")
	keyNames      = []byte("all")
	keyRegisters  = []byte("all")
	keyCheckpoint = []byte("checkpoint")

	// keyPlaceholder names an empty bucket inside those that must have a page of
	// their own.
	keyPlaceholder = []byte{0}

	// keyFirstMinute is where the minutes begin, after the placeholder.
	keyFirstMinute = []byte{0, 0}
)

// tails is how many small buckets hold the end of the open group. Three of the
// largest that bbolt keeps inside the root's page fit there beside the rest.
const tails = 3

func bucketTail(i int) []byte { return []byte{'t', 'a', 'i', 'l', byte('0' + i)} }

// Options are what the history may take. The zero value sets no bounds on age,
// and the default bounds on bytes.
type Options struct {
	// MaxAge is how long readings and minutes are kept; 0 keeps them until
	// MaxBytes is reached.
	MaxAge time.Duration
	// MaxHourAge is how long hours and events are kept; 0 keeps them until MaxBytes is reached.
	MaxHourAge time.Duration
	// BeatAge is how long beats are kept as such for Before, counted in event time; 0
	// stands for one hour. Of older ones only the readings are kept, in less room.
	BeatAge time.Duration
	// MaxBytes bounds the pages in use; 0 stands for 256 MiB. Trim keeps to it.
	MaxBytes int64
	// MaxFile bounds the file, which holds free pages as well. At this size
	// Commit fails, and IsFull tells so. 0 stands for MaxBytes and an eighth and
	// 16 MiB more, and on a 32-bit machine for no more than 400 MB.
	MaxFile int64
	// Log hears of a compaction or a new layout at Open, of readings and minutes that cannot
	// be sealed, and of minutes that cannot be read for their hour; nil is silence.
	Log *slog.Logger
}

// Store is an open history. One goroutine at a time writes; any number may read
// meanwhile.
type Store struct {
	db         *bolt.DB
	path       string
	maxAge     time.Duration
	maxHourAge time.Duration
	beatAge    time.Duration
	log        *slog.Logger
	maxBytes   int64
	mostEvents int
	piece      int // bytes that one tail bucket may hold
	groupBytes int // size at which a group is closed

	used    atomic.Int64 // bytes of the pages in use
	damaged atomic.Int64
	lately  atomic.Pointer[lastColumn]

	mu      sync.Mutex // held while writing; guards what follows
	open    *openGroup // nil: to be read from the file before the next record
	newest  int64      // Through of the last beat
	sealing sealer
	torn    []error // what the transaction at hand cannot read and goes on without
	full    bool    // the last commit, or naming, found no room
	closed  bool

	minuteSealing minuteSealer
}

// Commit writes b in one transaction, which is on the disk when Commit returns
// nil. When it fails nothing of b is kept and the store goes on; if [IsFull] holds
// for the error, the same batch can be tried again after a [Store.Trim].
func (s *Store) Commit(b Batch) error {
	s.mu.Lock()
	defer s.mu.Unlock()
	open := s.open
	s.open = nil
	err := s.update(func(tx *bolt.Tx) (err error) {
		if open == nil {
			if open, err = loadOpen(tx); err != nil {
				return err
			}
		}
		return s.write(tx, b, open)
	})
	s.full = IsFull(err)
	if err != nil {
		return fmt.Errorf("commit to history %q: %w", s.path, err)
	}
	s.open = open
	readings := 0
	for _, beat := range b.Beats {
		s.newest = beat.Through
		readings += len(beat.Readings)
	}
	s.seal(readings)
	s.sealMinutes(b.Minutes)
	return nil
}

func (s *Store) write(tx *bolt.Tx, b Batch, open *openGroup) error {
	if len(b.Beats) > 0 {
		if err := open.add(tx, b.Beats, s.piece, s.groupBytes); err != nil {
			return fmt.Errorf("beats: %w", err)
		}
	}
	if len(b.Minutes) > 0 {
		if err := s.putMinutes(tx, b.Minutes); err != nil {
			return fmt.Errorf("minutes: %w", err)
		}
	}
	if err := s.putHours(tx, b.Minutes); err != nil {
		return fmt.Errorf("hours: %w", err)
	}
	if len(b.Registers) > 0 {
		if err := putRegisters(tx, b.Registers); err != nil {
			return fmt.Errorf("registers: %w", err)
		}
	}
	if len(b.Events) > 0 {
		if err := putEvents(tx, b.Events); err != nil {
			return fmt.Errorf("events: %w", err)
		}
	}
	if b.Site != nil {
		if err := s.putSite(tx, *b.Site); err != nil {
			return fmt.Errorf("site file: %w", err)
		}
	}
	if b.Checkpoint != nil {
		return putCheckpoint(tx, checkpoint{true, open.last, b.Checkpoint})
	}
	return nil
}

// IsFull tells whether err came of a full disk, or of the file having reached
// its greatest size: that of its options, or the most that the file system or the
// limits of the process allow.
func IsFull(err error) bool {
	if err == nil {
		return false
	}
	// bbolt drops the cause where growing the file fails, so the text is asked too.
	return errors.Is(err, berrors.ErrMaxSizeReached) || errors.Is(err, syscall.ENOSPC) ||
		errors.Is(err, syscall.EDQUOT) || errors.Is(err, syscall.EFBIG) || strings.Contains(err.Error(), syscall.ENOSPC.Error())
}

// update runs f in a read-write transaction. s.mu is held.
func (s *Store) update(f func(*bolt.Tx) error) error {
	if s.closed {
		return berrors.ErrDatabaseNotOpen
	}
	s.torn = nil
	err := guard(func() error { return s.db.Update(f) })
	s.measure()
	if err == nil && len(s.torn) > 0 {
		s.damaged.Add(int64(len(s.torn)))
		s.log.Warn("damaged records of the history are left out", "file", s.path, "keys", len(s.torn), "err", s.torn[0])
	}
	return err
}

// Damaged counts, since Open, the records that could not be read when something was to
// be made of them: keys and blocks of minutes (up to eight loads each) that are missing in
// their hour, were replaced or cannot be sealed, keys of hours that were replaced, groups that
// cannot be sealed, and what Trim removed unread. The log tells which. What only a reader meets, it is told itself.
func (s *Store) Damaged() int64 { return s.damaged.Load() }

func (s *Store) view(f func(*bolt.Tx) error) error {
	return guard(func() error { return s.db.View(f) })
}

// measure counts the pages in use. Only a closed database refuses, and then the
// count stays as it is.
func (s *Store) measure() {
	if _, used, err := usage(s.db); err == nil {
		s.used.Store(used)
	}
}

// Bytes returns how much of the file is in use. The file itself is longer by
// its free pages: it does not shrink while open.
func (s *Store) Bytes() int64 { return s.used.Load() }

// Close closes the file, after writing the list of its free pages to it, with which
// the next Open is quicker. A second Close does nothing.
func (s *Store) Close() error {
	s.mu.Lock()
	defer s.mu.Unlock()
	if s.closed {
		return nil
	}
	if !s.db.IsReadOnly() {
		s.db.NoFreelistSync = false
		if err := s.update(func(*bolt.Tx) error { return nil }); err != nil {
			s.log.Warn("the list of free pages is not written; the next start takes longer", "file", s.path, "err", err)
		}
	}
	s.closed = true
	return s.db.Close()
}
