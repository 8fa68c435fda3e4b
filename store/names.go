package store

import (
	"encoding/binary"
	"fmt"

	bolt "go.etcd.io/bbolt"
)

// ID returns the number that stands for name among those of kind ("tag",
// "load"), giving it the next free one if it has none yet. A number is never
// given twice.
func (s *Store) ID(kind, name string) (uint32, error) {
	ids, err := s.IDs(kind, []string{name})
	if err != nil {
		return 0, err
	}
	return ids[0], nil
}

// IDs is ID for many names in one transaction. When all are known it writes
// nothing. If [IsFull] holds for the error, it can be tried again after a [Store.Trim].
func (s *Store) IDs(kind string, names []string) ([]uint32, error) {
	known, err := s.Names(kind)
	if err != nil {
		return nil, err
	}
	ids := make([]uint32, len(names))
	missing := false
	for i, name := range names {
		id, ok := known[name]
		ids[i], missing = id, missing || !ok
	}
	if !missing {
		return ids, nil
	}
	s.mu.Lock()
	defer s.mu.Unlock()
	err = s.update(func(tx *bolt.Tx) (err error) {
		ids, err = s.number(tx, kind, names)
		return err
	})
	s.full = IsFull(err)
	if err != nil {
		return nil, fmt.Errorf("number the names in history %q: %w", s.path, err)
	}
	return ids, nil
}

// Names returns all names of kind and their numbers.
func (s *Store) Names(kind string) (map[string]uint32, error) {
	known := map[string]uint32{}
	err := s.view(func(tx *bolt.Tx) error {
		all, err := s.names(tx)
		for _, n := range all {
			if n.kind == kind {
				known[n.name] = n.id
			}
		}
		return err
	})
	return known, err
}

// named is one name and its number.
type named struct {
	id         uint32
	kind, name string
}

// appendNames writes all names as one value, so that none can be missing
// unnoticed: its number would be given again.
func appendNames(b []byte, all []named) []byte {
	for _, n := range all {
		b = binary.LittleEndian.AppendUint32(b, n.id)
		for _, text := range []string{n.kind, n.name} {
			b = binary.AppendUvarint(b, uint64(len(text)))
			b = append(b, text...)
		}
	}
	return binary.LittleEndian.AppendUint32(b, checksum(keyNames, b))
}

func parseNames(value []byte) (all []named, err error) {
	n := len(value) - 4
	if n < 0 || binary.LittleEndian.Uint32(value[n:]) != checksum(keyNames, value[:n]) {
		return nil, errRecord
	}
	for p := (parser{rest: value[:n]}); len(p.rest) > 0; {
		id := p.take(4)
		kind, name := p.take(p.uvarint()), p.take(p.uvarint())
		if p.bad {
			return nil, errRecord
		}
		all = append(all, named{binary.LittleEndian.Uint32(id), string(kind), string(name)})
	}
	return all, nil
}

func (s *Store) names(tx *bolt.Tx) ([]named, error) {
	all, err := parseNames(tx.Bucket(bucketNames).Get(keyNames))
	if err != nil {
		return nil, s.damage("names", keyNames, err)
	}
	return all, nil
}

// number returns the numbers of names, and gives the next ones to those that have
// none.
func (s *Store) number(tx *bolt.Tx, kind string, names []string) ([]uint32, error) {
	all, err := s.names(tx)
	if err != nil {
		return nil, err
	}
	known := map[string]uint32{}
	var greatest uint32
	for _, n := range all {
		greatest = max(greatest, n.id)
		if n.kind == kind {
			known[n.name] = n.id
		}
	}
	ids := make([]uint32, len(names))
	for i, name := range names {
		if _, ok := known[name]; !ok {
			greatest++
			known[name] = greatest
			all = append(all, named{greatest, kind, name})
		}
		ids[i] = known[name]
	}
	return ids, tx.Bucket(bucketNames).Put(keyNames, appendNames(nil, all))
}
