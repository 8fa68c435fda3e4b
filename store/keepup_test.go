package store

import (
	"testing"
	"time"

	bolt "go.etcd.io/bbolt"
)

// unsealed counts the readings in closed groups that are old enough for a block.
func unsealed(t *testing.T, s *Store) (readings int) {
	t.Helper()
	err := s.view(func(tx *bolt.Tx) error {
		c := tx.Bucket(bucketJournal).Cursor()
		for k, _ := c.First(); k != nil; k, _ = c.Next() {
			head, err := parseName(k)
			if err != nil {
				return err
			}
			if head.latest+int64(s.beatAge) <= s.newest {
				readings += int(head.readings)
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	return readings
}

// TestSealKeepsUp commits many readings at a time, against which the least share of the
// work is little: those that wait are never more than one block takes in and another
// while that is written, and no commit does more than its share and one step. The more
// tags there are, the more beginning their columns takes of the work.
func TestSealKeepsUp(t *testing.T) {
	for _, tt := range []struct {
		what                   string
		tags, seconds, commits int
	}{{"blocks of the usual size", 300, 200, 12}, {"blocks as wide as their tags", 600, 100, 14}, {"blocks of the greatest size", 8000, 10, 30}} {
		t.Run(tt.what, func(t *testing.T) {
			t.Parallel()
			s := newStore(t, Options{BeatAge: time.Minute, MaxBytes: 1 << 30})
			s.db.NoSync = true // nothing cuts the power
			w := newDriftWalk(tt.tags, 1)
			most := 0
			for range tt.commits {
				commit(t, s, Batch{Beats: w.beats(tt.seconds), Checkpoint: []byte("state")})
				most = max(most, unsealed(t, s))
				if s.sealing.owed < 0 || s.sealing.owed > max(sealWrite, 2*tt.tags*tt.seconds) { // one group's readings
					t.Fatalf("a commit did %d readings' worth beyond its share", s.sealing.owed)
				}
			}
			brought := tt.tags * tt.seconds
			if bound := 2*s.sealing.wanted(tt.tags) + brought; most > bound || most < brought {
				t.Errorf("up to %d readings wait for a block, want no more than %d", most, bound)
			}
			if blocks, _ := sealedGroups(t, s); blocks < 3 {
				t.Errorf("%d blocks are made, want 3", blocks)
			}
		})
	}
}

// TestSealShare adds up the work of making two blocks: what a commit is to do of it for
// each reading it brings is a quarter more than that.
func TestSealShare(t *testing.T) {
	t.Parallel()
	for _, tags := range []int{50, 600, 8000} {
		s := newStore(t, Options{BeatAge: time.Second, MaxBytes: 1 << 30})
		s.db.NoSync = true // nothing cuts the power
		w := newDriftWalk(tags, 1)
		work, sealed := 0, 0
		for blocks := 0; blocks < 2; {
			s.sealing.owed = 1 << 30 // so that the commit leaves all work
			commit(t, s, Batch{Beats: w.beats(40_000 / tags), Checkpoint: []byte("state")})
			for cost := 1; cost > 0 && blocks < 2; {
				readings, finished := int(s.sealing.span.readings), s.sealing.block != nil
				var err error
				if cost, err = s.sealStep(); err != nil {
					t.Fatal(err)
				}
				work += cost
				if finished {
					sealed += readings
					blocks++
				}
			}
		}
		share := s.sealing.share(sealed) - sealAtLeast
		if ratio := float64(share) / float64(work); ratio < 1.15 || ratio > 1.4 {
			t.Errorf("%d tags: commits do %d for %d readings that cost %d, which is %.2f times that; want 1.25", tags, share, sealed, work, ratio)
		}
	}
}
