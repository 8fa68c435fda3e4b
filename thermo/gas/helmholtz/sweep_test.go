package helmholtz

import (
	"errors"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"heatreeve/thermo"
)

// TestSlope walks the whole range of every fluid, dense next to the boundaries of
// the phase and the critical point, and compares ∂h/∂T with cp. The step is a
// hundred-thousandth of T, and two step lengths together cancel the cubic term,
// which counts where cp changes within a few steps.
func TestSlope(t *testing.T) {
	const steps = 80
	for _, f := range all(t) {
		b := f.Bounds()
		lp1, lp2 := math.Log(max(b.MinP, b.MaxP*1e-8)*(1+1e-12)), math.Log(b.MaxP*(1-1e-12))
		var worst, at float64
		for i := range steps + 1 {
			p := math.Exp(lp1 + (lp2-lp1)*float64(i)/steps)
			lo, hi := f.Span(p)
			lo, hi = max(lo, b.MinT)*(1+2e-5), min(hi, b.MaxT)*(1-2e-5)
			for j := 0; j <= steps && lo < hi; j++ {
				x := math.Pow(float64(j)/steps, 2)
				T := lo + (hi-lo)*x
				if f.Phase() == thermo.Liquid {
					T = hi - (hi-lo)*x
				}
				off, err := slopeError(f, T, p)
				if err != nil {
					t.Fatal(err)
				}
				if worst = max(worst, off); worst == off {
					at = T
				}
			}
		}
		if !(worst <= 1e-6) {
			t.Errorf("%s: ∂h/∂T differs from cp by %.2g at %g K", f.Name(), worst, at)
		}
		t.Logf("%-22s ∂h/∂T within %.1e of cp, worst at %.1f K", f.Name(), worst, at)
	}
}

func slopeError(f thermo.Fluid, T, p float64) (float64, error) {
	s, err := f.At(T, p)
	if err != nil {
		return 0, err
	}
	if !(s.Cp >= s.Cv && s.Cv > 0 && s.Density > 0) {
		return math.NaN(), errors.New(f.Name() + ": not a state")
	}
	var g [2]float64
	for k, d := range [2]float64{T * 1e-5, T * 0.5e-5} {
		above, err1 := f.At(T+d, p)
		below, err2 := f.At(T-d, p)
		if err := errors.Join(err1, err2); err != nil {
			return 0, err
		}
		g[k] = (above.Enthalpy - below.Enthalpy) / ((T + d) - (T - d))
	}
	return math.Abs((4*g[1]-g[0])/3/s.Cp - 1), nil
}

// A phase is one branch of the isotherm: its density rises with pressure without
// a jump. Near the critical temperature a step of a fiftieth in pressure
// may still triple the density.
func TestDensityRises(t *testing.T) {
	for _, f := range all(t) {
		b := f.Bounds()
		for i := 1; i < 100; i++ {
			T := b.MinT + (b.MaxT-b.MinT)*math.Pow(float64(i)/100, 3)
			last := 0.0
			for p := max(b.MinP, b.MaxP*1e-6); p < b.MaxP; p *= 1.02 {
				s, err := f.At(T, p)
				if err != nil {
					last = 0
					continue
				}
				if !(s.Density > last) || last > 0 && s.Density > 3*last {
					t.Fatalf("%s %g K, %g Pa: density %g after %g kg/m³", f.Name(), T, p, s.Density, last)
				}
				last = s.Density
			}
		}
	}
}

// Whatever the input, there is either a whole state or an error.
func TestAnyInput(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 3))
	fluids := all(t)
	for n := range 100000 {
		f := fluids[n%len(fluids)]
		b := f.Bounds()
		T, p := b.MaxT*1.1*random.Float64(), b.MaxP*1.1*math.Exp(-20*random.Float64())
		switch random.IntN(10) {
		case 0:
			T = math.Float64frombits(random.Uint64())
		case 1:
			p = math.Float64frombits(random.Uint64())
		}
		s, err := f.At(T, p)
		var e *thermo.RangeError
		if err != nil && !errors.As(err, &e) {
			t.Fatalf("%s %g K, %g Pa: %v", f.Name(), T, p, err)
		}
		if err == nil && !(s.Density > 0 && s.Cv > 0 && s.Cp >= s.Cv && !math.IsInf(s.Cp, 0) && !math.IsNaN(s.Enthalpy+s.InternalEnergy)) {
			t.Fatalf("%s %g K, %g Pa: %+v", f.Name(), T, p, s)
		}
		if err != nil && strings.HasPrefix(e.Why, "the equation of state has no density") {
			t.Fatalf("%s %g K, %g Pa: no density found", f.Name(), T, p)
		}
	}
}

