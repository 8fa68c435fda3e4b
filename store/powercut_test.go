package store

import (
	"bytes"
	"errors"
	"flag"
	"log/slog"
	"math/rand/v2"
	"os"
	"path/filepath"
	"reflect"
	"testing"
	"unsafe"

	bolt "go.etcd.io/bbolt"
)

// sector is what a disk writes whole or not at all.
const sector = 512

// diskWrite is one write to the file, and how long the file was then.
type diskWrite struct {
	at   int64
	data []byte
	size int64
}

// diskLog holds the writes to a file since it was as begin. Between two writes to
// different epochs the file was synced.
type diskLog struct {
	begin    []byte
	pageSize int64
	epochs   [][]diskWrite
	commits  []int // the number of commits that had returned when the epoch began
	done     int
	fresh    bool // the next write begins an epoch
}

// watch makes every write of db go through the log on its way to the file. bbolt
// reads the file through a map, and so sees what was written as the kernel does.
//
// bbolt syncs after the pages of a transaction, and again after the meta page, which
// is page 0 or 1 and comes last (tx.go, Commit, write and writeMeta of version
// 1.5.0). The log takes the order of writes for that of syncs: it begins an epoch
// before and after each meta page.
func watch(t *testing.T, db *bolt.DB) *diskLog {
	t.Helper()
	begin, err := os.ReadFile(db.Path())
	if err != nil {
		t.Fatal(err)
	}
	l := &diskLog{begin: begin, pageSize: int64(db.Info().PageSize), fresh: true}
	field := reflect.ValueOf(db).Elem().FieldByName("ops")
	if field = field.FieldByName("writeAt"); field.Kind() != reflect.Func {
		t.Fatal("bbolt's DB has no function ops.writeAt any more")
	}
	hook := (*func([]byte, int64) (int, error))(unsafe.Pointer(field.UnsafeAddr()))
	write := *hook
	*hook = func(b []byte, at int64) (int, error) {
		info, err := os.Stat(db.Path())
		if err != nil {
			return 0, err
		}
		l.add(diskWrite{at, bytes.Clone(b), info.Size()})
		return write(b, at)
	}
	return l
}

func (l *diskLog) add(w diskWrite) {
	meta := w.at < 2*l.pageSize
	if l.fresh || meta {
		l.epochs = append(l.epochs, nil)
		l.commits = append(l.commits, l.done)
	}
	l.fresh = meta
	i := len(l.epochs) - 1
	l.epochs[i] = append(l.epochs[i], w)
}

// isMeta tells whether an epoch is the writing of a meta page.
func (l *diskLog) isMeta(epoch int) bool { return l.epochs[epoch][0].at < 2*l.pageSize }

// apply writes those sectors of w to image that keep wants.
func (w *diskWrite) apply(image []byte, keep func() bool) []byte {
	if grow := w.size - int64(len(image)); grow > 0 {
		image = append(image, make([]byte, grow)...)
	}
	for i := 0; i < len(w.data); i += sector {
		if end := min(i+sector, len(w.data)); keep() {
			copy(image[w.at+int64(i):], w.data[i:end])
		}
	}
	return image
}

func kept() bool { return true }

// until returns the file as it was when all of the epochs before had been synced.
func (l *diskLog) until(epoch int) []byte {
	image := bytes.Clone(l.begin)
	for _, writes := range l.epochs[:epoch] {
		for i := range writes {
			image = writes[i].apply(image, kept)
		}
	}
	return image
}

