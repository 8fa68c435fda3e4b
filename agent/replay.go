package agent

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"slices"
	"time"

	"heatreeve/agent/design"
	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/agent/working"
	"heatreeve/ingest/quality"
	"heatreeve/store"
)

const (
	// leastReplay is how far back readings are put through again: that is more than a load
	// remembers, unless its vessel or its counter goes by more.
	leastReplay = int64(time.Hour)
	// scatterReadings is after how many readings the scatter of a tag has forgotten what was
	// before them: (15/16)^400 of it is left, 6 parts in 10^12.
	scatterReadings = 400
)

// replaySpans are how far back a tag is looked for.
var replaySpans = [...]int64{leastReplay, 6 * leastReplay, 24 * leastReplay, 7 * 24 * leastReplay, 31 * 24 * leastReplay}

// replay puts the stored readings of one load through an engine of its own, up to an
// instant. It holds nothing but that load and the tags that it reads.
type replay struct {
	db       *store.Store
	site     *site.Site
	load     int   // index into site.Loads
	loads    []int // those of cfg likewise: that load, and the other side of its exchanger
	design   design.Config
	cfg      loads.Config
	tags     []int // index into site.Tags of each tag of cfg
	readings []loads.Reading
	damaged  int
	unsorted int // readings that came after later ones of their tag
}

func newReplay(db *store.Store, s *site.Site, load int) *replay {
	r := &replay{db: db, site: s, load: load}
	all := plantOf(s)
	r.cfg = loads.Config{Grid: all.Grid, Bridge: all.Bridge}
	r.design, r.loads = designBeside(s, load)
	for _, i := range r.loads {
		r.cfg.Loads = append(r.cfg.Loads, r.own(all.Loads[i], all.Tags))
	}
	return r
}

// own returns a load with the tags of the replay.
func (r *replay) own(l loads.Load, all []loads.Tag) loads.Load {
	if l.Vessel != nil {
		v := *l.Vessel
		l.Vessel = &v
	}
	for _, src := range sourcesOf(&l) {
		if src.Tag >= 0 {
			src.Tag = r.take(all, src.Tag)
		}
	}
	l.Drivers = slices.Clone(l.Drivers)
	for i, src := range l.Drivers {
		l.Drivers[i].Tag = r.take(all, src.Tag)
	}
	return l
}

// designBeside is the design of one load alone, or with the other side of its exchanger, and
// which loads of the site these are: that load first.
func designBeside(s *site.Site, load int) (cfg design.Config, of []int) {
	all := designOf(s)
	of = []int{load}
	for _, x := range all.Exchangers {
		if x.Hot != load && x.Cold != load {
			continue
		}
		of = append(of, x.Hot+x.Cold-load)
		if x.Hot == load {
			x.Hot, x.Cold = 0, 1
		} else {
			x.Hot, x.Cold = 1, 0
		}
		cfg.Exchangers = append(cfg.Exchangers, x)
	}
	for _, i := range of {
		cfg.Loads = append(cfg.Loads, all.Loads[i])
	}
	return cfg, of
}

// take adds a tag, with that of its source's life and the sensors beside it, and returns its
// new index.
func (r *replay) take(all []loads.Tag, tag int) int {
	if i := slices.Index(r.tags, tag); i >= 0 {
		return i
	}
	r.tags = append(r.tags, tag)
	r.cfg.Tags = append(r.cfg.Tags, all[tag])
	i := len(r.tags) - 1
	if t := all[tag]; t.OnChange {
		alive := r.take(all, t.Alive)
		r.cfg.Tags[i].Alive = alive
	}
	if t := all[tag]; t.HasBeside {
		beside := r.take(all, t.Beside)
		r.cfg.Tags[i].Beside = beside
	}
	for other := range all { // that stand beside it
		if all[other].HasBeside && all[other].Beside == tag {
			r.take(all, other)
		}
	}
	return i
}

// collect reads what the load needs of the history up to the grid point g.
func (r *replay) collect(g int64) error {
	ids, err := r.db.Names("tag")
	if err != nil {
		return err
	}
	oldest := g - r.reach()
	var signs []int
	for i := range r.cfg.Tags {
		if isSign := slices.ContainsFunc(r.cfg.Tags, func(t loads.Tag) bool { return t.OnChange && t.Alive == i }); isSign {
			signs = append(signs, i)
			continue
		}
		found, err := r.newest(ids, i, g)
		if err != nil {
			return err
		}
		if len(found) > 0 {
			oldest = min(oldest, found[0].At)
		}
		r.readings = append(r.readings, found...)
	}
	for _, i := range signs { // from before all that they tell of
		found, err := r.of(ids, i, oldest-int64(r.site.Tags[r.tags[i]].MaxAge), g)
		if err != nil {
			return err
		}
		r.readings = append(r.readings, found...)
	}
	slices.SortStableFunc(r.readings, func(a, b loads.Reading) int { return cmp.Compare(a.At, b.At) })
	return nil
}

