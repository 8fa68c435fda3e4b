package agent

import (
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"time"

	"heatreeve/store"
)

// EventTime returns how far event time had come in the history of a data folder,
// or the zero time where there is no history yet. The agent must not be running
// on it.
func EventTime(data string) (t time.Time, err error) {
	path := filepath.Join(data, HistoryFile)
	if _, err := os.Stat(path); errors.Is(err, fs.ErrNotExist) {
		return time.Time{}, nil
	}
	db, err := store.Open(path, store.Options{})
	if err != nil {
		return time.Time{}, err
	}
	defer func() { err = errors.Join(err, db.Close()) }()
	return eventTime(db)
}

// eventTime is how far the beats in db come, or the zero time where there are none.
func eventTime(db *store.Store) (t time.Time, err error) {
	for _, beats := range []func(func(store.Beat, error) bool){db.Before(time.Minute), db.Since()} {
		for b, err := range beats {
			if err != nil {
				return time.Time{}, err
			}
			if at := time.Unix(0, b.Through); at.After(t) {
				t = at
			}
		}
	}
	return t, nil
}