// The neighbourhood of the critical point is refused with its reason, and what
// lies around it is not.
func TestCriticalPoint(t *testing.T) {
	for _, f := range all(t) {
		g := f.(*fluid)
		for _, T := range []float64{0.9951, 1, 1.0049} {
			for _, p := range []float64{0.9701, 1, 1.0299} {
				_, err := f.At(T*g.criticalT, p*g.criticalP)
				var e *thermo.RangeError
				if !errors.As(err, &e) {
					t.Errorf("%s: accepted at %g of Tc, %g of pc", f.Name(), T, p)
				} else if inBox := T*g.criticalT <= f.Bounds().MaxT; inBox && e.Why != "too near the critical point" {
					t.Errorf("%s: %v", f.Name(), err)
				}
			}
		}
		around := [][2]float64{{1.0051, 1}, {1.0051, 0.98}, {1.0051, 1.04}, {1.001, 0.96}, {1.001, 1.04}}
		if g.phase == thermo.Liquid {
			around = [][2]float64{{0.9949, 1}, {0.9949, 1.02}, {0.999, 1.04}, {1, 1.04}}
		}
		for _, c := range around {
			if _, err := f.At(c[0]*g.criticalT, c[1]*g.criticalP); err != nil {
				t.Errorf("%s: %v", f.Name(), err)
			}
		}
	}
}

// Above the critical pressure liquid and gas are one fluid and meet at the
// critical temperature.
func TestPhasesMeet(t *testing.T) {
	for _, formula := range Formulas() {
		l, ok := Liquid(formula)
		if !ok {
			continue
		}
		f := of(t, formula)
		for _, x := range []float64{1.04, 1.3, 2.5} {
			a, err1 := l.At(f.criticalT, x*f.criticalP)
			b, err2 := f.At(f.criticalT, x*f.criticalP)
			if err := errors.Join(err1, err2); err != nil {
				t.Error(err)
				continue
			}
			if !(math.Abs(a.Density/b.Density-1) <= 1e-9) || !(math.Abs(a.Enthalpy-b.Enthalpy) <= 1e-9*math.Abs(a.Enthalpy)) {
				t.Errorf("%s at %g of the critical pressure: %+v and %+v", f.name, x, a, b)
			}
		}
	}
}

func TestUncertainty(t *testing.T) {
	f := of(t, "CO2")
	for _, tt := range []struct {
		T, p                   float64
		lowCp, highCp, density float64
		why                    string
	}{
		{300, 1e4, 0.0005, 0.0006, 0.00025, "dilute: the ideal part alone"},
		{400, 1e7, 0.0030, 0.0050, 0.00025, "dense: half of what is stated"},
		{310, 7.8e6, 0.02, 0.06, 0.0045, "next to the critical point"},
	} {
		cp, density := f.Uncertainty(tt.T, tt.p)
		if !(cp >= tt.lowCp && cp <= tt.highCp && density >= tt.density && density <= 1.2*tt.density) {
			t.Errorf("%g K, %g Pa: %g and %g, want %g to %g and %g (%s)", tt.T, tt.p, cp, density, tt.lowCp, tt.highCp, tt.density, tt.why)
		}
	}
}

func TestNames(t *testing.T) {
	for formula, name := range map[string]string{"n2": "nitrogen", "CO2": "carbon dioxide", "n-C4H10": "n-butane", "c4h10": "n-butane", "HE": "helium"} {
		if f, ok := New(formula); !ok || f.Name() != name {
			t.Errorf("New(%q) = %v, %v; want %s", formula, f, ok, name)
		}
	}
	for _, formula := range []string{"", "air", "n-CO2", "H2O", "N"} {
		if f, ok := New(formula); ok {
			t.Errorf("New(%q) = %s, want none", formula, f.Name())
		}
	}
	if f, ok := Liquid("He"); ok {
		t.Errorf("Liquid(He) = %s, want none", f.Name())
	}
	if l, _ := Liquid("NH3"); l.Name() != "liquid ammonia" {
		t.Errorf("got %q, want liquid ammonia", l.Name())
	}
	for _, f := range all(t) {
		if !strings.Contains(f.Source(), "(19") && !strings.Contains(f.Source(), "(20") {
			t.Errorf("%s: source %q has no year", f.Name(), f.Source())
		}
	}
}
