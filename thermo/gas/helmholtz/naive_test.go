package helmholtz

import (
	"math"
	"math/rand/v2"
	"testing"

	"heatreeve/thermo"
)

// naive evaluates φ and its derivatives as the papers print them, each in a sum
// of its own with math.Pow: the yardstick for the ordered form, both for its
// figures and for its speed.
type naive struct {
	*substance
	delta, tau float64
}

func (s naive) sum(power func(p power) float64, gaussian func(g gaussian) float64, critical func(c printedTerm) float64) float64 {
	var total float64
	for _, p := range s.powers {
		total += p.n * math.Pow(s.tau, p.t) * math.Pow(s.delta, float64(p.d)) * power(p)
	}
	for _, g := range s.gaussians {
		total += g.n * math.Pow(s.delta, float64(g.d)) * math.Pow(s.tau, g.t) * s.bell(g) * gaussian(g)
	}
	for _, c := range s.nonAnalytics {
		total += c.n * critical(printedTerm{c, s.delta, s.tau})
	}
	return total
}

func (s naive) bell(g gaussian) float64 {
	x := -g.eta * math.Pow(s.delta-g.epsilon, 2)
	if g.b != 0 {
		return math.Exp(x + 1/(g.b+g.beta*math.Pow(s.tau-g.gamma, 2)))
	}
	return math.Exp(x - g.beta*math.Pow(s.tau-g.gamma, 2))
}

// damp is exp(−δ^l) and steep l δ^l, both for l = 0 as if the factor were not
// there.
func (s naive) damp(p power) (damp, steep float64) {
	if p.l == 0 {
		return 1, 0
	}
	x := math.Pow(s.delta, float64(p.l))
	return math.Exp(-x), float64(p.l) * x
}

// tilt is the derivative of the logarithm of a Gaussian by τ, and bend its own.
func (s naive) tilt(g gaussian) (tilt, bend float64) {
	x := s.tau - g.gamma
	if g.b == 0 {
		return g.t/s.tau - 2*g.beta*x, -g.t/(s.tau*s.tau) - 2*g.beta
	}
	q := g.b + g.beta*x*x
	return g.t/s.tau - 2*g.beta*x/math.Pow(q, 2), -g.t/(s.tau*s.tau) - 2*g.beta/math.Pow(q, 2) + 8*g.beta*g.beta*x*x/math.Pow(q, 3)
}

func (s naive) phi() float64 {
	return s.sum(
		func(p power) float64 { e, _ := s.damp(p); return e },
		func(g gaussian) float64 { return 1 },
		func(c printedTerm) float64 { return math.Pow(c.Delta(), c.b) * c.delta * c.psi() })
}

func (s naive) phiD() float64 {
	return s.sum(
		func(p power) float64 { e, x := s.damp(p); return e * (float64(p.d) - x) / s.delta },
		func(g gaussian) float64 { return float64(g.d)/s.delta - 2*g.eta*(s.delta-g.epsilon) },
		printedTerm.phiD)
}

func (s naive) phiDD() float64 {
	return s.sum(
		func(p power) float64 {
			e, x := s.damp(p)
			d, l := float64(p.d), float64(p.l)
			return e * ((d-x)*(d-1-x) - l*x) / math.Pow(s.delta, 2)
		},
		func(g gaussian) float64 {
			w := float64(g.d)/s.delta - 2*g.eta*(s.delta-g.epsilon)
			return w*w - float64(g.d)/math.Pow(s.delta, 2) - 2*g.eta
		},
		printedTerm.phiDD)
}

func (s naive) phiT() float64 {
	return s.sum(
		func(p power) float64 { e, _ := s.damp(p); return e * p.t / s.tau },
		func(g gaussian) float64 { w, _ := s.tilt(g); return w },
		printedTerm.phiT)
}

func (s naive) phiTT() float64 {
	return s.sum(
		func(p power) float64 { e, _ := s.damp(p); return e * p.t * (p.t - 1) / math.Pow(s.tau, 2) },
		func(g gaussian) float64 { w, b := s.tilt(g); return w*w + b },
		printedTerm.phiTT)
}

func (s naive) phiDT() float64 {
	return s.sum(
		func(p power) float64 { e, x := s.damp(p); return e * (float64(p.d) - x) * p.t / (s.delta * s.tau) },
		func(g gaussian) float64 {
			w, _ := s.tilt(g)
			return w * (float64(g.d)/s.delta - 2*g.eta*(s.delta-g.epsilon))
		},
		printedTerm.phiDT)
}

