package loads

import "slices"

// loadState is what the engine keeps of one load. Exported fields are part of the
// engine's saved state.
type loadState struct {
	Registers Registers
	Windows   [len(Windows)]Window
	Minute    minuteSum
	Gap       gap
	Counted   *counted // nil where the flow is a rate
	Witness   *witness // nil where there is none
	Trends    []trend  // of the tags whose change counts; see trendsOf
	Hold      queue    // what is between the thermometers of a stream that has a hold
	Drivers   []string // of which the sums are; see driversOf
	terms     terms
	figure    Figure   // at one unit of flow a second where it is counted
	fresh     bool     // figure was worked from the values held now
	counting  bool     // the counter of the flow is alive
	left      parcel   // what the present figure took to leave the hold
	closed    []Minute // not yet handed over
}

// terms are what a load is accounted by.
type terms struct {
	load         int // index into [Config.Loads]
	grid, bridge int64
	gives        bool
	counter      int     // tag that counts the flow; -1 where it is a rate
	step         float64 // of the counter's numbers
	witness      int     // tag of the witness; -1 where there is none
	drivers      int     // how many there are
}

// newLoad returns the empty accounts of a load.
func newLoad(cfg *Config, load int) loadState {
	of := &cfg.Loads[load]
	l := loadState{terms: terms{
		load: load, grid: cfg.Grid, bridge: cfg.Bridge, gives: of.gives(),
		counter: of.counter(cfg.Tags), witness: -1, drivers: len(of.Drivers),
	}, Drivers: driversOf(cfg, load)}
	if i := l.terms.counter; i >= 0 {
		l.Counted, l.terms.step = new(counted), cfg.Tags[i].Resolution
	}
	if of.HasWitness {
		l.Witness, l.terms.witness = new(witness), of.Witness.Tag
	}
	for k, length := range Windows {
		l.Windows[k] = newWindow(length, cfg.Grid)
	}
	l.Trends = trendsOf(cfg, load)
	return l
}

// resume takes up the accounts that were saved in the state of, to go on at next.
func (l *loadState) resume(was loadState, of *saved, next int64) {
	was.terms = l.terms
	was.terms.grid = of.Grid
	if !slices.Equal(was.Drivers, l.Drivers) {
		was.undriven()
		was.Drivers = l.Drivers
	}
	waited := next - was.decided(of.Next)
	if of.Grid != l.terms.grid {
		l.Registers, l.Minute = was.Registers, was.Minute
		l.Registers.Missing += waited
		return
	}
	if (was.Counted == nil) != (l.Counted == nil) {
		was.Registers.Missing += waited
		was.drop()
		was.Counted = l.Counted
	}
	if was.Witness == nil || l.Witness == nil {
		was.Witness = l.Witness
	}
	for k := range l.Windows {
		l.Windows[k].resume(was.Windows[k])
	}
	was.Windows = l.Windows
	was.Trends = resumeTrends(l.Trends, was.Trends)
	*l = was
}

// forget drops what is not in the registers yet, because it was booked elsewhere.
func (l *loadState) forget() {
	l.Minute.Begun = false
	l.drop()
}

// drop gives up all that waits for what comes next.
func (l *loadState) drop() {
	l.Gap = gap{}
	if l.Counted != nil {
		l.Counted = new(counted)
	}
	if l.Witness != nil {
		l.Witness = new(witness)
	}
	l.Hold = queue{}
}

// decided returns up to where the time before through is in the registers.
func (l *loadState) decided(through int64) int64 {
	if l.Gap.open() {
		through = l.from()
	}
	if l.Counted != nil && len(l.Counted.Pieces) > 0 {
		through = min(through, l.Counted.Pieces[0].From)
	}
	return through
}

// roll moves the rolling windows on, by the live figure. Their heat is positive in the
// load's service.
func (l *loadState) roll(f *Figure, g, span int64) {
	var heat float64
	measured := span
	if f.Measured() {
		heat = f.Duty * (float64(span) / 1e9)
	} else {
		g, measured = g+span-l.terms.grid, 0
	}
	for k := range l.Windows {
		l.Windows[k].book(g, heat, measured)
	}
}
