package loads

import (
	"math"
	"testing"
)

const meter = 3

// attested is the plant with a bridge, readings held for 10 s, and a heat meter.
func attested() Config {
	cfg := bridging()
	cfg.Tags = append(cfg.Tags, Tag{Name: "ET", MaxAge: minute, Counter: &Counter{Modulus: 1e9}})
	cfg.Loads[0].Witness, cfg.Loads[0].HasWitness = FromTag(meter), true
	return cfg
}

func energy(s, J float64) Reading { return Reading{Tag: meter, At: through(s), Value: J} }

// attend puts seconds at 160 kW through, with the register of the meter at the given
// instants, and without temperatures from one instant to another.
func attend(t *testing.T, cfg Config, seconds int, register map[int]float64, from, to int) []Minute {
	t.Helper()
	e := engine(t, cfg)
	var closed []Minute
	for s := range seconds + 1 {
		var rr []Reading
		if s%5 == 0 && (s < from || s >= to) {
			rr = at(float64(s), 2, 350, 330)
		}
		if J, ok := register[s]; ok {
			rr = append(rr, energy(float64(s), J))
		}
		closed = e.Advance(Beat{rr, through(float64(s))}, closed)
	}
	return closed
}

func compared(closed []Minute) (witness, compared []float64) {
	for _, m := range closed {
		witness, compared = append(witness, m.Witness/1e6), append(compared, m.Compared/1e6)
	}
	return witness, compared
}

func same(a, b []float64) bool {
	for i := range a {
		if len(a) != len(b) || math.Abs(a[i]-b[i]) > 1e-9 {
			return false
		}
	}
	return len(a) == len(b)
}

// Spans are compared in the minute in which they end, one that ends with the minute in
// that; what lies before the first reading and after the last is in none. Heat in MJ.
func TestWitness(t *testing.T) {
	for _, tt := range []struct {
		name            string
		register        map[int]float64
		from, to        int
		witness, served []float64
	}{
		{"at whole minutes", map[int]float64{0: 5e6, 60: 15e6, 180: 34e6}, 0, 0, []float64{10, 0, 19, 0}, []float64{9.6, 0, 19.2, 0}},
		{"within minutes", map[int]float64{7: 5e6, 107: 22e6, 187: 34e6}, 0, 0, []float64{0, 17, 0, 12}, []float64{0, 16, 0, 12.8}},
		{"the first of a minute alone", map[int]float64{0: 0, 10: 2e6, 20: 4e6, 70: 11e6, 75: 12e6, 120: 19e6}, 0, 0, []float64{0, 11 + 8, 0, 0}, []float64{0, 11.2 + 8, 0, 0}},
		{"over its roll-over", map[int]float64{0: 995e6, 60: 5e6}, 0, 0, []float64{10, 0, 0, 0}, []float64{9.6, 0, 0, 0}},
		{"a reset", map[int]float64{0: 300e6, 60: 5e6, 120: 15e6}, 0, 0, []float64{0, 10, 0, 0}, []float64{0, 9.6, 0, 0}},
		{"a span with bridged time", map[int]float64{0: 0, 60: 10e6, 120: 20e6, 180: 30e6}, 70, 100, []float64{10, 0, 10, 0}, []float64{9.6, 0, 9.6, 0}},
		{"a gap across a reading", map[int]float64{0: 0, 60: 10e6, 120: 20e6, 180: 30e6}, 100, 140, []float64{10, 0, 0, 0}, []float64{9.6, 0, 0, 0}},
		{"a gap that ends with a span", map[int]float64{0: 0, 60: 10e6, 120: 20e6, 180: 30e6}, 80, 120, []float64{10, 0, 10, 0}, []float64{9.6, 0, 9.6, 0}},
	} {
		for _, gives := range []bool{true, false} {
			cfg := attested()
			if cfg.Loads[0].Stream.Gives = gives; !gives {
				for i := range tt.served {
					tt.served[i] = -tt.served[i]
				}
			}
			w, c := compared(attend(t, cfg, 241, tt.register, tt.from, tt.to))
			if !same(w, tt.witness) || !same(c, tt.served) {
				t.Errorf("%s: witness %v, compared %v; want %v and %v", tt.name, w, c, tt.witness, tt.served)
			}
		}
	}
}