// reach is how far back the load remembers: at least what its rates are fitted over, and
// what its verdict rests on.
func (r *replay) reach() int64 {
	l := &r.site.Loads[r.load]
	span := 3 * int64(l.Design.Lasting)
	if l.Vessel != nil {
		span = max(span, 3*int64(l.Vessel.Over))
	} else {
		span = max(span, 3*int64(l.Stream.StoredOver))
	}
	return max(leastReplay, span)
}

// newest reads a tag far enough back from g: for what its load remembers, and for what a
// test on its own signal looks at.
func (r *replay) newest(ids map[string]uint32, tag int, g int64) (found []loads.Reading, err error) {
	t := &r.cfg.Tags[tag]
	enough := scatterReadings
	if t.OnChange {
		enough = 1
	} else if t.Counter != nil {
		enough = 3
	}
	tested := int64(0)
	if t.Screen != nil {
		tested = 2 * t.Screen.StuckAfter
	}
	for _, span := range replaySpans {
		span = max(span, r.reach(), 2*t.MaxAge, tested)
		found, err = r.of(ids, tag, g-span, g)
		if err != nil || len(found) >= enough || !t.OnChange && span >= 2*t.MaxAge && span >= 24*leastReplay {
			return found, err
		}
	}
	return found, err
}

// of reads the readings of a tag in from <= At <= g; those of what the tag meant otherwise
// then are not known.
func (r *replay) of(ids map[string]uint32, tag int, from, g int64) (found []loads.Reading, err error) {
	id, ok := ids[r.cfg.Tags[tag].Name]
	if !ok {
		return nil, nil
	}
	unsorted, newest := 0, int64(0)
	for x, err := range r.db.Readings(id, from, g+1) {
		switch {
		case errors.Is(err, store.ErrDamaged):
			r.damaged++
			continue
		case err != nil:
			return nil, err
		}
		if x.At < newest-int64(r.site.Timing.Lateness) {
			unsorted++
		}
		newest = max(newest, x.At)
		found = append(found, loads.Reading{Tag: tag, At: x.At, Value: x.Value, Mark: quality.Mark(x.Mark)})
	}
	r.unsorted += unsorted
	return found, nil
}

// run puts all through, and returns what the figure at the grid point g was worked from.
func (r *replay) run(ctx context.Context, g int64) (x working.Subject, err error) {
	a, err := newAccounts(r.cfg, r.design, r.site.Digest, r.site.Zone)
	if err != nil {
		return x, err
	}
	rest := r.readings
	for len(rest) > 0 {
		through := min(rest[0].At-rest[0].At%int64(time.Minute)+int64(time.Minute), g)
		n, _ := slices.BinarySearchFunc(rest, through, func(y loads.Reading, at int64) int { return cmp.Compare(y.At, at+1) })
		n = max(n, 1)
		a.advance(loads.Beat{Readings: rest[:n], Through: through})
		rest = rest[n:]
		if err := ctx.Err(); err != nil {
			return x, err
		}
	}
	a.advance(loads.Beat{Through: g})
	a.advance(loads.Beat{Through: g + r.cfg.Grid})
	x = working.Subject{Site: r.site, Load: r.load, Basis: a.engine.Basis(0), Grounds: a.verdicts.Grounds(0), Evidence: a.verdicts.Evidence(0), Exchanger: expecting(a.verdicts, 0), Past: true}
	r.back(&x.Basis)
	x.Notes = r.notes()
	return x, nil
}

// back gives the tags of a basis the indexes of the site.
func (r *replay) back(b *loads.Basis) {
	for i := range b.Inputs {
		in := &b.Inputs[i]
		if in.Source.Tag < 0 {
			continue
		}
		in.Source.Tag = r.tags[in.Source.Tag]
		in.Held.Tag = in.Source.Tag
		if in.Alive.At != 0 {
			in.Alive.Tag = r.tags[in.Alive.Tag]
		}
	}
}

func (r *replay) notes() (all []string) {
	if r.damaged > 0 {
		all = append(all, fmt.Sprintf("%d parts of the history cannot be read, and their readings are not in this", r.damaged))
	}
	if r.unsorted > 0 {
		all = append(all, fmt.Sprintf("%d readings came after later ones of their tag by more than timing.lateness: here they count, in the accounts of then they may not", r.unsorted))
	}
	return all
}
