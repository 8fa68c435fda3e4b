package expect

import (
	"fmt"
	"math"
	"slices"
)

// Sample is what a load did over one span of time.
type Sample struct {
	At      int64 // when it began, ns
	Hour    int   // of the week
	Drivers []float64
	Duty    float64 // mean, W
}

// Habit is which hours a [Baseline] tells apart.
type Habit uint8

const (
	AnyHabit Habit = iota // as many as the samples tell; see [Learn]
	NoHabit
	DayHabit  // those of a workday, Monday to Friday, and those of a day of the weekend
	WeekHabit // all of the week
)

func (h Habit) String() string {
	return [...]string{"any", "none", "day", "week"}[h]
}

// cell is the hour that a sample counts to.
func (h Habit) cell(hour int) int {
	switch h {
	case DayHabit:
		if hour >= 5*24 {
			return 24 + hour%24
		}
		return hour % 24
	case WeekHabit:
		return hour
	}
	return 0
}

func (h Habit) cells() int { return [...]int{1, 1, 48, HoursAWeek}[h] }

// Options are how to learn.
type Options struct {
	Scales []Scale // of the drivers; their number is that of the terms, one to three
	Span   int64   // of a sample, ns
	Habit  Habit
	// Straight keeps the first driver from having a limit.
	Straight bool
}

// Fit is an account of what was learned.
type Fit struct {
	Given, Used int
	Unusable    int // samples with a number that is none
	Excluded    int // beyond three times the scaled median absolute deviation
	Habit       Habit
	R2          float64
	Residual    float64 // s, W
	Relative    float64 // s as a fraction of the mean duty: CV(RMSE) of ASHRAE Guideline 14
	Lag         float64 // autocorrelation of successive residuals
	Mean        float64 // duty, W
	Residuals   []Residual
}

// Residual is that of a sample that was used, W.
type Residual struct {
	At   int64
	Duty float64
}

// farOff is how many scaled median absolute deviations are far; leastCell is how many samples each hour must have that is told apart, and leastSamples how
// many for each number that is learned. Common practice, no source.
const (
	farOff       = 3
	leastCell    = 4
	leastSamples = 10
)

// Learn fits a baseline by least squares, by the QR decomposition of the regressors centred in
// their hours. Of the habits, and of the first driver with and without a limit, it takes the
// model with the least information criterion of Schwarz (Annals of Statistics 6, 1978),
//
//	n·ln(SSR·(1 − ρ²)/n) + k·ln n
//
// unless options say which, ρ being the autocorrelation of its residuals, whose innovations
// have the variance SSR·(1 − ρ²)/n: that is the criterion with errors of a first-order
// autoregression. The limit is searched for between the tenth and the ninetieth percentile, as in the
// change-point models of J. K. Kissock, J. S. Haberl and D. E. Claridge (Inverse Modeling
// Toolkit, ASHRAE RP-1050, 2003).
//
// Then samples are left out whose residual is beyond three median absolute deviations, scaled
// by 1.4826 to a standard deviation, about the median (C. Leys et al., Journal of Experimental
// Social Psychology 49, 2013): once those beyond six, for the model to be chosen again without
// them, and by that model for the fit. It withstands a few outliers, and not a second regime.
//
// The error says that there are too few samples, or that they do not tell the drivers apart.
func Learn(samples []Sample, o Options) (Baseline, Fit, error) {
	fit := Fit{Given: len(samples)}
	if n := len(o.Scales); n < 1 || n > 3 {
		return Baseline{}, fit, fmt.Errorf("learn against %d tags: one to three are wanted", n)
	}
	if o.Span <= 0 {
		return Baseline{}, fit, fmt.Errorf("learn from samples of %d ns: the span must be above zero", o.Span)
	}
	usable := make([]Sample, 0, len(samples))
	for _, s := range samples {
		if s.usable(len(o.Scales)) {
			usable = append(usable, s)
		}
	}
	fit.Unusable = fit.Given - len(usable)
	if err := enough(usable, o.Scales); err != nil {
		return Baseline{}, fit, err
	}
	m, err := choose(usable, o)
	if err != nil {
		return Baseline{}, fit, err
	}
	if first := m.within(usable, 2*farOff); len(first) >= len(usable)/2 {
		if m, err = choose(first, o); err != nil {
			return Baseline{}, fit, err
		}
	}
	kept := m.within(usable, farOff)
	fit.Excluded = len(usable) - len(kept)
	if err := enough(kept, o.Scales); err != nil {
		return Baseline{}, fit, fmt.Errorf("after %d samples were excluded: %w", fit.Excluded, err)
	}
	if m, err = solve(kept, m.shape, o); err != nil {
		return Baseline{}, fit, fmt.Errorf("after %d samples were excluded: %w", fit.Excluded, err)
	}
	m.tell(&fit, kept)
	return m.baseline(kept, o), fit, nil
}