// The heat of a counted flow is decided late, and a span of the witness may end within
// what one count decides on: 2 kg/s to 100 s and 1 kg/s from there to 200 s, a span to 90
// s and one from there to 160 s.
func TestWitnessOfACountedFlow(t *testing.T) {
	cfg := countingPlant()
	cfg.Tags = append(cfg.Tags, Tag{Name: "ET", MaxAge: minute, Counter: &Counter{}})
	cfg.Loads[0].Witness, cfg.Loads[0].HasWitness = FromTag(meter), true
	e := engine(t, cfg)
	var closed []Minute
	kg, J := map[int]float64{0: 0, 100: 200, 200: 300}, map[int]float64{0: 1e6, 90: 15e6, 160: 22e6}
	for s := range 242 {
		rr := temps(float64(s), 350, 330)
		if v, ok := kg[s]; ok {
			rr = append(rr, counts(float64(s), v)...)
		}
		if v, ok := J[s]; ok {
			rr = append(rr, energy(float64(s), v))
		}
		closed = e.Advance(Beat{rr, through(float64(s))}, closed)
	}
	w, c := compared(closed)
	if !same(w, []float64{0, 14, 7}) || !same(c, []float64{0, 0.16 * 90, 0.16*10 + 0.08*60}) {
		t.Errorf("witness %v, compared %v", w, c)
	}
}

// A gap that begins where a span ends spoils only the next, also where the gap, and all
// before it, is decided on after further spans have ended: 1 kg/s, bridged from 70 to 130 s.
func TestWitnessAcrossABridgeOfACountedFlow(t *testing.T) {
	cfg := countingPlant()
	cfg.Bridge = 2 * minute
	cfg.Tags[inlet].MaxAge, cfg.Tags[outlet].MaxAge = 10*second, 10*second
	cfg.Tags = append(cfg.Tags, Tag{Name: "ET", MaxAge: minute, Counter: &Counter{}})
	cfg.Loads[0].Witness, cfg.Loads[0].HasWitness = FromTag(meter), true
	e := engine(t, cfg)
	var closed []Minute
	for s := range 302 {
		var rr []Reading
		if s%10 == 0 && (s <= 60 || s >= 130) {
			rr = temps(float64(s), 350, 330)
		}
		if s%200 == 0 {
			rr = append(rr, counts(float64(s), float64(s))...)
		}
		switch s {
		case 0, 70, 125, 180:
			rr = append(rr, energy(float64(s), float64(s)*81e3))
		}
		closed = e.Advance(Beat{rr, through(float64(s))}, closed)
	}
	w, c := compared(closed)
	if !same(w, []float64{0, 70 * 0.081, 0}) || !same(c, []float64{0, 70 * 0.08, 0}) {
		t.Errorf("witness %v, compared %v", w, c)
	}
}

// A register that reports by exception tells by its silence, each 25 s, that it stands
// still, also while nothing else is heard: however event time comes, spans end at 75, 125
// and 200 s, and after the reading at 208 s at 258 and 308 s.
func TestSilentWitnessAmongSilentTags(t *testing.T) {
	const life = meter + 1
	for _, step := range []float64{1, 7, 90} {
		cfg := attested()
		cfg.Tags[meter].OnChange, cfg.Tags[meter].Alive, cfg.Tags[meter].MaxAge = true, life, 25*second
		cfg.Tags = append(cfg.Tags, Tag{Name: "LIFE", MaxAge: 10 * minute})
		e := engine(t, cfg)
		e.Advance(Beat{[]Reading{energy(0, 5e6), {Tag: life, At: through(0), Value: 1}}, through(0)}, nil)
		for s := step; s < 91; s += step {
			e.Advance(Beat{nil, through(s)}, nil)
		}
		var closed []Minute
		for s := 91.0; s <= 361; s++ {
			rr := at(s, 2, 350, 330)
			if s == 208 {
				rr = append(rr, energy(s, 15e6))
			}
			closed = e.Advance(Beat{rr, through(s)}, closed)
		}
		w, c := compared(closed)
		if !same(w, []float64{0, 0, 0, 10, 0}) || !same(c, []float64{0, 0, 0.16 * 75, 0.16 * 58, 0.16 * 50}) {
			t.Errorf("in steps of %g s: witness %v, compared %v", step, w, c)
		}
	}
}
