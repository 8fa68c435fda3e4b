package expect

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// Bend says on which side of its limit a driver counts in a [Baseline].
type Bend int8

const (
	Straight Bend = 0  // on both
	Below    Bend = -1 // below it: z = max(0, limit − x), as of heating
	Above    Bend = 1  // above it: z = max(0, x − limit), as of cooling
)

// beyond is by which part of its learned range a driver may lie outside it. Common practice,
// no source.
const beyond = 0.05

// Term is what one driver x adds to a [Baseline]: Slope·(z − Centre), z being x or by how
// much x is on the side of a limit that counts.
type Term struct {
	Scale
	Driver    int     // index into [Conditions.Drivers]
	Low, High float64 // between which x was learned, SI
	Bend      Bend
	Limit     float64 // SI, where Bend is not Straight
	Centre    float64 // mean of z in what was learned
	Slope     float64 // W a unit of z
	Error     float64 // standard uncertainty of Slope, with the residuals' autocorrelation
}

// z is what of the driver's value counts.
func (t *Term) z(x float64) float64 {
	switch t.Bend {
	case Below:
		return max(0, t.Limit-x)
	case Above:
		return max(0, x-t.Limit)
	}
	return x
}

// Baseline is what a load did in a time that was learned from, as a regression of its duty on
// drivers:
//
//	Q = Duty + Hours[h] + Σ Slope·(z − Centre)
//
// With a residual s and n samples, of which n' = n·(1 − ρ)/(1 + ρ) count where successive
// residuals have the correlation ρ, the standard deviation of a new sample about it is
//
//	√(s²·(1 + 1/n' + 1/m) + Σᵢ Σⱼ dᵢ·dⱼ·uᵢ·uⱼ·rᵢⱼ),  d = z − Centre,
//
// that is s·√(1 + xᵀ(XᵀX)⁻¹x) of a centred regression (N. R. Draper and H. Smith, Applied
// Regression Analysis, 3rd ed., 1998, 3.1). Only where there are Hours there is 1/m, of the hour
// that has fewest samples, which are a day apart. It is multiplied by half of Student's t for 95.45 %, so that twice
// of it is the prediction interval.
//
// What the coefficients leave open lasts. The residual of a sample is in the mean of any window
// that is no longer; a longer one would claim too little of it where one tells the next, and
// is not to be judged by this. One that is shorter claims more, as of white noise of minutes.
// The errors of the instruments that last are in the baseline as in
// what is measured, and cancel. The limit of a bend is taken as it stands.
type Baseline struct {
	Duty        float64 // at the centres, W
	Terms       []Term
	Correlation []float64 // of the slopes, r12, r13, r23
	Hours       []float64 // W added in each hour of the week; none or 168
	Residual    float64   // s, W
	Lag         float64   // ρ, −1 to 1; below 0 it counts as 0
	Samples     int       // n
	Cell        int       // samples in the hour of the week that has fewest; n without Hours
	Span        float64   // of a sample, minutes
}

// At works the baseline. It is not known where a driver has no value, or lies outside the
// range that was learned by more than a twentieth of it.
func (b Baseline) At(c Conditions) Expected {
	duty, open := b.Duty, b.Residual*b.Residual/b.count(float64(b.Samples))
	var d [3]float64
	for k := range b.Terms {
		t := &b.Terms[k]
		x, why := t.value(&c, t.Driver)
		if why != "" {
			return Expected{Why: why}
		}
		if room := beyond * (t.High - t.Low); x < t.Low-room || x > t.High+room {
			return Expected{Why: t.outside(x, t.Low, t.High)}
		}
		z := t.z(x) - t.Centre
		duty += t.Slope * z
		d[k] = z * t.Error
	}
	if len(b.Hours) > 0 {
		if c.Hour < 0 || c.Hour >= len(b.Hours) {
			return Expected{Why: fmt.Sprintf("hour %d is none of the week", c.Hour)}
		}
		duty += b.Hours[c.Hour]
		open += b.Residual * b.Residual / float64(b.Cell)
	}
	open += b.spread(d)
	wide := b.widening()
	lasting := wide * math.Sqrt(open)
	return Expected{
		Known: true, Duty: duty, Lasting: lasting, Joint: true, DeviationLasting: lasting,
		Random: wide * wide * b.Residual * b.Residual * b.Span,
	}
}

// spread is the variance by the slopes at distances d from the centres, each in standard
// uncertainties of its slope.
func (b *Baseline) spread(d [3]float64) float64 {
	v, k := 0.0, 0
	for i := range b.Terms {
		v += d[i] * d[i]
	}
	for i := range b.Terms {
		for j := i + 1; j < len(b.Terms); j++ {
			if k < len(b.Correlation) {
				v += 2 * d[i] * d[j] * b.Correlation[k]
			}
			k++
		}
	}
	return max(0, v)
}

// count is how many of n samples count.
func (b *Baseline) count(n float64) float64 {
	rho := max(0, b.Lag)
	return n * (1 - rho) / (1 + rho)
}

// widening is half of Student's t for 95.45 %.
func (b *Baseline) widening() float64 {
	left := float64(b.Samples - 1 - len(b.Terms))
	if len(b.Hours) > 0 {
		left -= float64(b.Samples) / float64(b.Cell)
	}
	t := distuv.StudentsT{Sigma: 1, Nu: max(1, b.count(left))}
	return t.Quantile(0.97725) / 2
}

// Interval is the standard deviation of a sample of the baseline's own span about what is
// expected in the conditions, W; NaN where nothing is.
func (b Baseline) Interval(c Conditions) float64 {
	e := b.At(c)
	if !e.Known {
		return math.NaN()
	}
	return math.Sqrt(e.Lasting*e.Lasting + e.Random/b.Span)
}

// Check says what about the baseline cannot be worked with.
func (b *Baseline) Check() error {
	if n := len(b.Terms); n < 1 || n > 3 {
		return fmt.Errorf("baseline against %d tags: one to three are wanted", n)
	}
	for k := range b.Terms {
		if t := &b.Terms[k]; !(t.High > t.Low) {
			return fmt.Errorf("range of tag %q ends at %s, which does not lie above its beginning at %s", t.Tag, t.Show(t.High), t.Show(t.Low))
		}
	}
	if n := len(b.Terms); len(b.Correlation) != n*(n-1)/2 {
		return fmt.Errorf("baseline against %d tags has %d correlations of their slopes: %d are wanted", n, len(b.Correlation), n*(n-1)/2)
	}
	if n := len(b.Hours); n != 0 && n != HoursAWeek {
		return fmt.Errorf("baseline has %d hours of the week", n)
	}
	if !(b.Residual > 0) || !(b.Lag > -1 && b.Lag < 1) || b.Cell < 1 || b.Samples < b.Cell || !(b.Span > 0) {
		return fmt.Errorf("baseline with a residual of %g W, lag %g, %d samples of %g min and %d in an hour of the week", b.Residual, b.Lag, b.Samples, b.Span, b.Cell)
	}
	return nil
}
