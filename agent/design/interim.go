package design

import "math"

// Gate, CUSUM and Scale stand here until packages steady and drift do.

// Told is what a gate tells.
type Told struct {
	Steady bool
	Worst  string  // variable
	Change float64 // of the duty over the window by its slope, W
	T      float64 // slope in its standard errors
	Limit  float64 // W
}

// Gate holds the last minutes of some variables.
type Gate struct {
	Values [][]float64
	Now    Told
}

var variables = [...]string{"duty", "flow", "inlet", "outlet"}

// sense takes a minute into the gate.
func (j *Judge) sense(m *Minute) {
	if !m.Whole {
		j.Gate = Gate{}
		return
	}
	c := m.capacity()
	values := [...]float64{m.Duty, m.Flow, m.Inlet, m.Outlet}
	by := [...]float64{1, 0, c, c}
	if m.Flow > 0 {
		by[1] = math.Abs(m.Duty) / m.Flow
	}
	j.Gate.Values = append(j.Gate.Values, values[:])
	if n := len(j.Gate.Values); n > j.lasting {
		j.Gate.Values = append(j.Gate.Values[:0], j.Gate.Values[n-j.lasting:]...)
	}
	allow := j.target.Allow
	if allow == 0 {
		allow = defaultAllow
	}
	t := Told{Steady: true, Limit: allow * math.Abs(m.Duty)}
	for k := range variables {
		ys := make([]float64, 0, len(j.Gate.Values))
		for _, v := range j.Gate.Values {
			ys = append(ys, v[k])
		}
		b, s := slope(ys)
		change := math.Abs(b) * float64(len(ys)) * by[k]
		if change > t.Change {
			t.Worst, t.Change = variables[k], change
			if s > 0 {
				t.T = b / s
			}
		}
	}
	t.Steady = !(t.Change > t.Limit && (math.Abs(t.T) > 2.3 || t.T == 0))
	j.Gate.Now = t
}

// defaultAllow is the allowance by which a load without a design is called steady.
const defaultAllow = 0.1

func slope(ys []float64) (b, s float64) {
	n := float64(len(ys))
	if n < 3 {
		return 0, 0
	}
	var my float64
	for _, y := range ys {
		my += y / n
	}
	mx := (n - 1) / 2
	var sxx, sxy, syy float64
	for i, y := range ys {
		dx := float64(i) - mx
		sxx += dx * dx
		sxy += dx * (y - my)
		syy += (y - my) * (y - my)
	}
	b = sxy / sxx
	return b, math.Sqrt(max(0, syy-b*sxy) / (n - 2) / sxx)
}

// Sums are a two-sided tabular CUSUM.
type Sums struct {
	High, Low           float64
	HighSince, LowSince int64
	HighN, LowN         int
}

func (c *Sums) observe(at int64, x, k float64) {
	if c.High == 0 {
		c.HighSince, c.HighN = at, 0
	}
	if c.Low == 0 {
		c.LowSince, c.LowN = at, 0
	}
	c.High, c.Low = max(0, c.High+x-k), max(0, c.Low-x-k)
	c.HighN, c.LowN = c.HighN+1, c.LowN+1
}

// Scale estimates the scatter of windows by their successive differences.
type Scale struct {
	N        int
	Last, S2 float64
}

func (s *Scale) observe(d float64) {
	if s.N++; s.N > 1 {
		w := max(1/float64(s.N-1), 1.0/200)
		s.S2 += w * ((d-s.Last)*(d-s.Last)/2 - s.S2)
	}
	s.Last = d
}

func (s *Scale) sigma() float64 { return math.Sqrt(s.S2) }

// threshold is h of a two-sided CUSUM with slack k that runs arl windows on the mean, by
// Siegmund's approximation.
func threshold(k, arl float64) float64 {
	lo, hi := 0.0, 50.0
	for range 60 {
		h := (lo + hi) / 2
		b := h + 1.166
		if one := (math.Exp(2*k*b) - 2*k*b - 1) / (2 * k * k); one/2 < arl {
			lo = h
		} else {
			hi = h
		}
	}
	return hi
}
