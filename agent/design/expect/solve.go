package expect

import (
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"
)

// model is a fit of one shape.
type model struct {
	shape  shape
	cells  []cell
	terms  []Term
	slopes []float64
	cov    *mat.SymDense // (ZᵀZ)⁻¹ of the regressors centred in their cells
	rest   []float64     // residuals, W, in the order of the samples
	ssr    float64
	lag    float64
}

// cell is what the samples of one hour have in common.
type cell struct {
	n    int
	duty float64
	z    [3]float64 // means
}

// unknowns is how many numbers the model learns.
func (m *model) unknowns() int {
	k := len(m.terms)
	for i := range m.cells {
		if m.cells[i].n > 0 {
			k++
		}
	}
	if m.shape.bend != Straight {
		k++
	}
	return k
}

func (m *model) criterion() float64 {
	n, rho := float64(len(m.rest)), max(0, m.lag)
	return n*math.Log(m.ssr*(1-rho*rho)/n) + float64(m.unknowns())*math.Log(n)
}

// worst is the largest condition number of the scaled regressors: beyond it they are one.
const worst = 1e6

// solve fits a model of the shape.
func solve(samples []Sample, s shape, o Options) (*model, error) {
	m := &model{shape: s, cells: make([]cell, s.habit.cells())}
	for k := range o.Scales {
		t := Term{Scale: o.Scales[k], Driver: k}
		if k == 0 {
			t.Bend, t.Limit = s.bend, s.limit
		}
		m.terms = append(m.terms, t)
	}
	m.centre(samples)
	if err := m.tooThin(); err != nil {
		return nil, err
	}
	n, p := len(samples), len(m.terms)
	z, y := mat.NewDense(n, p, nil), mat.NewVecDense(n, nil)
	for i := range samples {
		c := &m.cells[s.habit.cell(samples[i].Hour)]
		y.SetVec(i, samples[i].Duty-c.duty)
		for k := range m.terms {
			z.Set(i, k, m.terms[k].z(samples[i].Drivers[k])-c.z[k])
		}
	}
	scales, err := m.normalise(z)
	if err != nil {
		return nil, err
	}
	var qr mat.QR
	qr.Factorize(z)
	if cond := qr.Cond(); !(cond < worst) {
		return nil, fmt.Errorf("%s move together (condition %.3g): learn against one of them", m.names(), cond)
	}
	var b mat.VecDense
	if err := qr.SolveVecTo(&b, false, y); err != nil {
		return nil, fmt.Errorf("least squares of %d samples: %w", n, err)
	}
	m.finish(z, y, &b, scales)
	if err := m.covariance(&qr, scales); err != nil {
		return nil, err
	}
	m.lag = lag(samples, m.rest, o.Span)
	return m, nil
}

// centre works the means of the cells.
func (m *model) centre(samples []Sample) {
	for i := range samples {
		c := &m.cells[m.shape.habit.cell(samples[i].Hour)]
		c.n++
		w := 1 / float64(c.n)
		c.duty += w * (samples[i].Duty - c.duty)
		for k := range m.terms {
			c.z[k] += w * (m.terms[k].z(samples[i].Drivers[k]) - c.z[k])
		}
	}
}

// tooThin says that an hour has too few samples to be told apart.
func (m *model) tooThin() error {
	if m.shape.habit <= NoHabit {
		return nil
	}
	for i := range m.cells {
		if n := m.cells[i].n; n < leastCell {
			return fmt.Errorf("hour %d of the habit %q has %d samples: at least %d are wanted", i, m.shape.habit, n, leastCell)
		}
	}
	return nil
}

func (m *model) names() string {
	text := ""
	for k := range m.terms {
		if k > 0 {
			text += " and "
		}
		text += fmt.Sprintf("tag %q", m.terms[k].Tag)
	}
	return text
}

// normalise scales the columns of z to length 1.
func (m *model) normalise(z *mat.Dense) ([]float64, error) {
	scales := make([]float64, len(m.terms))
	for k := range m.terms {
		scales[k] = mat.Norm(z.ColView(k), 2)
		if !(scales[k] > 0) {
			return nil, fmt.Errorf("tag %q tells nothing that the hours do not", m.terms[k].Tag)
		}
	}
	z.Apply(func(_, k int, x float64) float64 { return x / scales[k] }, z)
	return scales, nil
}

// finish takes slopes and residuals from the solution b of the scaled regressors z.
func (m *model) finish(z *mat.Dense, y, b *mat.VecDense, scales []float64) {
	var fitted mat.VecDense
	fitted.MulVec(z, b)
	for k := range m.terms {
		m.slopes = append(m.slopes, b.AtVec(k)/scales[k])
	}
	n := y.Len()
	m.rest = make([]float64, n)
	for i := range n {
		m.rest[i] = y.AtVec(i) - fitted.AtVec(i)
		m.ssr += m.rest[i] * m.rest[i]
	}
}

