package steady

import "math"

// alpha is how often the slope of a steady signal is found significant by chance.
const alpha = 0.05

// Variable is one of what must be steady.
type Variable struct {
	Filter Filter
	Values []float64 // the last
}

// Gate tells whether a load is steady by several variables. Each is unsteady only where its
// R-statistic or its slope say that it moves, and what it has moved by over the window moves
// the duty by more than a limit: a long quiet signal has slopes that are significant and mean
// nothing. Its fields are its state.
type Gate struct {
	Variables []Variable
	Now       Told
}

// Told is what a gate has told of the last minute.
type Told struct {
	Steady bool
	Worst  string  // variable that moves the duty most
	Change float64 // what it does to the duty over the window, W
	Limit  float64 // above which that matters, W
	R      float64 // statistic of the variable; 0 where it is not known
	T      float64 // its slope in standard uncertainties
	Slope  float64 // of the variable, its unit a minute
}

// Sample is one variable in one minute.
type Sample struct {
	Name  string
	Value float64
	By    float64 // change of the duty by a unit of it, W
}

// Observe takes in the next minute of the variables, always the same ones in the same order,
// over a window of the given number of minutes, at least one. A sample that is not finite tells
// nothing: the gate is then not steady, names it, and begins anew.
func (g *Gate) Observe(window int, limit float64, samples ...Sample) {
	window = max(1, window)
	for _, s := range samples {
		if x := s.Value * s.By; math.IsNaN(x) || math.IsInf(x, 0) {
			g.Reset()
			g.Now = Told{Worst: s.Name, Limit: limit}
			return
		}
	}
	if len(g.Variables) != len(samples) {
		g.Variables = make([]Variable, len(samples))
	}
	var told Told
	for i, s := range samples {
		v := &g.Variables[i]
		v.Filter.Observe(s.Value)
		v.Values = append(v.Values, s.Value)
		if n := len(v.Values); n > window {
			v.Values = append(v.Values[:0], v.Values[n-window:]...)
		}
		x := v.tell(s, limit)
		if i == 0 || x.worse(&told) {
			told = x
		}
	}
	g.Now = told
}

// worse tells whether a variable is to be named before another: one that is not steady before
// one that is, and then the one that moves the duty more.
func (t *Told) worse(than *Told) bool {
	if t.Steady != than.Steady {
		return !t.Steady
	}
	return t.Change > than.Change
}

// tell looks at one variable.
func (v *Variable) tell(s Sample, limit float64) Told {
	line := Fit(v.Values)
	r, _ := v.Filter.R()
	t := Told{
		Worst: s.Name, Limit: limit, R: r, T: line.T(), Slope: line.Slope,
		Change: math.Abs(line.Slope) * float64(len(v.Values)) * math.Abs(s.By),
	}
	if v.Filter.Moves { // a step shows more in how far the value is from its mean
		t.Change = max(t.Change, math.Abs(v.Filter.Last-v.Filter.Mean)*math.Abs(s.By))
	}
	t.Steady = !(t.Change > limit && (v.Filter.Moves || line.Significant(alpha)))
	return t
}

// Reset forgets everything, as after a gap.
func (g *Gate) Reset() { *g = Gate{} }
