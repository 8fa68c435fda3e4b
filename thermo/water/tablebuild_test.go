package water

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"heatreeve/thermo"
)

// randomBox is any box of water or steam; pressures go down to 1 kPa.
func randomBox(random *rand.Rand, f thermo.Fluid) box {
	maxT := region2MaxT
	if f == Liquid() {
		maxT = region1MaxT
	}
	T := func() float64 { return lowestTemperature*(1+clear) + random.Float64()*(maxT-lowestTemperature) }
	p := func() float64 { return 1e3 * math.Pow(highestP/1e3, random.Float64()) }
	T1, T2, p1, p2 := T(), T(), p(), p()
	return box{min(T1, T2), max(T1, T2), min(p1, p2), max(p1, p2)}
}

// The same errors in boxes of any size all over regions 1 and 2.
func TestTableErrorsAnywhere(t *testing.T) {
	for _, f := range []thermo.Fluid{Liquid(), Steam()} {
		random := rand.New(rand.NewPCG(97, 3))
		var worst tableErrors
		for range 100 {
			b := randomBox(random, f)
			e := tableErrors{box: fmt.Sprintf("%s, %+v", f.Name(), b)}
			e.random(t, f, b.tabulate(f), b, 2000, random)
			worst.h, worst.density = max(worst.h, e.h), max(worst.density, e.density)
			worst.cp, worst.rise = max(worst.cp, e.cp), max(worst.rise, e.rise)
			worst.states, worst.answered = worst.states+e.states, worst.answered+e.answered
		}
		t.Logf("%s: h within %.1e, density %.1e, cp %.1e, rise over 1 K %.1e; %.1f %% from the tables",
			f.Name(), worst.h, worst.density, worst.cp, worst.rise, 100*float64(worst.answered)/float64(worst.states))
	}
}

func statesWorked(f thermo.Fluid, b box) int {
	water, steam := liquidBuilder, steamBuilder
	if f == Liquid() {
		water.columns(b.T1, b.T2, b.p1, b.p2)
	} else {
		steam.columns(b.T1, b.T2, b.p1, b.p2)
	}
	return water.worked + steam.worked
}

// What building takes is bounded by the states it works, whatever the box.
func TestTableWork(t *testing.T) {
	most := make(map[string]int)
	note := func(f thermo.Fluid, b box) {
		worked := statesWorked(f, b)
		most[f.Name()] = max(most[f.Name()], worked)
		if worked > 44_000 {
			t.Errorf("%s, %+v: %d states worked, want 44 000 at most", f.Name(), b, worked)
		}
	}
	for _, f := range []thermo.Fluid{Liquid(), Steam()} {
		random := rand.New(rand.NewPCG(97, 4))
		for range 500 {
			note(f, randomBox(random, f))
		}
	}
	note(Steam(), box{504, 786, 1e5, 458e5})
	note(Steam(), box{373, 874, 1e5, 256e5})
	note(Steam(), box{lowestTemperature * (1 + clear), region2MaxT, 1, highestP})
	note(Liquid(), box{lowestTemperature * (1 + clear), region1MaxT, 1, highestP})
	t.Logf("states worked: %v", most)
	for name, n := range most {
		if n < 43_000 {
			t.Errorf("%s: no box came near the limit: %d states", name, n)
		}
	}
}