// watched commits numbered batches, beside which groups are closed and sealed and hours
// built, and trims after every hundredth if it is to.
func watched(t *testing.T, trim bool) (l *diskLog) {
	t.Helper()
	path := filepath.Join(t.TempDir(), "history.db")
	s := openStore(t, path, Options{})
	s.groupBytes, s.sealing.enough, s.beatAge = 3000, 2000, 20*second
	s.minuteSealing.after = 0
	commit(t, s, numbered(1))
	l = watch(t, s.db)
	for n := 2; n <= 700; n++ {
		l.done = n - 1
		commit(t, s, numbered(uint64(n)))
		if trim && n%100 == 0 {
			l.done = n
			s.maxBytes = s.Bytes() * 3 / 4
			if _, err := s.Trim(0); err != nil {
				t.Fatal(err)
			}
		}
	}
	if blocks, groups := sealedGroups(t, s); !trim && (blocks < 2 || groups < 2) {
		t.Errorf("%d blocks and %d groups", blocks, groups)
	}
	if err := s.Close(); err != nil {
		t.Fatal(err)
	}
	whole, err := os.ReadFile(path)
	if err != nil || !bytes.Equal(l.until(len(l.epochs)), whole) {
		t.Fatalf("the log does not lead to the file (%v)", err)
	}
	return l
}

// survivor opens what is left of a file and returns the number that its history ends
// with, after comparing what is in it with the numbers up to that.
func survivor(t *testing.T, path string, image []byte, compare func(*testing.T, *Store, uint64)) (n uint64, err error) {
	t.Helper()
	rewrite(t, path, image)
	s, err := Open(path, Options{})
	if err != nil {
		return 0, err
	}
	n, err = lastNumber(s)
	if err == nil {
		compare(t, s, n)
	}
	return n, errors.Join(err, s.Close())
}

// cutEvery is odd by default, so that the cuts fall on pages and meta pages in turn.
var cutEvery = flag.Int("cutevery", 3, "TestPowerCut cuts once in so many epochs; 1 is all of them")

// TestPowerCut shows what holds on a disk that keeps what was synced: file sizes are
// taken to be kept, for bbolt syncs them by themselves, and a disk that answers a
// sync before it is done is beyond any program. It cuts the power at any write: of what was not synced, each sector is
// kept or lost. The file opens, passes bbolt's check, holds every batch whose commit had
// returned and at most the one that was under way, whole, and takes new ones.
func TestPowerCut(t *testing.T) {
	t.Run("growing", func(t *testing.T) {
		t.Parallel()
		testPowerCut(t, watched(t, false), testAll)
	})
	t.Run("trimmed", func(t *testing.T) {
		t.Parallel()
		testPowerCut(t, watched(t, true), testEnd)
	})
}

// testAll is testNumbered, with the marks and the events.
func testAll(t *testing.T, s *Store, n uint64) {
	t.Helper()
	testNumbered(t, s, n)
	testMarks(t, s, n)
	testEvents(t, s, n)
}

// testEnd compares a history of which the beginning is gone: readings run without a
// gap to n, and the register is that of the numbers to n.
func testEnd(t *testing.T, s *Store, n uint64) {
	t.Helper()
	if last, gaps := testRun(t, s, 0); last != float64(n) || gaps != 0 {
		t.Errorf("readings end with %v, with %d gaps; want %d", last, gaps, n)
	}
	testMarks(t, s, n)
	registers, err := s.Registers()
	if want := float64(n * (n + 1) / 2); err != nil || len(registers) != 1 || registers[0].Given != want {
		t.Errorf("Registers() = %v, %v; want one that is %v", registers, err, want)
	}
}

func testPowerCut(t *testing.T, l *diskLog, compare func(*testing.T, *Store, uint64)) {
	path := filepath.Join(t.TempDir(), "cut.db")
	rng := rand.New(rand.NewPCG(11, 12))
	image, cuts, between := bytes.Clone(l.begin), 0, 0
	for epoch, writes := range l.epochs {
		if epoch%*cutEvery == 0 {
			n, err := survivor(t, path, cutIn(writes, image, rng), compare)
			if err != nil {
				t.Fatalf("cut in epoch %d of %d (meta page: %v): %v", epoch, len(l.epochs), l.isMeta(epoch), err)
			}
			boltCheck(t, path)
			if done := uint64(l.commits[epoch]); n < done || n > done+1 {
				t.Fatalf("cut in epoch %d: the history ends with %d, commits had returned up to %d", epoch, n, done)
			}
			if n > uint64(l.commits[epoch]) {
				between++
			}
			if cuts%9 == 0 { // odd as well
				goOn(t, path, n, compare)
			}
			cuts++
		}
		for i := range writes {
			image = writes[i].apply(image, kept)
		}
	}
	t.Logf("%d cuts in %d epochs; %d kept a commit that had not returned", cuts, len(l.epochs), between)
	if len(l.epochs) <= 700 || between < cuts/20 || between < 20 {
		t.Errorf("%d epochs, %d of %d cuts kept a commit that had not returned", len(l.epochs), between, cuts)
	}
}

