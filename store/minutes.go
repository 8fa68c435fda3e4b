package store

import (
	"maps"
	"slices"
	"sort"

	bolt "go.etcd.io/bbolt"
)

// putMinutes replaces the minutes of the same load and start. Those that cannot be read
// under a key that is written make place and are counted.
func (s *Store) putMinutes(tx *bolt.Tx, changed []Minute) error {
	bucket := tx.Bucket(bucketMinutes)
	bucket.FillPercent = appendFill
	byKey := map[string][]Minute{}
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
