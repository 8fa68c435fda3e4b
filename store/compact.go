package store

import (
	"errors"
	"io/fs"
	"log/slog"
	"os"

	bolt "go.etcd.io/bbolt"
)

const (
	// compactFrom is the least size at which a compaction pays.
	compactFrom = 8 << 20
	// compactSlice is how many bytes one transaction of a compaction copies.
	compactSlice = 1 << 20
)

// compact copies the file without its free pages when these are more than half
// of it, and returns the database to go on with. The copy takes the old file's
// place only when it is whole and on the disk; if it cannot be made, the old one
// stays in use.
func compact(db *bolt.DB, limit int, log *slog.Logger) (*bolt.DB, error) {
	size, used, err := usage(db)
	if err != nil || size <= compactFrom || used*2 >= size {
		return db, err
	}
	path := db.Path()
	temp := path + ".compact"
	if err := copyTo(temp, db); err != nil {
		log.Warn("history not compacted", "file", path, "err", err)
		if err := os.Remove(temp); err != nil && !errors.Is(err, fs.ErrNotExist) {
			log.Warn("copy not removed", "err", err)
		}
		return db, nil
	}
	// The new file stands before the old one lets go of its lock.
	if err := errors.Join(moveTo(temp, path), db.Close()); err != nil {
		return nil, err
	}
	log.Info("history compacted", "file", path, "before", size, "used", used)
	return openChecked(path, limit)
}

// copyTo writes the pages in use to a new file and closes it.
func copyTo(path string, db *bolt.DB) error {
	if err := os.Remove(path); err != nil && !errors.Is(err, fs.ErrNotExist) {
		return err
	}
	to, err := openBolt(path, 0)
	if err != nil {
		return err
	}
	return errors.Join(bolt.Compact(to, db, compactSlice), to.Sync(), to.Close())
}

// usage returns the size of the file as bbolt fills it, and how much of that is
// in use.
func usage(db *bolt.DB) (size, used int64, err error) {
	err = db.View(func(tx *bolt.Tx) error {
		stats := db.Stats()
		size = tx.Size()
		used = size - int64(stats.FreePageN+stats.PendingPageN)*int64(db.Info().PageSize)
		return nil
	})
	return size, used, err
}
