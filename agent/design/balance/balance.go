// Package balance reconciles measurements with the balances that they must keep, by weighted
// least squares, and tests whether what is left over is more than their uncertainties explain.
// It is pure. F. A. Kuehn and H. Davidson, Chem. Eng. Prog. 57 (1961); S. Narasimhan and C.
// Jordache, Data Reconciliation and Gross Error Detection (2000).
package balance

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"
)

// Linear is what a linear reconciliation gives. Vectors are in the order of the measurements,
// Nodal in that of the constraints.
type Linear struct {
	X     []float64     // reconciled values
	Cov   *mat.SymDense // their covariance
	Gamma float64       // global test: rᵀH⁻¹r, chi-square with as many degrees of freedom as constraints
	Z     []float64     // measurement test: adjustments in their standard deviations; 0 of what nothing can adjust
	Nodal []float64     // residuals in their standard deviations
	// Suspect is the measurement with the greatest Z, and Tells whether no other has the same:
	// only then do the balances tell whose measurement would be at fault.
	Suspect int
	Tells   bool
}

// Reconcile adjusts the measurements y of covariance V to A·x = b, A with fewer independent
// rows than columns:
//
//	x = y − V·Aᵀ·H⁻¹·r,  r = A·y − b,  H = A·V·Aᵀ
//
// With a single constraint all Z are equal: that the balance fails can be seen, and not whose
// measurement is at fault. That takes another reading of the same, or history.
func Reconcile(y []float64, v mat.Symmetric, a mat.Matrix, b []float64) (Linear, error) {
	rows, n := a.Dims()
	if len(y) != n || v.SymmetricDim() != n || len(b) != rows {
		return Linear{}, fmt.Errorf("%d measurements, a covariance of %d, %d constraints of %d and %d right sides do not fit", len(y), v.SymmetricDim(), rows, n, len(b))
	}
	var r, av, h, gain mat.Dense
	r.Mul(a, mat.NewDense(n, 1, append([]float64(nil), y...)))
	r.Sub(&r, mat.NewDense(rows, 1, append([]float64(nil), b...)))
	av.Mul(a, v)
	h.Mul(&av, a.T())
	if err := gain.Solve(&h, &av); err != nil { // H⁻¹·A·V
		return Linear{}, fmt.Errorf("constraints are not independent, or a covariance is zero: %w", err)
	}
	var adjust, cut, left mat.Dense
	adjust.Mul(gain.T(), &r)
	cut.Mul(av.T(), &gain) // V·Aᵀ·H⁻¹·A·V, the covariance of the adjustments
	if err := left.Solve(&h, &r); err != nil {
		return Linear{}, err
	}
	out := Linear{Cov: mat.NewSymDense(n, nil)}
	for i := range n {
		out.X = append(out.X, y[i]-adjust.At(i, 0))
		z := 0.0
		if s := cut.At(i, i); s > 0 {
			z = math.Abs(adjust.At(i, 0)) / math.Sqrt(s)
		}
		out.Z = append(out.Z, z)
		for j := i; j < n; j++ {
			out.Cov.SetSym(i, j, v.At(i, j)-cut.At(i, j))
		}
	}
	for i := range rows {
		out.Gamma += r.At(i, 0) * left.At(i, 0)
		out.Nodal = append(out.Nodal, math.Abs(r.At(i, 0))/math.Sqrt(h.At(i, i)))
	}
	out.Suspect, out.Tells = suspect(out.Z)
	return out, nil
}

// suspect is the place of the greatest z, and whether the next one is less by more than
// rounding.
func suspect(z []float64) (at int, tells bool) {
	next := 0.0
	for i := range z {
		if z[i] > z[at] {
			at = i
		}
	}
	for i := range z {
		if i != at {
			next = max(next, z[i])
		}
	}
	return at, next < z[at]*(1-1e-6)
}

// ChiSquare is the limit of the global test: that which chance alone exceeds in a part alpha
// of cases.
func ChiSquare(freedom int, alpha float64) float64 {
	return distuv.ChiSquared{K: float64(freedom)}.Quantile(1 - alpha)
}

// Sidak is the limit of the measurement test among n measurements: that which chance alone
// exceeds anywhere in a part alpha of cases.
func Sidak(n int, alpha float64) float64 {
	beta := 1 - math.Pow(1-alpha, 1/float64(n))
	return distuv.UnitNormal.Quantile(1 - beta/2)
}

// Duties are two duties that differ by a loss alone.
type Duties struct {
	Hot, Cold    float64 // reconciled
	Uncertainty  float64 // standard, of either
	Closure      float64 // hot − cold − loss as measured
	ClosureError float64 // its standard uncertainty
	Gamma        float64 // chi-square with one degree of freedom
}

