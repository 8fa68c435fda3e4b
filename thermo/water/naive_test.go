package water

import "math"

// naive evaluates γ of region 1 and its derivatives as the release prints them,
// each in a sum of its own with math.Pow: the yardstick for the one-pass form,
// both for its figures and for its speed.
type naive struct{ T, p float64 }

func (s naive) sum1(f func(n, i, j, x, y float64) float64) float64 {
	x, y := 7.1-s.p/16.53e6, 1386/s.T-1.222
	var total float64
	for _, t := range region1Terms {
		total += f(t.n, float64(t.i), float64(t.j), x, y)
	}
	return total
}

func (s naive) gamma1() float64 {
	return s.sum1(func(n, i, j, x, y float64) float64 { return n * math.Pow(x, i) * math.Pow(y, j) })
}

func (s naive) gamma1Pi() float64 {
	return s.sum1(func(n, i, j, x, y float64) float64 { return -n * i * math.Pow(x, i-1) * math.Pow(y, j) })
}

func (s naive) gamma1Tau() float64 {
	return s.sum1(func(n, i, j, x, y float64) float64 { return n * j * math.Pow(x, i) * math.Pow(y, j-1) })
}

func (s naive) gamma1PiPi() float64 {
	return s.sum1(func(n, i, j, x, y float64) float64 { return n * i * (i - 1) * math.Pow(x, i-2) * math.Pow(y, j) })
}

func (s naive) gamma1TauTau() float64 {
	return s.sum1(func(n, i, j, x, y float64) float64 { return n * j * (j - 1) * math.Pow(x, i) * math.Pow(y, j-2) })
}

func (s naive) gamma1PiTau() float64 {
	return s.sum1(func(n, i, j, x, y float64) float64 { return -n * i * j * math.Pow(x, i-1) * math.Pow(y, j-1) })
}

func (s naive) region1() gibbs {
	pi, tau := s.p/16.53e6, 1386/s.T
	return gibbs{
		g: s.gamma1(), p: pi * s.gamma1Pi(), t: tau * s.gamma1Tau(),
		pp: pi * pi * s.gamma1PiPi(), tt: tau * tau * s.gamma1TauTau(), pt: pi * tau * s.gamma1PiTau(),
	}
}

func (s naive) sum2(f func(n, i, j, x, y float64) float64) float64 {
	x, y := s.p/1e6, 540/s.T-0.5
	var total float64
	for _, t := range region2Residual {
		total += f(t.n, float64(t.i), float64(t.j), x, y)
	}
	return total
}

func (s naive) sum2Ideal(f func(n, j, y float64) float64) float64 {
	var total float64
	for _, t := range region2Ideal {
		total += f(t.n, float64(t.j), 540/s.T)
	}
	return total
}

func (s naive) region2() gibbs {
	pi, tau := s.p/1e6, 540/s.T
	pow := math.Pow
	return gibbs{
		g: math.Log(pi) + s.sum2Ideal(func(n, j, y float64) float64 { return n * pow(y, j) }) +
			s.sum2(func(n, i, j, x, y float64) float64 { return n * pow(x, i) * pow(y, j) }),
		p: 1 + pi*s.sum2(func(n, i, j, x, y float64) float64 { return n * i * pow(x, i-1) * pow(y, j) }),
		t: tau * (s.sum2Ideal(func(n, j, y float64) float64 { return n * j * pow(y, j-1) }) +
			s.sum2(func(n, i, j, x, y float64) float64 { return n * j * pow(x, i) * pow(y, j-1) })),
		pp: -1 + pi*pi*s.sum2(func(n, i, j, x, y float64) float64 { return n * i * (i - 1) * pow(x, i-2) * pow(y, j) }),
		tt: tau * tau * (s.sum2Ideal(func(n, j, y float64) float64 { return n * j * (j - 1) * pow(y, j-2) }) +
			s.sum2(func(n, i, j, x, y float64) float64 { return n * j * (j - 1) * pow(x, i) * pow(y, j-2) })),
		pt: pi * tau * s.sum2(func(n, i, j, x, y float64) float64 { return n * i * j * pow(x, i-1) * pow(y, j-1) }),
	}
}
