package balance

import (
	"errors"
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"
)

func near(t *testing.T, what string, got, want, within float64) {
	t.Helper()
	if !(math.Abs(got-want) <= within) {
		t.Errorf("%s: %.8g, want %.8g ± %g", what, got, want, within)
	}
}

// bypass is an exchanger with a bypass: splitter 1 = 2 + 3, exchanger 2 = 4, valve 3 = 5,
// mixer 4 + 5 = 6.
func bypass(t *testing.T, y []float64) Linear {
	t.Helper()
	v := mat.NewSymDense(6, nil)
	for i := range 6 {
		v.SetSym(i, i, 1)
	}
	a := mat.NewDense(4, 6, []float64{
		1, -1, -1, 0, 0, 0,
		0, 1, 0, -1, 0, 0,
		0, 0, 1, 0, -1, 0,
		0, 0, 0, 1, 1, -1,
	})
	l, err := Reconcile(y, v, a, make([]float64, 4))
	if err != nil {
		t.Fatal(err)
	}
	return l
}

// S. Narasimhan and C. Jordache, Data Reconciliation and Gross Error Detection (2000), example
// 1-1, without and with a gross error of 9 in the second flow; figures as in the book from
// memory, recomputed.
func TestNarasimhanAndJordache(t *testing.T) {
	y := []float64{101.91, 64.45, 34.65, 64.20, 36.44, 98.88}
	l := bypass(t, y)
	for i, want := range []float64{100.22, 64.50, 35.72, 64.50, 35.72, 100.22} {
		near(t, "flow", l.X[i], want, 0.0051)
		near(t, "its standard deviation", math.Sqrt(l.Cov.At(i, i)), 0.5774, 5e-5)
	}
	for i, want := range []float64{2.070, 0.061, 1.310, 0.367, 0.882, 1.641} {
		near(t, "measurement test", l.Z[i], want, 5.1e-4)
	}
	near(t, "global test", l.Gamma, 6.4075, 5e-5)
	if limit := ChiSquare(4, 0.05); l.Gamma > limit {
		t.Errorf("global test %v fails at %v", l.Gamma, limit)
	}
	y[1] += 9
	l = bypass(t, y)
	for i, want := range []float64{101.72, 67.50, 34.22, 67.50, 34.22, 101.72} {
		near(t, "flow with the gross error", l.X[i], want, 0.0051)
	}
	near(t, "global test", l.Gamma, 59.51, 0.005)
	near(t, "largest of the measurement tests", l.Z[1], 7.287, 5e-4)
	for i, z := range l.Z {
		if z > l.Z[1] {
			t.Errorf("flow %d is blamed more than the one at fault: %v", i+1, l.Z)
		}
	}
	if l.Suspect != 1 || !l.Tells {
		t.Errorf("suspect %d, tells %v; want 1 and true", l.Suspect, l.Tells)
	}
	if l.Z[1] < Sidak(6, 0.05) {
		t.Errorf("the flow at fault passes: %v", l.Z[1])
	}
}

// With one constraint all are as suspect.
func TestOneBalanceBlamesNobody(t *testing.T) {
	v := mat.NewSymDense(3, []float64{4, 0, 0, 0, 1, 0, 0, 0, 9})
	l, err := Reconcile([]float64{100, 60, 55}, v, mat.NewDense(1, 3, []float64{1, -1, -1}), []float64{0})
	if err != nil {
		t.Fatal(err)
	}
	if l.Tells {
		t.Errorf("tells that %d is at fault by %v", l.Suspect, l.Z)
	}
	for _, z := range l.Z {
		near(t, "measurement test", z, l.Nodal[0], 1e-9)
		near(t, "its square", z*z, l.Gamma, 1e-9)
	}
}

func TestLimits(t *testing.T) {
	for freedom, want := range map[int]float64{1: 3.841, 2: 5.991, 3: 7.815, 4: 9.488} {
		near(t, "chi-square", ChiSquare(freedom, 0.05), want, 5e-4)
	}
	near(t, "Sidak", Sidak(6, 0.05), 2.631, 5e-4)
}

// 205 ± 6 beside 195 ± 3 kW, without a loss and with one of 5.
func TestTwoDuties(t *testing.T) {
	d := Close(205, 6, 195, 3, 0)
	near(t, "hot", d.Hot, 197, 1e-9)
	near(t, "cold", d.Cold, 197, 1e-9)
	near(t, "uncertainty", d.Uncertainty, 2.683, 5e-4)
	near(t, "gamma", d.Gamma, 2.222, 5e-4)
	d = Close(205, 6, 195, 3, 5)
	near(t, "hot", d.Hot, 201, 1e-9)
	near(t, "cold", d.Cold, 196, 1e-9)
	near(t, "gamma", d.Gamma, 0.556, 5e-4)
	if d = Close(205, 0, 195, 0, 0); d.Hot != 205 || d.Cold != 195 || !math.IsInf(d.Gamma, 1) {
		t.Errorf("two exact duties that differ: %+v", d)
	}
	if d = Close(200, 0, 195, 0, 5); d.Hot != 200 || d.Gamma != 0 {
		t.Errorf("two exact duties that close: %+v", d)
	}
}

