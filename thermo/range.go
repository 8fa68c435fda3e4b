package thermo

import (
	"fmt"
	"math"
)

// RangeError says that a state lies outside a fluid's range, and which bound it
// passed. It is returned by [Fluid.At].
type RangeError struct {
	Fluid    string  // name of the fluid
	Quantity string  // "temperature", "pressure"
	Value    float64 // K or Pa
	Bound    float64 // K or Pa
	Below    bool    // true where Value < Bound and should not be
	Why      string  // what the bound is: "freezing point", "saturation", "range of IAPWS-IF97 region 1"
}

func (e *RangeError) Error() string {
	side := "above"
	if e.Below {
		side = "below"
	}
	return fmt.Sprintf("%s: %s %s is %s %s (%s)", e.Fluid, e.Quantity, e.show(e.Value), side, e.show(e.Bound), e.Why)
}

func (e *RangeError) show(v float64) string {
	if e.Quantity == "temperature" {
		return fmt.Sprintf("%.6g °C", v-273.15)
	}
	return fmt.Sprintf("%.6g kPa", v/1e3)
}

// Check returns a *[RangeError] when T in K or p in Pa lies outside the box b or
// is not a finite number, and nil otherwise. why says what the box is, such as
// "range of IAPWS-IF97 region 1". A lower pressure bound of 0 is open: a
// pressure of exactly 0 is refused.
func (b Bounds) Check(fluid string, T, p float64, why string) error {
	if T >= b.MinT && T <= b.MaxT && p >= b.MinP && p <= b.MaxP && p > 0 && !math.IsInf(T, 0) && !math.IsInf(p, 0) {
		return nil
	}
	return b.refusal(fluid, T, p, why)
}

func (b Bounds) refusal(fluid string, T, p float64, why string) error {
	if r := outside(T, b.MinT, b.MaxT); r != nil {
		r.Fluid, r.Quantity = fluid, "temperature"
		if r.Why == "" {
			r.Why = why
		}
		return r
	}
	r := outside(p, b.MinP, b.MaxP)
	if r == nil {
		r = &RangeError{Value: p, Bound: 0, Below: true, Why: "an absolute pressure is above zero"}
	}
	r.Fluid, r.Quantity = fluid, "pressure"
	if r.Why == "" {
		r.Why = why
	}
	return r
}

// outside returns what bound v passes, without names, and nil when it passes none.
func outside(v, lo, hi float64) *RangeError {
	switch {
	case math.IsNaN(v):
		return &RangeError{Value: v, Bound: lo, Below: true, Why: "not a number"}
	case v < lo || math.IsInf(v, -1):
		return &RangeError{Value: v, Bound: lo, Below: true}
	case v > hi || math.IsInf(v, 1):
		return &RangeError{Value: v, Bound: hi}
	}
	return nil
}
