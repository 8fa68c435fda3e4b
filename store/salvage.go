package store

import (
	"crypto/sha256"
	"encoding/binary"
	"errors"
	"fmt"
	"io/fs"
	"math"
	"os"
	"slices"
	"syscall"

	bolt "go.etcd.io/bbolt"
)

// Tally counts records, and tells between what instants (Unix nanoseconds) they lie; From
// and To are 0 where Count is.
type Tally struct{ Count, From, To int64 }

func (t *Tally) add(n, from, to int64) {
	switch {
	case n == 0:
		return
	case t.Count == 0:
		t.From, t.To = from, to
	}
	t.Count, t.From, t.To = t.Count+n, min(t.From, from), max(t.To, to)
}

// Report says what [Salvage] has saved and what is lost.
type Report struct {
	// Batches are what single commits brought; those that are lost show as gaps in their
	// numbers. Where the newest are lost, their number is not known.
	Batches, LostBatches Tally
	// Earlier is how many batches came before the first that is saved: retention has removed
	// them, or they are lost too, if any page is unreadable.
	Earlier int64
	// Readings that are lost are counted where the name of their group or block is left.
	Readings, LostReadings Tally
	Minutes, Hours, Events Tally
	Sites                  Tally // since when which site file was in force; a text may be lost nevertheless
	// LostMinutes are those that hours hold and that are not there, DamagedMinutes and
	// DamagedHours the keys (up to eight loads each) whose records cannot be read,
	// DamagedEvents those of events, and DamagedSites those of site files and their texts.
	LostMinutes, DamagedMinutes, DamagedHours, DamagedEvents, DamagedSites Tally
	// Names, Registers and State tell whether these are saved. Without State the accounts
	// go on from Registers, and the readings that came after its checkpoint count no more.
	Names, Registers, State bool
	// Unreadable counts pages, and places in pages, that nothing could be read from.
	Unreadable int64
}

// Whole tells whether nothing was lost.
func (r *Report) Whole() bool {
	return r.LostBatches.Count+r.LostReadings.Count+r.LostMinutes.Count+r.DamagedMinutes.Count+r.DamagedHours.Count+r.DamagedEvents.Count+r.DamagedSites.Count+r.Unreadable == 0 &&
		r.Names && r.Registers && r.State
}

// Salvage reads what can be read of the history in the file from, however damaged, and
// writes it to a new history in the file to, which must not be there. from is not
// changed. What passes its checksum is taken from the newest state of the file, then from
// the state a commit before, and then from pages that neither leads to; of those minutes,
// hours and events may be of an earlier state, and some may be there that retention had removed.
// Batches are numbered anew, so that the new history has no gap. A page is read
// once on each of these ways, so that the time is bounded by the size of the file, and memory
// by its largest value. The error is about the files; damage is told by the Report.
func Salvage(from, to string) (r Report, err error) {
	f, err := os.Open(from)
	if err != nil {
		return r, err
	}
	defer f.Close()
	if syscall.Flock(int(f.Fd()), syscall.LOCK_SH|syscall.LOCK_NB) != nil {
		return r, fmt.Errorf("salvage %q: %w; end the agent that runs on it", from, ErrLocked)
	}
	info, err := f.Stat()
	if err != nil {
		return r, err
	}
	if _, err := os.Lstat(to); !errors.Is(err, fs.ErrNotExist) {
		return r, fmt.Errorf("salvage to %q: there is something already; name a new file", to)
	}
	temp := to + ".salvage"
	if err := os.Remove(temp); err != nil && !errors.Is(err, fs.ErrNotExist) {
		return r, err
	}
	if err := create(temp); err != nil {
		return r, err
	}
	err = salvageInto(openRaw(f, info.Size()), temp, &r)
	if err == nil {
		return r, moveTo(temp, to)
	}
	return r, errors.Join(fmt.Errorf("salvage %q: %w", from, err), os.Remove(temp))
}

