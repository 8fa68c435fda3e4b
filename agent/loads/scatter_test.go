package loads

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

// noisy puts n readings of white noise of standard deviation sigma before the plant's
// inlet, every step seconds, on 350 K and a slope, and returns the engine after them.
func noisy(t *testing.T, cfg Config, n int, step, sigma, slope float64, seed uint64) *Engine {
	t.Helper()
	e := engine(t, cfg)
	rng := rand.New(rand.NewPCG(seed, 1))
	for k := range n {
		s := float64(k) * step
		e.Advance(Beat{at(s, 2, 350+slope*s+sigma*rng.NormFloat64(), 330), through(s + 1)}, nil)
	}
	return e
}

// The mean over many courses of noise finds its variance, whatever the slope that the
// quantity is on; a figure of one course is some 15 % off. Weights that fall by 1/16 are
// worth 31 equal ones, and of n differences the variance of the mean square is (3n−1)/n²
// of its square: √(92/31²)/2 = 0.155.
func TestScatterFindsNoise(t *testing.T) {
	const courses, sigma = 400, 0.05
	for _, slope := range []float64{0, 1e-3} { // K/s, over 60 steps of 2 s
		var sum, off float64
		for seed := range uint64(courses) {
			e := noisy(t, plant(liquid), 60, 2, sigma, slope, seed)
			u := e.Snapshot().Loads[0].Figure.Random / (2 * 4000)
			sum += u * u
			off += (u/sigma - 1) * (u/sigma - 1)
		}
		// The mean of 400 has a standard error of 31 %/√400 = 1.6 %.
		near(t, "mean variance", sum/courses, sigma*sigma, 0.05*sigma*sigma)
		if rms := math.Sqrt(off / courses); rms < 0.135 || rms > 0.175 {
			t.Errorf("a figure is %.3f off (rms), want 0.155", rms)
		}
	}
}

// A reading of a steady signal stands for the time between readings.
func TestVarianceIsThatOfAReadingTimesItsTime(t *testing.T) {
	cfg := plant(liquid)
	e := noisy(t, cfg, 40, 5, 0.05, 0, 7)
	f := e.Snapshot().Loads[0].Figure
	near(t, "variance", f.Variance, f.Random*f.Random*5, 1e-9*f.Variance)
}

// A restart, and with it a gap longer than the maximum age, changes nothing of what is
// known, and a jump across the gap is no scatter.
func TestScatterOverARestart(t *testing.T) {
	e := noisy(t, plant(liquid), 40, 5, 0.05, 0, 3)
	before := e.Snapshot().Loads[0].Figure
	state, err := e.Save()
	if err != nil {
		t.Fatal(err)
	}
	again := engine(t, plant(liquid))
	if err := again.Restore(state); err != nil {
		t.Fatal(err)
	}
	again.Advance(Beat{nil, through(197)}, nil)
	if got := again.Snapshot().Loads[0].Figure; got != figureAt(e, 197) || got.Random != before.Random {
		t.Errorf("after a restart %+v, before it %+v", got, before)
	}
	again.Advance(Beat{at(1000, 2, 380, 330), through(1001)}, nil)
	f := again.Snapshot().Loads[0].Figure
	if f.Fault != NoFault || f.Random != before.Random || f.Variance != before.Variance {
		t.Errorf("after the gap: fault %v, random %g W, want %g W", f.Fault, f.Random, before.Random)
	}
}

func figureAt(e *Engine, s float64) Figure {
	e.Advance(Beat{nil, through(s)}, nil)
	return e.Snapshot().Loads[0].Figure
}

// What a source that tells at once leaves open lasts: it is systematic, and its steps are
// no noise. So is the rounding of any reading.
func TestDeadbandAndResolutionLast(t *testing.T) {
	cfg := plant(liquid)
	cfg.Tags[inlet].Deadband, cfg.Tags[outlet].Resolution = 0.3, 0.12
	e := engine(t, cfg)
	for k := range 20 {
		s := float64(k) * 3
		e.Advance(Beat{at(s, 2, 350+float64(k%2), 330), through(s + 1)}, nil)
	}
	f := e.Snapshot().Loads[0].Figure
	near(t, "inlet", math.Abs(f.Share[PartInlet]), 2*4000*0.3/math.Sqrt(3), 1e-6)
	near(t, "outlet", math.Abs(f.Share[PartOutlet]), 2*4000*0.12/math.Sqrt(12), 1e-6)
	near(t, "random", f.Random, 0, 0)
}

// Several readings within one interval of the grid: the last is held and alone counts,
// in whatever order they come.
func TestScatterKnowsOnlyWhatIsHeld(t *testing.T) {
	readings := slices.Concat(at(0, 2, 350, 330), at(0.2, 2, 360, 330), at(0.9, 2, 351, 330), at(1.4, 2, 340, 330), at(2, 2, 352, 330))
	want := figureOf(t, readings)
	slices.Reverse(readings)
	if got := figureOf(t, readings); got != want {
		t.Errorf("in reverse order %+v, want %+v", got, want)
	}
	near(t, "random", want.Random, 2*4000*math.Sqrt((1+1)/2./2), 1e-6) // 350, 351, 352 K
}

func figureOf(t *testing.T, readings []Reading) Figure {
	e := engine(t, plant(liquid))
	e.Advance(Beat{readings, through(3)}, nil)
	return e.Snapshot().Loads[0].Figure
}

// What a transmitter sends without a signal leaves no mean that never comes back.
func TestScatterOfAbsurdReadings(t *testing.T) {
	for _, bad := range []float64{math.MaxFloat64, -math.MaxFloat64, math.Inf(1), math.NaN()} {
		e := engine(t, plant(liquid))
		for s := 0.0; s < 40; s++ {
			x := 350 + 0.1*math.Sin(s)
			if s == 20 {
				x = bad
			}
			e.Advance(Beat{at(s, 2, x, 330), through(s + 1)}, nil)
		}
		if f := e.Snapshot().Loads[0].Figure; !f.Measured() || !(f.Random > 0 && f.Random < 2*4000*0.1) {
			t.Errorf("after %g: random uncertainty of %g W, want that of 0.1 K and less", bad, f.Random)
		}
	}
}
