package table

import "math"

// vapour is the boiling point against pressure: 1/T over ln p, which is nearly straight
// (Clausius-Clapeyron), as a monotone cubic through the rows. It falls all along, so that
// one pressure has one boiling point.
type vapour struct {
	lowest, highest float64 // Pa, vapour pressures of the first and the last row that has one
	first           float64 // K, of the first such row
	starts          []float64
	inverse         []cubic // 1/K over ln Pa
}

// newVapour draws the curve through the rows that have a vapour pressure, or returns nil
// where there are none.
func newVapour(points []Point) *vapour {
	var x, y []float64
	for _, p := range points {
		if p.VapourPressure > 0 {
			x, y = append(x, math.Log(p.VapourPressure)), append(y, 1/p.T)
		}
	}
	if len(x) == 0 {
		return nil
	}
	n := len(points)
	return &vapour{
		lowest: points[n-len(x)].VapourPressure, highest: points[n-1].VapourPressure, first: points[n-len(x)].T,
		starts: x[:len(x)-1], inverse: interpolate(x, y),
	}
}

// boiling returns the boiling point in K at p in Pa. Above the vapour pressure of the last
// row the liquid boils somewhere beyond the table: +Inf. Below the lowest one all that is
// known is that it boils before that row's temperature, which is returned.
func (v *vapour) boiling(p float64) float64 {
	switch {
	case !(p > v.lowest):
		return v.first
	case p > v.highest:
		return math.Inf(1)
	}
	x := math.Log(p)
	k := stretch(v.starts, x)
	return 1 / v.inverse[k].at(x-v.starts[k])
}