func salvageInto(raw *rawFile, temp string, r *Report) error {
	db, err := openBolt(temp, 0)
	if err != nil {
		return err
	}
	if len(raw.metas) == 0 {
		r.Unreadable++ // both meta pages
	}
	z := &salvage{raw: raw, db: db, report: r, damaged: map[string]bool{}}
	for i := range z.groups {
		z.groups[i] = map[string][][]byte{}
	}
	return errors.Join(z.all(), db.Close())
}

// salvage is one run of [Salvage].
type salvage struct {
	raw     *rawFile
	db      *bolt.DB
	report  *Report
	trees   []*salvagedTree        // of the newest state and the one before
	groups  [5]map[string][][]byte // by name: of the newest state, the one before, and of neither, see stray
	unsure  bool                   // groups of the newest state may be missing without a trace
	damaged map[string]bool        // keys of minutes, hours, events and site files that were met damaged; in front m, h, e or s
	names   []byte                 // of no known bucket
	blocks  []keyed                // of minutes
	batch   []keyed
	bytes   int
	earlier bool // what is met is not of the newest state
	sealed  sealedStarts
}

// salvagedTree is what one state of the file holds beside minutes, hours, events and groups.
type salvagedTree struct {
	values map[string][]byte // by bucket and key
	recent [][]byte          // the headers of the buckets in it
	first  []uint64          // the number of the first record of each
}

// keyed is a record on its way to a bucket of the new file.
type keyed struct{ bucket, key, value []byte }

func (z *salvage) all() error {
	for _, m := range z.raw.metas {
		if err := errors.Join(z.tree(m.root), z.flush()); err != nil {
			return err
		}
		z.earlier = true
	}
	z.earlier = true
	version := z.value("meta", keyVersion, func(v []byte) bool { return len(v) == 4 })
	if v := versionOf(version); version != nil && (v < firstVersion || v > Version) {
		return fmt.Errorf("%w: it is %s, this program reads versions %d to %d", ErrVersion, versionText(version), firstVersion, Version)
	}
	if err := z.strays(); err != nil {
		return err
	}
	if err := z.flush(); err != nil {
		return err
	}
	if err := z.records(); err != nil {
		return err
	}
	return z.hours()
}

// tree takes what the tree of one state leads to.
func (z *salvage) tree(root uint64) (err error) {
	w := z.raw.newWalk()
	w.marks = true
	t := &salvagedTree{values: map[string][]byte{}}
	z.trees = append(z.trees, t)
	ofRecords := int64(0)
	tops := 0
	keep := func(e error) { err = errors.Join(err, e) }
	w.tree(root, 0, func(top element) {
		if !top.bucket {
			return
		}
		name := string(top.key)
		tops++
		defer func(before int64) {
			if name == "minutes" || name == "hours" || name == "events" {
				ofRecords -= w.bad - before
			}
		}(w.bad)
		w.bucket(top.value, func(e element) {
			switch name {
			case "minutes", "hours", "events":
				if !e.bucket {
					keep(z.keyed(name, e))
				} else if name == "minutes" {
					w.bucket(e.value, func(e element) { keep(z.minuteBlock(e, true)) })
				}
			case "journal", "sealed":
				z.group(len(z.trees)-1, e)
			case "state":
				if e.bucket && string(e.key) == string(bucketSites) {
					before := w.bad
					w.bucket(e.value, func(e element) {
						if !e.bucket {
							keep(z.keyed("sites", e))
						}
					})
					ofRecords -= w.bad - before
					return
				}
				t.values[name+"/"+string(e.key)] = e.value
			case "recent":
				if len(e.key) == 8 {
					t.recent = append(t.recent, e.value)
					t.first = append(t.first, binary.BigEndian.Uint64(e.key))
				}
			default:
				t.values[name+"/"+string(e.key)] = e.value
			}
		})
	})
	if len(z.trees) == 1 {
		z.report.Unreadable = w.bad
		z.unsure = ofRecords+w.bad > 0 || tops < len(buckets(firstVersion))
	}
	return err
}

