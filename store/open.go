package store

import (
	"encoding/binary"
	"errors"
	"fmt"
	"io/fs"
	"log/slog"
	"math"
	"os"
	"path/filepath"
	"runtime/debug"
	"strconv"
	"strings"
	"time"

	bolt "go.etcd.io/bbolt"
	berrors "go.etcd.io/bbolt/errors"
)

// Version is the layout that this package writes. Open brings a file of a layout
// before it, from firstVersion on, up to it.
const (
	Version       = 3
	secondVersion = 2 // has hours, events and sealed readings
	firstVersion  = 1
)

var (
	// ErrLocked says that another process has the file open.
	ErrLocked = errors.New("file is locked")
	// ErrEmptied says that the file is there but holds nothing, as one that was
	// cut off does. It is not taken for a new history.
	ErrEmptied = errors.New("file is empty")
	// ErrDamaged says that the file, or a record in it, is not as it was written.
	ErrDamaged = errors.New("file is damaged")
	// ErrVersion says that the file has a layout that this package does not know.
	ErrVersion = errors.New("unknown layout version")
)

const (
	lockWait     = 2 * time.Second
	defaultBytes = 256 << 20
	fileSlack    = 16 << 20
	narrowFile   = 400 << 20 // greatest file where addresses have 32 bits
	growBytes    = 1 << 20

	// pieceMargin is what the tails leave free of a quarter page each, which is
	// the most that bbolt keeps inside another page. With it the root's page has
	// room for three tails, the greatest inline registers, and the rest, which
	// takes 753 bytes: 753 + 3·(P/4 − 248) + P/4 − 16 = P − 7.
	pieceMargin = 248

	fileMode = 0o600
)

const advice = "; stop the agent, move the file aside and restore a backup, or start without it for a new history"

// Open opens the history in the file at path, which it makes if there is none.
// The whole file is checked first: a damaged one is an error, and is never
// replaced by a new one. If most of the file is free pages, it is compacted.
func Open(path string, o Options) (*Store, error) {
	s, err := open(path, o)
	if err != nil {
		return nil, fmt.Errorf("open history %q: %w", path, err)
	}
	return s, nil
}

func open(path string, o Options) (*Store, error) {
	if err := create(path); err != nil {
		return nil, err
	}
	s := &Store{path: path, maxAge: o.MaxAge, maxHourAge: o.MaxHourAge, beatAge: o.BeatAge, maxBytes: o.MaxBytes, mostEvents: mostEvents,
		groupBytes: defaultGroup, log: o.Log, newest: math.MinInt64, sealing: newSealer(1), minuteSealing: newMinuteSealer()}
	if s.maxBytes <= 0 {
		s.maxBytes = defaultBytes
	}
	if s.beatAge <= 0 {
		s.beatAge = defaultBeatAge
	}
	if s.log == nil {
		s.log = slog.New(slog.DiscardHandler)
	}
	limit := fileLimit(s.maxBytes, o.MaxFile)
	err := guard(func() (err error) {
		if s.db, err = openChecked(path, limit); err != nil {
			return err
		}
		s.db, err = compact(s.db, limit, s.log)
		return err
	})
	if err != nil {
		return nil, err
	}
	s.piece = s.db.Info().PageSize/4 - pieceMargin
	if err := s.upgrade(); err != nil {
		return nil, errors.Join(err, s.db.Close())
	}
	err = s.view(func(tx *bolt.Tx) (err error) {
		s.open, err = loadOpen(tx)
		return err
	})
	if err != nil {
		return nil, errors.Join(fmt.Errorf("%w: %w%s", ErrDamaged, err, advice), s.db.Close())
	}
	if s.open.memory.through.seen {
		s.newest = s.open.memory.through.last
	}
	s.measure()
	return s, nil
}

func fileLimit(maxBytes, maxFile int64) int {
	if maxFile <= 0 {
		maxFile = maxBytes + maxBytes/8 + fileSlack
	}
	if strconv.IntSize == 32 {
		maxFile = min(maxFile, narrowFile)
	}
	return int(maxFile)
}

// boltOptions keeps the list of free pages out of the file, which spares each
// commit a page. Close puts it there.
func boltOptions(limit int) *bolt.Options {
	return &bolt.Options{
		Timeout:         lockWait,
		FreelistType:    bolt.FreelistMapType,
		NoFreelistSync:  true,
		InitialMmapSize: 64 << 20,
		MaxSize:         limit,
	}
}

// guard runs f, and returns as an error what f panics with, be it only a page
// that the file does not have.
func guard(f func() error) (err error) {
	defer debug.SetPanicOnFault(debug.SetPanicOnFault(true))
	defer func() {
		if r := recover(); r != nil {
			err = fmt.Errorf("%w: %v%s", ErrDamaged, r, advice)
		}
	}()
	return f()
}

// openChecked opens the file and returns it only if nothing is wrong with it.
func openChecked(path string, limit int) (*bolt.DB, error) {
	if err := checkFile(path); err != nil {
		return nil, err
	}
	return openBolt(path, limit)
}

func openBolt(path string, limit int) (*bolt.DB, error) {
	db, err := bolt.Open(path, fileMode, boltOptions(limit))
	if err != nil {
		return nil, openError(err)
	}
	db.AllocSize = growBytes
	return db, nil
}