var hot = Stream{Flow: 2.05, Inlet: 90, Outlet: 60.3, FlowError: 0.04, InletError: 0.2, OutletError: 0.2, Cp: 4.18}
var cold = Stream{Flow: 3.02, Inlet: 40, Outlet: 60.4, FlowError: 0.045, InletError: 0.2, OutletError: 0.2, Cp: 4.18}

// Six readings of an exchanger, in kW; figures recomputed by another implementation.
func TestBilinear(t *testing.T) {
	p, err := Reconciled(hot, cold, 0)
	if err != nil {
		t.Fatal(err)
	}
	for what, x := range map[string][2]float64{
		"hot flow": {p.Hot.Flow, 2.060366}, "hot inlet": {p.Hot.Inlet, 90.017956}, "hot outlet": {p.Hot.Outlet, 60.282044},
		"cold flow": {p.Cold.Flow, 3.011023}, "cold inlet": {p.Cold.Inlet, 40.026240}, "cold outlet": {p.Cold.Outlet, 60.373760},
	} {
		near(t, what, x[0], x[1], 5.1e-7)
	}
	near(t, "duty", p.Duty, 256.0954, 5e-5)
	near(t, "gamma", p.Gamma, 0.15750, 5e-6)
	if p.Rounds > 6 {
		t.Errorf("%d rounds", p.Rounds)
	}
}

// The duty's uncertainty by what 20,000 draws of the readings give (JCGM 101).
func TestDutyUncertainty(t *testing.T) {
	truth, err := Reconciled(hot, cold, 0)
	if err != nil {
		t.Fatal(err)
	}
	r := rand.New(rand.NewPCG(1, 1))
	draw := func(s Stream) Stream {
		s.Flow += s.FlowError * r.NormFloat64()
		s.Inlet += s.InletError * r.NormFloat64()
		s.Outlet += s.OutletError * r.NormFloat64()
		return s
	}
	const n = 20_000
	var sum, squares, gamma float64
	for range n {
		p, err := Reconciled(draw(truth.Hot), draw(truth.Cold), 0)
		if err != nil {
			t.Fatal(err)
		}
		d := p.Duty - truth.Duty
		sum += d
		squares += d * d
		gamma += p.Gamma
	}
	near(t, "standard deviation over the uncertainty", math.Sqrt(squares/n)/truth.Uncertainty, 1, 0.03)
	near(t, "mean of gamma", gamma/n, 1, 0.05)
	near(t, "bias in uncertainties", sum/n/truth.Uncertainty, 0, 0.05)
}

func TestGrossErrors(t *testing.T) {
	backwards := cold
	backwards.Inlet, backwards.Outlet = 70, 40
	backwards.FlowError = 0
	if _, err := Reconciled(hot, backwards, 0); !errors.Is(err, ErrGross) {
		t.Errorf("a cold side that cools: %v", err)
	}
	crossed := cold // 35 to 91 in a stream that is heated from 90
	crossed.Flow, crossed.Inlet, crossed.Outlet = 1.1, 35, 91
	if _, err := Reconciled(hot, crossed, 0); !errors.Is(err, ErrGross) {
		t.Errorf("a cold outlet above the hot inlet: %v", err)
	}
	crossed.Flow, crossed.Inlet, crossed.Outlet = 5.6, 70, 80.9
	if _, err := Reconciled(hot, crossed, 0); !errors.Is(err, ErrGross) {
		t.Errorf("a hot outlet below the cold inlet: %v", err)
	}
	none := Stream{Flow: 1, Inlet: 2, Outlet: 1, Cp: 1}
	if _, err := Reconciled(none, none, 0); err == nil {
		t.Error("nothing may give way, and there is no error")
	}
	if _, err := Reconcile([]float64{1}, mat.NewSymDense(2, nil), mat.NewDense(1, 2, nil), []float64{0}); err == nil {
		t.Error("sizes do not fit, and there is no error")
	}
}

func BenchmarkReconciled(b *testing.B) {
	b.ReportAllocs()
	for b.Loop() {
		if _, err := Reconciled(hot, cold, 0); err != nil {
			b.Fatal(err)
		}
	}
}