// strays takes what lies in leaves that no tree leads to, if the newest tree is not whole.
func (z *salvage) strays() error {
	if len(z.raw.metas) > 0 && z.report.Unreadable == 0 {
		return nil
	}
	for id := range uint64(len(z.raw.reached)) {
		if z.raw.reached[id] {
			continue
		}
		b := z.raw.run(id)
		all, _ := elements(b) // keys of a branch have no value, and are nothing
		for _, e := range all {
			if e.bucket {
				z.group(z.rank(e), e)
				if err := z.minuteBlock(e, false); err != nil {
					return err
				}
				continue
			}
			z.strayNames(e)
			if err := z.stray(e); err != nil {
				return err
			}
		}
	}
	return nil
}

// rank sorts stray groups and blocks: whole blocks come before whole groups, which may have
// been sealed since, and those before others, whose pages may hold something else by now.
func (z *salvage) rank(e element) int {
	s, err := parseName(e.key)
	if err != nil {
		return 4
	}
	b := z.raw.newWalk().records(e.value)
	switch {
	case keptOfBlock(e.key, b) == int64(s.readings):
		return 2
	case b != nil && keptOfGroup(s, b) == int64(s.readings):
		return 3
	}
	return 4
}

// strayNames takes the longest list of names that is met: names only come.
func (z *salvage) strayNames(e element) {
	all, err := parseNames(e.value)
	if err != nil || string(e.key) != string(keyNames) || len(all) == 0 ||
		slices.ContainsFunc(all, func(n named) bool { return n.kind == "" || n.name == "" }) { // registers have the same key
		return
	}
	if len(e.value) > len(z.names) {
		z.names = append([]byte{}, e.value...)
	}
}

// stray takes a minute, an hour, an event or a site file whose bucket is not known. One that might be a
// minute or an hour is left.
func (z *salvage) stray(e element) error {
	_, notMinute := parseMinutes(nil, e.key, e.value, anyLoad)
	_, notHour := parseHours(nil, e.key, e.value, anyLoad)
	switch {
	case notMinute == nil && notHour != nil:
		return z.keyed("minutes", e)
	case notHour == nil && notMinute != nil:
		return z.keyed("hours", e)
	}
	if _, err := parseEvent(e.key, e.value); err == nil {
		return z.keyed("events", e)
	}
	if readSite(e) == nil {
		return z.keyed("sites", e)
	}
	return nil
}

// group notes where a group or block lies, by whence it is known.
func (z *salvage) group(whence int, e element) {
	if _, err := parseName(e.key); err == nil && len(e.value) >= bucketHead {
		of := z.groups[whence]
		of[string(e.key)] = append(of[string(e.key)], append([]byte{}, e.value...))
	}
}

// readSite is nil of a site file's beginning or text that can be read.
func readSite(e element) (err error) {
	if isSiteTime(e.key) {
		_, err = parseSiteTime(e.key, e.value)
		return err
	}
	_, err = parseText(e.key, e.value)
	return err
}

// keyed takes the minutes, hours, event or site file under a key, if they can be read.
func (z *salvage) keyed(bucket string, e element) (err error) {
	keyBytes := 12
	switch bucket {
	case "minutes":
		_, err = parseMinutes(nil, e.key, e.value, anyLoad)
	case "hours":
		_, err = parseHours(nil, e.key, e.value, anyLoad)
	case "sites":
		err = readSite(e)
		if keyBytes = sha256.Size; isSiteTime(e.key) {
			keyBytes = 8
		}
	default:
		keyBytes = 16
		_, err = parseEvent(e.key, e.value)
	}
	if err != nil {
		if len(e.key) == keyBytes && len(z.damaged) < keysATrim {
			z.damaged[bucket[:1]+string(e.key)] = true
		}
		return nil
	}
	z.batch = append(z.batch, keyed{[]byte(bucket), append([]byte{}, e.key...), append([]byte{}, e.value...)})
	return z.took(len(e.value))
}

