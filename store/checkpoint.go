package store

import (
	"encoding/binary"

	bolt "go.etcd.io/bbolt"
)

// checkpoint is the engine's state, and the number of the last record that it
// stands for. set is false until there is one; the value is there all the
// same, so that a lost one is seen.
type checkpoint struct {
	set   bool
	seq   uint64
	state []byte
}

func putCheckpoint(tx *bolt.Tx, c checkpoint) error {
	value := []byte{0}
	if c.set {
		value[0] = 1
	}
	value = binary.LittleEndian.AppendUint64(value, c.seq)
	value = append(value, c.state...)
	value = binary.LittleEndian.AppendUint32(value, checksum(keyCheckpoint, value))
	return tx.Bucket(bucketState).Put(keyCheckpoint, value)
}

// checkpoint reads what putCheckpoint wrote. The state is a copy.
func (s *Store) checkpoint(tx *bolt.Tx) (checkpoint, error) {
	v := tx.Bucket(bucketState).Get(keyCheckpoint)
	n := len(v) - 4
	if n < 9 || v[0] > 1 || binary.LittleEndian.Uint32(v[n:]) != checksum(keyCheckpoint, v[:n]) {
		return checkpoint{}, s.damage("engine state", keyCheckpoint, errRecord)
	}
	return checkpoint{v[0] == 1, binary.LittleEndian.Uint64(v[1:]), append([]byte{}, v[9:n]...)}, nil
}

// latest reads the checkpoint in a transaction of its own.
func (s *Store) latest() (c checkpoint, err error) {
	err = s.view(func(tx *bolt.Tx) (err error) {
		c, err = s.checkpoint(tx)
		return err
	})
	return c, err
}

// Checkpoint returns the state that the last batch with a Checkpoint brought. ok
// is false when there was none. The beats since then come from [Store.Since].
func (s *Store) Checkpoint() (state []byte, ok bool, err error) {
	c, err := s.latest()
	if err != nil || !c.set {
		return nil, false, err
	}
	return c.state, true, nil
}