func (s naive) sums() sums {
	d, t := s.delta, s.tau
	return sums{d: d * s.phiD(), dd: d * d * s.phiDD(), t: t * s.phiT(), tt: t * t * s.phiTT(), dt: d * t * s.phiDT()}
}

// naiveState seeks the density by the secant method from the ideal gas on and
// sums what the properties need.
func naiveState(f *fluid, T, p float64) thermo.Properties {
	tau, q := f.reducingT/T, p/(f.dense*f.r*T)
	miss := func(delta float64) float64 {
		return delta*(1+delta*naive{f.substance, delta, tau}.phiD()) - q
	}
	d1, d2 := 0.99*q, q
	f1, f2 := miss(d1), miss(d2)
	for range 50 {
		if math.Abs(d2-d1) <= 1e-12*d2 || f1 == f2 {
			break
		}
		d1, d2 = d2, d2-f2*(d2-d1)/(f2-f1)
		f1, f2 = f2, miss(d2)
	}
	s := naive{f.substance, d2, tau}.sums()
	u, cv := f.ideal.at(tau)
	rho, internal := d2*f.dense, f.r*T*(u+s.t)+f.offset
	w := 1 + s.d - s.dt
	return thermo.Properties{
		Enthalpy: internal + p/rho, InternalEnergy: internal,
		Cp: f.r * (cv - s.tt + w*w/(1+2*s.d+s.dd)), Cv: f.r * (cv - s.tt), Density: rho,
	}
}

// The ordered form against the printed form. Terms of opposite sign cancel in the
// sums, so the difference is measured against the larger of the value and 1, and
// at high δ and τ against the largest term.
func TestOrderedFormEqualsPrintedForm(t *testing.T) {
	random := rand.New(rand.NewPCG(7, 7))
	for _, formula := range append(Formulas(), "dry-air") {
		f := of(t, formula)
		var worst float64
		for range 2000 {
			tau := math.Exp(random.Float64()*math.Log(f.criticalT/f.tripleT*f.maxT/f.criticalT)) * f.reducingT / f.maxT
			delta := 3 * math.Pow(random.Float64(), 3)
			if random.IntN(4) == 0 { // the critical region
				tau, delta = 1+0.02*(random.Float64()-0.5), 1+0.2*(random.Float64()-0.5)
			}
			var iso isotherm
			f.equation.at(tau, &iso)
			printed := naive{f.substance, delta, tau}
			got, want, short := f.equation.sums(&iso, delta), printed.sums(), f.equation.slopes(&iso, delta)
			scale := 1.0
			for _, c := range iso.cells {
				scale = max(scale, 0.01*math.Abs(c.c), 0.01*math.Abs(c.t), 0.001*math.Abs(c.tt))
			}
			for _, pair := range [][2]float64{{got.d, want.d}, {got.dd, want.dd}, {got.t, want.t}, {got.tt, want.tt}, {got.dt, want.dt}, {short.d, want.d}, {short.dd, want.dd}} {
				off := math.Abs(pair[0]-pair[1]) / max(math.Abs(pair[1]), scale)
				worst = max(worst, off)
				if !(off < 1e-11) {
					t.Fatalf("%s τ %g, δ %g: %+v and %+v, want %+v", f.name, tau, delta, got, short, want)
				}
			}
		}
		t.Logf("%-15s largest difference %.1e", f.name, worst)
	}
}

// At the critical density a non-analytic term is the limit of its neighbours, and
// the printed form has no value.
func TestCriticalDensity(t *testing.T) {
	for _, tau := range []float64{0.9, 0.99, 1.001, 1.2} {
		got := criticalSums(carbonDioxide.nonAnalytics, 1, tau)
		var want sums
		for _, delta := range []float64{1 - 1e-7, 1 + 1e-7} {
			s := criticalSums(carbonDioxide.nonAnalytics, delta, tau)
			want.plus(sums{s.d / 2, s.dd / 2, s.t / 2, s.tt / 2, s.dt / 2})
		}
		for _, pair := range [][2]float64{{got.d, want.d}, {got.dd, want.dd}, {got.t, want.t}, {got.tt, want.tt}, {got.dt, want.dt}} {
			if !(math.Abs(pair[0]-pair[1]) < 1e-6*(1+math.Abs(pair[1]))) {
				t.Errorf("τ %g: %+v, want %+v", tau, got, want)
			}
		}
	}
}