func (s *Sample) usable(drivers int) bool {
	if len(s.Drivers) < drivers || s.Hour < 0 || s.Hour >= HoursAWeek || s.Duty-s.Duty != 0 {
		return false
	}
	for _, x := range s.Drivers[:drivers] {
		if x-x != 0 {
			return false
		}
	}
	return true
}

// enough says what samples lack.
func enough(samples []Sample, scales []Scale) error {
	if n, least := len(samples), leastSamples*(2+len(scales)); n < least {
		return fmt.Errorf("%d samples can be used: at least %d are wanted", n, least)
	}
	for k := range scales {
		if low, high := ends(samples, k); !(high > low) {
			return fmt.Errorf("tag %q stayed at %s: what does not change tells nothing", scales[k].Tag, scales[k].Show(low))
		}
	}
	return nil
}

func ends(samples []Sample, k int) (low, high float64) {
	low, high = math.Inf(1), math.Inf(-1)
	for i := range samples {
		low, high = min(low, samples[i].Drivers[k]), max(high, samples[i].Drivers[k])
	}
	return low, high
}

// shape is what a model consists of.
type shape struct {
	habit Habit
	bend  Bend
	limit float64
}

// choose finds the model to be fitted.
func choose(samples []Sample, o Options) (best *model, err error) {
	plain := shape{habit: o.Habit}
	habits := []Habit{o.Habit}
	if o.Habit == AnyHabit {
		plain.habit, habits = NoHabit, []Habit{NoHabit, DayHabit, WeekHabit}
	}
	bends := []Bend{Straight, Below, Above}
	if o.Straight {
		bends = bends[:1]
	}
	if best, err = solve(samples, plain, o); err != nil {
		return nil, err
	}
	for _, h := range habits {
		for _, b := range bends {
			if m := bent(samples, shape{habit: h, bend: b}, o); m != nil && m.criterion() < best.criterion() {
				best = m
			}
		}
	}
	return best, nil
}

// bent fits a model with the best limit of its bend; nil where the samples do not tell one.
func bent(samples []Sample, s shape, o Options) *model {
	if s.bend == Straight {
		m, err := solve(samples, s, o)
		if err != nil {
			return nil
		}
		return m
	}
	xs := make([]float64, len(samples))
	for i := range samples {
		xs[i] = samples[i].Drivers[0]
	}
	slices.Sort(xs)
	low, high := xs[len(xs)/10], xs[len(xs)*9/10]
	at := func(limit float64) *model {
		s.limit = limit
		if m, err := solve(samples, s, o); err == nil {
			return m
		}
		return nil
	}
	return search(at, low, high)
}

// search finds the limit between low and high with the least sum of squares: by a grid, as
// there may be several minima, and then by halving steps about the best of it.
func search(at func(limit float64) *model, low, high float64) (best *model) {
	const steps = 24
	step := (high - low) / steps
	for i := range steps + 1 {
		if m := at(low + float64(i)*step); m != nil && (best == nil || m.ssr < best.ssr) {
			best = m
		}
	}
	for range 8 {
		step /= 2
		if best == nil {
			return nil
		}
		middle := best.shape.limit
		for _, x := range [...]float64{middle - step, middle + step} {
			if x < low || x > high {
				continue
			}
			if m := at(x); m != nil && m.ssr < best.ssr {
				best = m
			}
		}
	}
	return best
}
