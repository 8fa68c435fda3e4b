package store

import (
	"bytes"
	"crypto/sha256"
	"errors"
	"fmt"
	"math"
	"slices"

	bolt "go.etcd.io/bbolt"
)

// mostSites bounds how many changes of the site file Trim leaves.
const mostSites = 1000

var errMissing = errors.New("it is missing")

// putSite keeps f, unless the text in force is the same. Of two that begin at one time, or in
// the wrong order, the later one to come is in force from there on.
func (s *Store) putSite(tx *bolt.Tx, f SiteFile) error {
	if len(f.Text) > mostSiteText {
		return fmt.Errorf("text of %d bytes: at most %d are kept", len(f.Text), mostSiteText)
	}
	bucket, err := makeSites(tx)
	if err != nil {
		return err
	}
	digest := sha256.Sum256(f.Text)
	text, err := parseText(digest[:], bucket.Get(digest[:]))
	if last, ok := newestSite(bucket); ok {
		if err == nil && last.Digest == digest && bytes.Equal(text, f.Text) {
			return nil
		}
		if f.From <= last.From && last.From < math.MaxInt64 {
			f.From = last.From + 1
		}
	}
	if err != nil {
		packed, err := appendText(digest[:], f.Text)
		if err != nil {
			return err
		}
		if err := bucket.Put(digest[:], packed); err != nil {
			return err
		}
	}
	key := siteKey(f.From)
	return bucket.Put(key, summed(key, digest[:]))
}

// sites is the bucket of site files, nil before the first.
func sites(tx *bolt.Tx) *bolt.Bucket { return tx.Bucket(bucketState).Bucket(bucketSites) }

// makeSites makes it where it is not there. It lies in that of the state, since the root's
// page has no room for it, and has a page of its own, since the state is often written.
func makeSites(tx *bolt.Tx) (*bolt.Bucket, error) {
	bucket, err := tx.Bucket(bucketState).CreateBucketIfNotExists(bucketSites)
	if err != nil {
		return nil, err
	}
	_, err = bucket.CreateBucketIfNotExists(keyPlaceholder)
	return bucket, err
}

// siteTimes are the beginnings of texts, in order; those that cannot be read are passed to
// damaged.
func siteTimes(bucket *bolt.Bucket, damaged func(key []byte, err error)) (all []SiteFile) {
	if bucket == nil {
		return nil
	}
	c := bucket.Cursor()
	for k, v := c.First(); k != nil; k, v = c.Next() {
		if !isSiteTime(k) || v == nil {
			continue
		}
		f, err := parseSiteTime(k, v)
		if err != nil {
			damaged(k, err)
			continue
		}
		all = append(all, f)
	}
	return all
}

func newestSite(bucket *bolt.Bucket) (f SiteFile, ok bool) {
	all := siteTimes(bucket, func([]byte, error) {})
	if len(all) == 0 {
		return f, false
	}
	return all[len(all)-1], true
}

// Sites returns since when which site file was in force, by time and without the texts. What
// is damaged is told as an error, beside the others.
func (s *Store) Sites() (all []SiteFile, err error) {
	viewed := s.view(func(tx *bolt.Tx) error {
		all = siteTimes(sites(tx), func(key []byte, bad error) { err = s.damage("site file", key, bad) })
		return nil
	})
	if viewed != nil {
		return nil, viewed
	}
	return all, err
}

// SiteText returns the text of that digest; it is nil where none such was ever in force.
func (s *Store) SiteText(digest [32]byte) (text []byte, err error) {
	err = s.view(func(tx *bolt.Tx) (err error) {
		bucket := sites(tx)
		if bucket == nil {
			return nil
		}
		packed := bucket.Get(digest[:])
		if packed == nil {
			if slices.ContainsFunc(siteTimes(bucket, func([]byte, error) {}), func(f SiteFile) bool { return f.Digest == digest }) {
				return s.damage("text of a site file", digest[:], errMissing)
			}
			return nil
		}
		if text, err = parseText(digest[:], packed); err != nil {
			return s.damage("text of a site file", digest[:], err)
		}
		return nil
	})
	return text, err
}

// trimSites removes from the front what has been out of force since before old, or makes up
// the excess, and what is too many; the text in force stays. It goes with its beginning,
// unless another has it too.
func (s *Store) trimSites(tx *bolt.Tx, old, excess int64, t *Trimmed) (more bool, err error) {
	bucket := sites(tx)
	if bucket == nil {
		return false, nil
	}
	var damaged [][]byte
	all := siteTimes(bucket, func(key []byte, _ error) { damaged = append(damaged, bytes.Clone(key)) })
	gone := 0
	for gone+1 < len(all) && (all[gone+1].From <= old || excess > 0 || len(all)-gone > mostSites) {
		excess -= int64(len(bucket.Get(all[gone].Digest[:])) + perKey)
		gone++
	}
	if gone == 0 {
		return false, nil
	}
	for _, key := range damaged {
		if string(key) < string(siteKey(all[gone].From)) {
			t.Damaged++
			if err := bucket.Delete(key); err != nil {
				return false, err
			}
		}
	}
	left := map[[32]byte]bool{}
	for _, f := range all[gone:] {
		left[f.Digest] = true
	}
	for _, f := range all[:gone] {
		t.Sites++
		if err := bucket.Delete(siteKey(f.From)); err != nil {
			return false, err
		}
		if !left[f.Digest] {
			if err := bucket.Delete(f.Digest[:]); err != nil {
				return false, err
			}
		}
	}
	return false, nil
}