// Close reconciles what a hot stream gives, uHot uncertain, with what a cold one takes: each
// gives way by its part of the variance. Where neither is uncertain both stay as measured, and
// Gamma is infinite unless they close.
func Close(hot, uHot, cold, uCold, loss float64) Duties {
	d := Duties{Closure: hot - cold - loss, ClosureError: math.Hypot(uHot, uCold)}
	if d.ClosureError == 0 {
		d.Hot, d.Cold = hot, cold
		if d.Closure != 0 {
			d.Gamma = math.Inf(1)
		}
		return d
	}
	w := uHot * uHot / (d.ClosureError * d.ClosureError)
	d.Hot, d.Cold = hot-w*d.Closure, cold+(1-w)*d.Closure
	d.Uncertainty = uHot * uCold / d.ClosureError
	d.Gamma = d.Closure * d.Closure / (d.ClosureError * d.ClosureError)
	return d
}

// Stream is one side of an exchanger: mass flow kg/s, temperatures K, mean specific heat
// between them J/(kg K), with the standard uncertainties of the three readings.
type Stream struct {
	Flow, Inlet, Outlet                float64
	FlowError, InletError, OutletError float64
	Cp                                 float64
}

// Pair is what a bilinear reconciliation of the two streams of an exchanger gives. There is
// one constraint, so that nothing in it tells which reading is at fault.
type Pair struct {
	Hot, Cold   Stream  // reconciled
	Duty        float64 // that the hot side gives, W
	Uncertainty float64 // standard, of Duty
	Gamma       float64 // sum of squares of the adjustments in their uncertainties; chi-square with one degree of freedom
	Rounds      int
}

// ErrGross says that what is reconciled cannot be: a flow below zero, a stream that goes the wrong
// way, or temperatures that cross: a cold outlet above the hot inlet, or a hot outlet below the
// cold inlet, which no arrangement of flows allows.
var ErrGross = errors.New("the reconciled figures cannot be, which tells of a gross error")

// mostRounds bounds the linearisations; three to five are enough for readings that fit.
const mostRounds = 20

// Reconciled adjusts the six readings of an exchanger to
//
//	q_h·cp_h·(T1 − T2) − q_c·cp_c·(t2 − t1) = loss
//
// by successive linearisation. An uncertainty of 0 keeps a reading as it is.
func Reconciled(hot, cold Stream, loss float64) (Pair, error) {
	y := [6]float64{hot.Flow, hot.Inlet, hot.Outlet, cold.Flow, cold.Inlet, cold.Outlet}
	u := [6]float64{hot.FlowError, hot.InletError, hot.OutletError, cold.FlowError, cold.InletError, cold.OutletError}
	x := y
	var p Pair
	var jac [6]float64
	var h float64
	for p.Rounds = 1; ; p.Rounds++ {
		jac = slopes(&x, hot.Cp, cold.Cp)
		f := x[0]*hot.Cp*(x[1]-x[2]) - x[3]*cold.Cp*(x[5]-x[4]) - loss
		h = 0
		for i := range y {
			f += jac[i] * (y[i] - x[i])
			h += jac[i] * jac[i] * u[i] * u[i]
		}
		if !(h > 0) {
			return p, errors.New("no reading has an uncertainty that could give way")
		}
		moved := 0.0
		for i := range y {
			next := y[i] - u[i]*u[i]*jac[i]*f/h
			if u[i] > 0 {
				moved = max(moved, math.Abs(next-x[i])/u[i])
			}
			x[i] = next
		}
		if moved < 1e-9 {
			break
		}
		if p.Rounds == mostRounds {
			return p, fmt.Errorf("no solution after %d rounds: %w", mostRounds, ErrGross)
		}
	}
	for i := range y {
		if u[i] > 0 {
			p.Gamma += (y[i] - x[i]) * (y[i] - x[i]) / (u[i] * u[i])
		}
	}
	p.Hot, p.Cold = hot, cold
	p.Hot.Flow, p.Hot.Inlet, p.Hot.Outlet = x[0], x[1], x[2]
	p.Cold.Flow, p.Cold.Inlet, p.Cold.Outlet = x[3], x[4], x[5]
	p.Duty = x[0] * hot.Cp * (x[1] - x[2])
	p.Uncertainty = dutyError(&jac, &u, h)
	if !(x[0] > 0) || !(x[3] > 0) || !(x[1] > x[2]) || !(x[5] > x[4]) || x[5] > x[1] || x[4] > x[2] {
		return p, fmt.Errorf("hot %g kg/s from %g to %g K, cold %g kg/s from %g to %g K: %w", x[0], x[1], x[2], x[3], x[4], x[5], ErrGross)
	}
	return p, nil
}

// slopes are those of the constraint.
func slopes(x *[6]float64, ch, cc float64) [6]float64 {
	return [6]float64{
		ch * (x[1] - x[2]), ch * x[0], -ch * x[0],
		-cc * (x[5] - x[4]), cc * x[3], -cc * x[3],
	}
}

// dutyError is the standard uncertainty of the duty of the hot side: of the variance gᵀVg by
// its own three readings the constraint takes (gᵀVJ)²/h.
func dutyError(jac, u *[6]float64, h float64) float64 {
	var own float64
	for i := range 3 {
		own += jac[i] * jac[i] * u[i] * u[i]
	}
	return math.Sqrt(max(0, own-own*own/h))
}