// covariance works (ZᵀZ)⁻¹ = R⁻¹·R⁻ᵀ.
func (m *model) covariance(qr *mat.QR, scales []float64) error {
	p := len(scales)
	var r mat.Dense
	qr.RTo(&r)
	upper := mat.NewTriDense(p, mat.Upper, nil)
	for i := range p {
		for j := i; j < p; j++ {
			upper.SetTri(i, j, r.At(i, j)*scales[j])
		}
	}
	var inverse mat.TriDense
	if err := inverse.InverseTri(upper); err != nil {
		return fmt.Errorf("covariance of the slopes of %s: %w", m.names(), err)
	}
	m.cov = mat.NewSymDense(p, nil)
	m.cov.SymOuterK(1, &inverse)
	return nil
}

// lag is the correlation of residuals of which one follows on the other.
func lag(samples []Sample, rest []float64, span int64) float64 {
	var product, square float64
	pairs := 0
	for i := 1; i < len(samples); i++ {
		if samples[i].At-samples[i-1].At == span {
			product += rest[i] * rest[i-1]
			square += (rest[i]*rest[i] + rest[i-1]*rest[i-1]) / 2
			pairs++
		}
	}
	if pairs < leastSamples || square == 0 {
		return 0
	}
	return min(0.99, max(-0.99, product/square))
}

// within are the samples whose residuals are no outliers: not so many scaled median absolute
// deviations from the median.
func (m *model) within(samples []Sample, far float64) (kept []Sample) {
	rest, apart := make([]float64, len(samples)), make([]float64, len(samples))
	for i := range samples {
		rest[i] = m.residualOf(&samples[i])
	}
	middle := median(rest)
	for i, x := range rest {
		apart[i] = math.Abs(x - middle)
	}
	most := far * 1.4826 * median(apart)
	for i := range samples {
		if apart[i] <= most {
			kept = append(kept, samples[i])
		}
	}
	return kept
}

func (m *model) residualOf(s *Sample) float64 {
	c := &m.cells[m.shape.habit.cell(s.Hour)]
	rest := s.Duty - c.duty
	for k := range m.terms {
		rest -= m.slopes[k] * (m.terms[k].z(s.Drivers[k]) - c.z[k])
	}
	return rest
}

func median(xs []float64) float64 {
	s := slices.Sorted(slices.Values(xs))
	n := len(s)
	return (s[(n-1)/2] + s[n/2]) / 2
}

// tell fills in the account of the fit.
func (m *model) tell(fit *Fit, samples []Sample) {
	fit.Used, fit.Habit, fit.Lag = len(samples), m.shape.habit, m.lag
	var sum, squares float64
	for i := range samples {
		sum += samples[i].Duty
	}
	fit.Mean = sum / float64(len(samples))
	for i := range samples {
		squares += (samples[i].Duty - fit.Mean) * (samples[i].Duty - fit.Mean)
		fit.Residuals = append(fit.Residuals, Residual{samples[i].At, m.rest[i]})
	}
	if squares > 0 {
		fit.R2 = 1 - m.ssr/squares
	}
	fit.Residual = m.residual()
	fit.Relative = fit.Residual / math.Abs(fit.Mean)
}

// residual is the standard deviation of the residuals.
func (m *model) residual() float64 {
	return math.Sqrt(m.ssr / float64(max(1, len(m.rest)-m.unknowns())))
}

// baseline is the model as it is to be used.
func (m *model) baseline(samples []Sample, o Options) Baseline {
	n := float64(len(samples))
	b := Baseline{Terms: m.terms, Residual: m.residual(), Lag: m.lag, Samples: len(samples), Cell: len(samples), Span: float64(o.Span) / 60e9}
	var centre [3]float64
	for i := range m.cells {
		c := &m.cells[i]
		b.Duty += float64(c.n) / n * c.duty
		for k := range b.Terms {
			centre[k] += float64(c.n) / n * c.z[k]
		}
		if c.n > 0 {
			b.Cell = min(b.Cell, c.n)
		}
	}
	inflate := math.Sqrt(n / b.count(n))
	for k := range b.Terms {
		t := &b.Terms[k]
		t.Low, t.High = ends(samples, k)
		t.Centre, t.Slope = centre[k], m.slopes[k]
		t.Error = b.Residual * math.Sqrt(m.cov.At(k, k)) * inflate
		for j := k + 1; j < len(b.Terms); j++ {
			b.Correlation = append(b.Correlation, m.cov.At(k, j)/math.Sqrt(m.cov.At(k, k)*m.cov.At(j, j)))
		}
	}
	if m.shape.habit > NoHabit {
		b.Hours = make([]float64, HoursAWeek)
		for h := range b.Hours {
			c := &m.cells[m.shape.habit.cell(h)]
			b.Hours[h] = c.duty - b.Duty
			for k := range b.Terms {
				b.Hours[h] -= m.slopes[k] * (c.z[k] - centre[k])
			}
		}
	}
	return b
}