// cutIn returns what is left of image by a cut at one of the writes, which is drawn; those
// before it may have reached the disk in any part.
func cutIn(writes []diskWrite, image []byte, rng *rand.Rand) []byte {
	cut := bytes.Clone(image)
	chance := rng.Float64()
	for i := range writes[:rng.IntN(len(writes)+1)] {
		cut = writes[i].apply(cut, func() bool { return rng.Float64() < chance })
	}
	return cut
}

// TestPowerCutAtUpgrade cuts the power while a file of the first layout is brought to this
// one: it opens, and all that it holds is there.
func TestPowerCutAtUpgrade(t *testing.T) {
	path := layout1(t)
	db, err := openChecked(path, 0)
	if err != nil {
		t.Fatal(err)
	}
	s := &Store{path: path, db: db, log: slog.New(slog.DiscardHandler)}
	l := watch(t, db)
	if err := errors.Join(s.upgrade(), db.Close()); err != nil {
		t.Fatal(err)
	}
	rng := rand.New(rand.NewPCG(13, 14))
	for epoch, writes := range l.epochs {
		for range 20 {
			cut := l.until(epoch)
			for i := range writes {
				cut = writes[i].apply(cut, func() bool { return rng.IntN(2) == 0 })
			}
			if n, err := survivor(t, path, cut, testNumbered); err != nil || n != 600 {
				t.Fatalf("cut in epoch %d: the history ends with %d, %v", epoch, n, err)
			}
			boltCheck(t, path)
		}
	}
	if len(l.epochs) != 2 {
		t.Errorf("the upgrade took %d epochs, want one transaction", len(l.epochs))
	}
}

// goOn commits after a cut, and reads all again.
func goOn(t *testing.T, path string, n uint64, compare func(*testing.T, *Store, uint64)) {
	t.Helper()
	s, err := Open(path, Options{})
	if err != nil {
		t.Fatal(err)
	}
	for range 3 {
		n++
		commit(t, s, numbered(n))
	}
	compare(t, s, n)
	if err := s.Close(); err != nil {
		t.Fatal(err)
	}
	boltCheck(t, path)
}

// TestPowerCutSeesLoss is the counterpart: where a disk loses the pages that it said it
// had, and keeps the meta page after them, a look at the file tells so.
func TestPowerCutSeesLoss(t *testing.T) {
	l := watched(t, false)
	path := filepath.Join(t.TempDir(), "cut.db")
	told, cuts := 0, 0
	for epoch := 1; epoch < len(l.epochs); epoch += 16 {
		if !l.isMeta(epoch) {
			epoch++
		}
		if epoch == len(l.epochs) {
			break
		}
		image := l.epochs[epoch][0].apply(l.until(epoch-1), kept)
		rewrite(t, path, image)
		cuts++
		s, err := Open(path, Options{})
		if err == nil {
			n, lastErr := lastNumber(s)
			if err = lastErr; err == nil && n != uint64(l.commits[epoch])+1 {
				err = errors.New("the batch is not there")
			}
			if closeErr := s.Close(); closeErr != nil {
				t.Error(closeErr)
			}
		}
		if err != nil {
			told++
		}
	}
	if cuts < 40 || told < cuts {
		t.Errorf("of %d files with a lost page, %d were told", cuts, told)
	}
}
