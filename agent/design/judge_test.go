package design

import (
	"testing"
	"time"

	"heatreeve/agent/design/expect"
)

var target = Target{Name: "hot-water", Expect: expect.Fixed{Duty: 640e3}, Allow: 0.08, Lasting: 5 * time.Minute}

// observe judges a minute by the load's own design.
func observe(j *Judge, m Minute) { j.Observe(&m, j.expected(&m, 0)) }

// course feeds minute means in kW with the given standard uncertainty in kW; a
// negative mean stands for a minute that is not whole.
func course(j *Judge, from int64, u float64, kW ...float64) int64 {
	for _, q := range kW {
		observe(j, Minute{Start: from, Whole: q >= 0, Duty: q * 1e3, Uncertainty: u * 1e3})
		from += nanosecondsPerMinute
	}
	return from
}

func TestVerdicts(t *testing.T) {
	for _, tt := range []struct {
		name string
		u    float64
		kW   []float64
		want Verdict
		by   Ground
	}{
		{"at design", 8, []float64{640, 645, 638, 641, 640}, Holding, Within},
		{"at the edge of the allowance", 8, []float64{590, 592, 591, 590, 590}, Holding, Within},
		{"too few minutes", 8, []float64{500, 500, 500, 500}, Undecided, TooFew},
		{"low for long enough", 8, []float64{560, 558, 561, 559, 560}, Short, Beyond},
		{"high for long enough", 8, []float64{720, 721, 719, 720, 720}, Over, Beyond},
		{"low but not for the whole time", 8, []float64{590, 560, 561, 559, 560}, Undecided, Between},
		{"low by less than the uncertainty", 45, []float64{560, 558, 561, 559, 560}, Undecided, TooUnsure},
		{"low by more than an uncertainty as wide as the allowance", 30, []float64{500, 501, 499, 500, 500}, Short, Beyond},
		{"at design with an uncertainty as wide as the allowance", 26, []float64{640, 641, 640, 639, 640}, Undecided, TooUnsure},
		{"a ramp is not steady", 8, []float64{300, 350, 400, 450, 500}, Undecided, Unsteady},
		{"a minute missing", 8, []float64{560, 558, -1, 559, 560}, Undecided, NotWhole},
	} {
		t.Run(tt.name, func(t *testing.T) {
			j := NewJudge(target)
			course(j, 0, tt.u, tt.kW...)
			if got := j.Verdict(false, false); got != tt.want {
				t.Errorf("verdict %v, want %v", got, tt.want)
			}
			if g := j.Grounds(); g.Verdict != tt.want || g.Ground != tt.by {
				t.Errorf("grounds %+v, want %v by %d", g, tt.want, tt.by)
			}
		})
	}
}

// Between within and beyond, the verdict that was reached stands, so a duty that
// wavers about the edge does not flutter.
func TestVerdictDoesNotFlutter(t *testing.T) {
	j := NewJudge(target)
	at := course(j, 0, 8, 560, 560, 560, 560, 560)
	for range 20 {
		at = course(j, at, 8, 592, 585)
		if j.Last != Short {
			t.Fatalf("verdict %v after wavering about the edge, want short", j.Last)
		}
	}
	course(j, at, 8, 600, 600, 600, 600, 600)
	if j.Last != Holding {
		t.Errorf("verdict %v after five minutes within the allowance, want holding", j.Last)
	}
}

func TestGapBeginsAfresh(t *testing.T) {
	j := NewJudge(target)
	at := course(j, 0, 8, 560, 560, 560, 560, 560)
	at = course(j, at+10*nanosecondsPerMinute, 8, 560)
	if j.Last != Undecided {
		t.Errorf("verdict %v after a gap, want undecided", j.Last)
	}
	course(j, at, 8, 560, 560, 560, 560)
	if j.Last != Short {
		t.Errorf("verdict %v five minutes after the gap, want short", j.Last)
	}
}

func TestBlindAndIdleComeFirst(t *testing.T) {
	j := NewJudge(target)
	course(j, 0, 8, 560, 560, 560, 560, 560)
	if got := j.Verdict(true, true); got != Blind {
		t.Errorf("blind and idle: %v, want blind", got)
	}
	if got := j.Verdict(false, true); got != Idle {
		t.Errorf("idle: %v, want idle", got)
	}
}

func TestNoDesignNoVerdict(t *testing.T) {
	j := NewJudge(Target{})
	course(j, 0, 1, 560, 560, 560)
	if j.Last != Undecided {
		t.Errorf("verdict %v without a design, want undecided", j.Last)
	}
}

func TestRestoreGoesOn(t *testing.T) {
	j := NewJudge(target)
	at := course(j, 0, 8, 560, 560, 560, 560)
	k := NewJudge(target)
	k.restore(*j)
	course(k, at, 8, 560)
	if k.Last != Short {
		t.Errorf("verdict %v after a restart in between, want short", k.Last)
	}
}

// What does not last averages out over the minutes: 45 kW of each minute are 20 kW of five,
// beside which 80 kW stand out; as 45 kW that last they do not.
func TestRandomUncertaintyAveragesOut(t *testing.T) {
	for _, tt := range []struct {
		lasting, random float64
		want            Verdict
	}{{0, 45e3, Short}, {45e3, 0, Undecided}, {35e3, 45e3, Undecided}} {
		j := NewJudge(target)
		for k := range int64(5) {
			observe(j, Minute{Start: k * nanosecondsPerMinute, Whole: true, Duty: 560e3, Uncertainty: tt.lasting, Random: tt.random * tt.random})
		}
		if j.Last != tt.want {
			t.Errorf("%g W lasting and %g W random a minute: verdict %v, want %v", tt.lasting, tt.random, j.Last, tt.want)
		}
	}
}
