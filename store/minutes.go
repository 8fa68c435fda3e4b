package store

import (
	"maps"
	"slices"
	"sort"

	bolt "go.etcd.io/bbolt"
)

// putMinutes replaces the minutes of the same load and start. Those that cannot be read
// under a key that is written make place and are counted. A key whose minutes are sealed
// is written with all that its block has of it, before which it stands from then on.
func (s *Store) putMinutes(tx *bolt.Tx, changed []Minute) error {
	bucket := tx.Bucket(bucketMinutes)
	bucket.FillPercent = appendFill
	byKey := map[string][]Minute{}
	var sealed sealedMinutes
	for _, m := range changed {
		key := minuteKey(m.Start, m.Load)
		all, ok := byKey[string(key)]
		if !ok {
			if old := bucket.Get(key); old != nil {
				var err error
				if all, err = parseMinutes(nil, key, old, anyLoad); err != nil {
					s.torn = append(s.torn, s.damage("minutes, now replaced,", key, err))
					all = nil
				}
			} else {
				all = sealed.at(tx, m)
			}
		}
		i := sort.Search(len(all), func(i int) bool { return all[i].Load >= m.Load })
		if i == len(all) || all[i].Load != m.Load {
			all = slices.Insert(all, i, m)
		}
		all[i] = m
		byKey[string(key)] = all
	}
	for _, key := range slices.Sorted(maps.Keys(byKey)) {
		if err := bucket.Put([]byte(key), appendMinutes(nil, []byte(key), byKey[key])); err != nil {
			return err
		}
	}
	return nil
}

// sealedMinutes finds what blocks hold under a key of minutes, and keeps the last block for
// the next key.
type sealedMinutes struct {
	key   string
	found []Minute
}

// at returns the minutes that share a key with m, by load. What is damaged is told where the block
// itself is read.
func (z *sealedMinutes) at(tx *bolt.Tx, m Minute) (all []Minute) {
	key, block := minuteBlock(tx, m.Start, m.Load)
	if block == nil {
		return nil
	}
	if z.key != string(key) {
		z.key = string(key)
		z.found, _ = parseMinuteBlock(z.found[:0], key, block, anyLoad)
	}
	for _, other := range z.found {
		if other.Start == m.Start {
			all = append(all, other)
		}
	}
	return all
}
