package steady

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// Line is the straight line through values at steps of one.
type Line struct {
	Slope float64 // a step
	Error float64 // its standard uncertainty; 0 where the values lie on the line
	N     int
}

// Fit returns the line of least squares through ys; of fewer than three it is flat.
func Fit(ys []float64) Line {
	n := float64(len(ys))
	if len(ys) < 3 {
		return Line{N: len(ys)}
	}
	var my float64
	for _, y := range ys {
		my += y
	}
	my /= n
	mid := (n - 1) / 2
	var xx, xy, yy float64
	for i, y := range ys {
		dx, dy := float64(i)-mid, y-my
		xx += dx * dx
		xy += dx * dy
		yy += dy * dy
	}
	b := xy / xx
	left := yy - b*xy
	if left < 1e-24*(yy+n*my*my) { // of rounding alone
		left = 0
	}
	return Line{Slope: b, Error: math.Sqrt(left / (n - 2) / xx), N: len(ys)}
}

// T is the slope in its standard uncertainties, beyond 1000 where it has none.
func (l Line) T() float64 {
	if l.Slope == 0 {
		return 0
	}
	return max(-1000, min(1000, l.Slope/l.Error))
}

// Significant tells whether a slope as great would be found by chance in fewer than a part
// alpha of lines through noise: |b|/s_b beyond Student's t with N − 2 degrees of freedom.
func (l Line) Significant(alpha float64) bool {
	return l.N > 2 && math.Abs(l.T()) > student(l.N-2, alpha)
}

func student(freedom int, alpha float64) float64 {
	return distuv.StudentsT{Mu: 0, Sigma: 1, Nu: float64(freedom)}.Quantile(1 - alpha/2)
}
