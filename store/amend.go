package store

import (
	"errors"
	"fmt"

	bolt "go.etcd.io/bbolt"
)

// Amend replaces the state of the last checkpoint, which goes on being that of the same
// beats, and tells events with it, in one transaction. It is for who knows how to change the
// state and has no beats to bring. The error tells where there is no checkpoint.
func (s *Store) Amend(state []byte, events []Event) error {
	s.mu.Lock()
	defer s.mu.Unlock()
	err := s.update(func(tx *bolt.Tx) error {
		c, err := s.checkpoint(tx)
		switch {
		case err != nil:
			return err
		case !c.set:
			return errors.New("there is no state to amend")
		}
		c.state = state
		if err := putEvents(tx, events); err != nil {
			return fmt.Errorf("events: %w", err)
		}
		return putCheckpoint(tx, c)
	})
	if err != nil {
		return fmt.Errorf("amend history %q: %w", s.path, err)
	}
	return nil
}