func openError(err error) error {
	switch {
	case errors.Is(err, berrors.ErrTimeout):
		return fmt.Errorf("%w (waited %v); is another agent running?", ErrLocked, lockWait)
	case errors.Is(err, berrors.ErrInvalid), errors.Is(err, berrors.ErrChecksum), errors.Is(err, berrors.ErrVersionMismatch),
		strings.HasPrefix(err.Error(), "file size too small"): // bbolt has no name for this one
		return fmt.Errorf("%w: %w%s", ErrDamaged, err, advice)
	}
	return err
}

// checkFile looks at every page before bbolt does.
func checkFile(path string) error {
	o := boltOptions(0)
	o.ReadOnly = true
	db, err := bolt.Open(path, fileMode, o) // reads two pages only, and takes the lock
	if err != nil {
		return openError(err)
	}
	defer db.Close()
	f, err := os.Open(path)
	if err != nil {
		return err
	}
	defer f.Close()
	info, err := f.Stat()
	if err != nil {
		return err
	}
	return db.View(func(tx *bolt.Tx) error {
		if err := checkPages(tx, f, info.Size()); err != nil {
			return fmt.Errorf("%w: %w%s", ErrDamaged, err, advice)
		}
		return checkLayout(tx)
	})
}

// checkLayout looks at the version and for the buckets.
func checkLayout(tx *bolt.Tx) error {
	meta := tx.Bucket(bucketMeta)
	if meta == nil {
		return fmt.Errorf("%w: it has no bucket %q, so it is not a history", ErrVersion, bucketMeta)
	}
	v := meta.Get(keyVersion)
	version := versionOf(v)
	if version < firstVersion || version > Version {
		return fmt.Errorf("%w: it is %s, this program reads versions %d to %d; use the program that wrote it",
			ErrVersion, versionText(v), firstVersion, Version)
	}
	for _, name := range buckets(version) {
		if tx.Bucket(name) == nil {
			return fmt.Errorf("%w: it has no bucket %q%s", ErrDamaged, name, advice)
		}
	}
	return nil
}

// versionOf returns 0 for what is no version.
func versionOf(v []byte) uint32 {
	if len(v) != 4 {
		return 0
	}
	return binary.LittleEndian.Uint32(v)
}

func versionText(v []byte) string {
	if len(v) != 4 {
		return fmt.Sprintf("% x", v)
	}
	return fmt.Sprintf("version %d", binary.LittleEndian.Uint32(v))
}

// buckets lists those of a layout version.
func buckets(version uint32) [][]byte {
	all := [][]byte{bucketMeta, bucketNames, bucketJournal, bucketRecent, bucketMinutes, bucketRegisters, bucketState}
	for i := range tails {
		all = append(all, bucketTail(i))
	}
	if version >= secondVersion {
		all = append(all, bucketHours, bucketSealed, bucketEvents)
	}
	return all
}

// create makes an empty history at path if nothing is there. It comes under its
// name only when it is whole, so that a file under that name is never half made.
func create(path string) error {
	info, err := os.Stat(path)
	switch {
	case err == nil && info.Size() == 0:
		return fmt.Errorf("%w: it has been cut off, or was never written; restore a backup, or remove it to start a new history", ErrEmptied)
	case err == nil:
		return nil
	case !errors.Is(err, fs.ErrNotExist):
		return err
	}
	temp := path + ".new"
	if err := os.Remove(temp); err != nil && !errors.Is(err, fs.ErrNotExist) {
		return err
	}
	db, err := openBolt(temp, 0)
	if err != nil {
		return err
	}
	if err := errors.Join(db.Update(layOut), db.Close()); err != nil {
		return err
	}
	return moveTo(temp, path)
}

func layOut(tx *bolt.Tx) error {
	for _, name := range buckets(Version) {
		if _, err := tx.CreateBucket(name); err != nil {
			return err
		}
	}
	// A bucket that holds a bucket is never laid into the root's page, where
	// these would take the room of the tails.
	for _, name := range [][]byte{bucketNames, bucketMinutes, bucketHours, bucketEvents, bucketState} {
		if _, err := tx.Bucket(name).CreateBucket(keyPlaceholder); err != nil {
			return err
		}
	}
	if err := tx.Bucket(bucketRegisters).Put(keyRegisters, appendRegisters(nil, nil)); err != nil {
		return err
	}
	if err := tx.Bucket(bucketNames).Put(keyNames, appendNames(nil, nil)); err != nil {
		return err
	}
	if err := putCheckpoint(tx, checkpoint{}); err != nil {
		return err
	}
	if err := putHourMark(tx, unbuilt); err != nil {
		return err
	}
	meta := tx.Bucket(bucketMeta)
	if err := meta.Put(keyVersion, binary.LittleEndian.AppendUint32(nil, Version)); err != nil {
		return err
	}
	return meta.Put(keyCreated, binary.LittleEndian.AppendUint64(nil, uint64(time.Now().UnixNano())))
}

// moveTo renames a closed file and puts the change of name on the disk.
func moveTo(temp, path string) error {
	if err := os.Rename(temp, path); err != nil {
		return err
	}
	dir, err := os.Open(filepath.Dir(path))
	if err != nil {
		return err
	}
	return errors.Join(dir.Sync(), dir.Close())
}