// took writes what was taken once that is much.
func (z *salvage) took(n int) error {
	if z.bytes += n; len(z.batch) < keysAStep && z.bytes < compactSlice {
		return nil
	}
	return z.flush()
}

// flush writes what was taken, but for what is there already.
func (z *salvage) flush() error {
	blocks, batch := z.blocks, z.batch
	z.blocks, z.batch, z.bytes = nil, nil, 0
	z.sealed = sealedStarts{}
	return z.db.Update(func(tx *bolt.Tx) (err error) {
		for _, k := range blocks {
			if err := putBlock(tx, k); err != nil {
				return err
			}
		}
		for _, k := range batch {
			if z.earlier && string(k.bucket) == string(bucketMinutes) {
				if err := z.fill(tx, k); err != nil {
					return err
				}
				continue
			}
			b := tx.Bucket(k.bucket)
			if b == nil {
				if b, err = makeSites(tx); err != nil {
					return err
				}
			}
			b.FillPercent = appendFill
			if b.Get(k.key) != nil {
				continue
			}
			if err := b.Put(k.key, k.value); err != nil {
				return err
			}
		}
		return nil
	})
}

// hours counts what is saved, and builds the hours that are lost from their minutes.
func (z *salvage) hours() error {
	s := &Store{path: z.db.Path(), db: z.db, log: discard()}
	if err := z.count(); err != nil {
		return err
	}
	for done := false; !done; {
		err := s.update(func(tx *bolt.Tx) error {
			before, _ := readHourMark(tx)
			if err := s.advanceHours(tx, before, keysAStep); err != nil {
				return err
			}
			after, _ := readHourMark(tx)
			done = after == before
			return nil
		})
		if err != nil {
			return err
		}
	}
	return nil
}

// count counts minutes, hours and events, and the minutes that hours hold beyond those.
func (z *salvage) count() error {
	r := z.report
	for key := range z.damaged {
		lost := map[byte]*Tally{'m': &r.DamagedMinutes, 'h': &r.DamagedHours, 'e': &r.DamagedEvents, 's': &r.DamagedSites}[key[0]]
		at := keyTime([]byte(key[1:]))
		if key[0] == 's' && !isSiteTime([]byte(key[1:])) {
			at = 0 // a text has no time
		}
		lost.add(1, at, at)
	}
	s := &Store{path: z.db.Path(), db: z.db, log: discard()}
	return z.db.Update(func(tx *bolt.Tx) error {
		if err := z.countEvents(tx); err != nil {
			return err
		}
		for _, f := range siteTimes(sites(tx), func([]byte, error) {}) {
			r.Sites.add(1, f.From, f.From)
		}
		mark := z.hourMark(tx)
		minutes := newCountMinutes(s, tx, r)
		hours := tx.Bucket(bucketHours).Cursor()
		for k, v := hours.Seek(keyFirstMinute); k != nil; k, v = hours.Next() {
			at := keyTime(k)
			minutes.until(at, false)
			found, _ := parseHours(nil, k, v, anyLoad)
			r.Hours.add(int64(len(found)), at, at)
			for _, h := range found {
				if n := minutes.there[hourPlace{at, h.Load}]; at >= mark.trimmed && h.Minutes > n {
					r.LostMinutes.add(int64(h.Minutes-n), at, at)
				}
			}
		}
		minutes.until(math.MaxInt64, true)
		return putHourMark(tx, hourMark{math.MinInt64, mark.trimmed})
	})
}

// countEvents counts the events, and goes on with their numbers.
func (z *salvage) countEvents(tx *bolt.Tx) error {
	bucket := tx.Bucket(bucketEvents)
	last := uint64(0)
	c := bucket.Cursor()
	for k, v := c.Seek(keyFirstMinute); k != nil; k, v = c.Next() {
		if e, err := parseEvent(k, v); err == nil {
			z.report.Events.add(1, e.At, e.At)
			last = max(last, e.Number)
		}
	}
	return bucket.SetSequence(last)
}
