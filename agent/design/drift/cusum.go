// Package drift finds small deviations that stay: the tabular CUSUM with the limit that gives
// a chosen number of false signals, the EWMA, the scatter that both are measured by, and the
// scores that set a deviation beside its uncertainty. It is pure.
package drift

// CUSUM is a two-sided tabular CUSUM of values that are near 0, in their standard deviations,
// while nothing has changed:
//
//	High ← max(0, High + x − k),  Low ← max(0, Low − x − k)
//
// with a signal where either exceeds h. NIST/SEMATECH e-Handbook of Statistical Methods,
// 6.3.2.3. Its fields are its state.
type CUSUM struct {
	High, Low           float64
	HighSince, LowSince int64 // instants at which the sums left 0
	HighN, LowN         int   // values since then
}

// Observe takes in the value x of the instant at; k is half of the shift to be found soonest.
func (c *CUSUM) Observe(at int64, x, k float64) {
	if c.High == 0 {
		c.HighSince, c.HighN = at, 0
	}
	if c.Low == 0 {
		c.LowSince, c.LowN = at, 0
	}
	c.High, c.Low = max(0, c.High+x-k), max(0, c.Low-x-k)
	c.HighN, c.LowN = c.HighN+1, c.LowN+1
}

// Size is the shift since a sum left 0, estimated as k + S/N, of the side 1 or −1; signed, and 0
// of a sum that is 0.
func (c *CUSUM) Size(side int, k float64) float64 {
	switch {
	case side > 0 && c.High > 0:
		return k + c.High/float64(c.HighN)
	case side < 0 && c.Low > 0:
		return -k - c.Low/float64(c.LowN)
	}
	return 0
}

// Bound keeps the sums from rising beyond h, so that the way back is not longer than a signal
// took.
func (c *CUSUM) Bound(h float64) { c.High, c.Low = min(c.High, h), min(c.Low, h) }

// EWMA is an exponentially weighted moving average z ← λ·x + (1 − λ)·z. NIST/SEMATECH
// e-Handbook, 6.3.2.4.
type EWMA struct {
	Z float64
	N int // values taken in
}

// Observe takes in x; z0 is where the average starts.
func (e *EWMA) Observe(x, lambda, z0 float64) {
	if e.N == 0 {
		e.Z = z0
	}
	e.N++
	e.Z += lambda * (x - e.Z)
}
