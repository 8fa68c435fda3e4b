// Package expect tells what a load should do at today's conditions: the duty that its
// design, a table, a week's habit or a learned baseline expects, with the uncertainty of
// that expectation. It is pure.
package expect

// Conditions are those of one minute.
type Conditions struct {
	Hour    int       // of the week by the clock of the site, 0 from Monday midnight to 167
	Drivers []float64 // SI, mean over the minute; NaN where a tag told nothing
}

// Expected is the duty that is expected, W, positive in the load's service.
type Expected struct {
	Known bool
	Why   string // why it is not known
	Duty  float64
	// Lasting is the standard uncertainty of Duty by what lasts, W, and Random the variance by
	// what changes from minute to minute, W².
	Lasting, Random float64
	// Joint says that measured and expected duty rest on the same instruments, whose lasting
	// errors are in both: DeviationLasting is then the lasting standard uncertainty of their
	// difference, W. Otherwise the two are taken to be independent.
	Joint            bool
	DeviationLasting float64
}

// Expectation tells the expected duty at the conditions of a minute.
type Expectation interface {
	At(Conditions) Expected
}

// Fixed is a duty that is expected whatever the conditions, W, with its standard
// uncertainty, which lasts.
type Fixed struct{ Duty, Uncertainty float64 }

// At returns the duty.
func (f Fixed) At(Conditions) Expected {
	return Expected{Known: true, Duty: f.Duty, Lasting: f.Uncertainty}
}
