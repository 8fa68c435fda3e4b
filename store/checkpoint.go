package store

import (
	"encoding/binary"

	bolt "go.etcd.io/bbolt"
)

// putCheckpoint stores the engine's state as it is after record seq.
func putCheckpoint(tx *bolt.Tx, seq uint64, state []byte) error {
	value := binary.LittleEndian.AppendUint64(nil, seq)
	value = append(value, state...)
	value = binary.LittleEndian.AppendUint32(value, checksum(keyCheckpoint, value))
	return tx.Bucket(bucketState).Put(keyCheckpoint, value)
}

// readCheckpoint returns a copy of the state and the number of the last record
// that it stands for.
func readCheckpoint(tx *bolt.Tx) (seq uint64, state []byte, ok bool, err error) {
	v := tx.Bucket(bucketState).Get(keyCheckpoint)
	if v == nil {
		return 0, nil, false, nil
	}
	n := len(v) - 4
	if n < 8 || binary.LittleEndian.Uint32(v[n:]) != checksum(keyCheckpoint, v[:n]) {
		return 0, nil, false, errRecord
	}
	return binary.LittleEndian.Uint64(v), append([]byte{}, v[8:n]...), true, nil
}

// Checkpoint returns the state that the last batch with a Checkpoint brought. ok
// is false when there was none. The beats since then come from [Store.Since].
func (s *Store) Checkpoint() (state []byte, ok bool, err error) {
	err = s.view(func(tx *bolt.Tx) error {
		_, state, ok, err = readCheckpoint(tx)
		if err != nil {
			return s.damage("engine state", keyCheckpoint, err)
		}
		return nil
	})
	return state, ok, err
}
