package store

import (
	"encoding/binary"
	"fmt"

	bolt "go.etcd.io/bbolt"
)

// upgrade brings a file of a layout before to the present one. It adds what is
// new and takes nothing away; minutes stay as they are, and are sealed by the commits that
// follow. So are their hours built, and told from the minutes until then.
func (s *Store) upgrade() error {
	version, err := s.version()
	if err != nil || version == Version {
		return err
	}
	err = s.update(func(tx *bolt.Tx) error {
		if version < secondVersion {
			if err := upgradeToSecond(tx); err != nil {
				return err
			}
		}
		if _, err := tx.Bucket(bucketMinutes).CreateBucketIfNotExists(keyPlaceholder); err != nil {
			return err
		}
		return tx.Bucket(bucketMeta).Put(keyVersion, binary.LittleEndian.AppendUint32(nil, Version))
	})
	if err != nil {
		return fmt.Errorf("bring it from layout version %d to %d: %w", version, Version, err)
	}
	s.log.Info("history has a new layout", "file", s.path, "before", version, "now", Version)
	return nil
}

func (s *Store) version() (version uint32, err error) {
	err = s.view(func(tx *bolt.Tx) error {
		version = versionOf(tx.Bucket(bucketMeta).Get(keyVersion))
		return nil
	})
	return version, err
}

func upgradeToSecond(tx *bolt.Tx) error {
	if _, err := tx.CreateBucket(bucketSealed); err != nil {
		return err
	}
	// The tails make room in the root's page for the new buckets.
	open, err := loadOpen(tx)
	if err != nil {
		return fmt.Errorf("%w: %w%s", ErrDamaged, err, advice)
	}
	if len(open.tail) > 0 {
		if err := open.flush(tx); err != nil {
			return err
		}
	}
	hours, err := tx.CreateBucket(bucketHours)
	if err != nil {
		return err
	}
	if _, err := hours.CreateBucket(keyPlaceholder); err != nil {
		return err
	}
	if err := createEvents(tx); err != nil {
		return err
	}
	if err := putHourMark(tx, unbuilt); err != nil {
		return err
	}
	return upgradeRegisters(tx.Bucket(bucketRegisters))
}

func upgradeRegisters(b *bolt.Bucket) error {
	all, err := parseRegistersOf(b.Get(keyRegisters), firstRegisterFloats)
	if err != nil {
		return fmt.Errorf("%w: registers: %w%s", ErrDamaged, err, advice)
	}
	return b.Put(keyRegisters, appendRegisters(nil, all))
}
