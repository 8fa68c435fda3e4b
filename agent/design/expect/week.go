package expect

import (
	"fmt"
	"math"
)

// HoursAWeek is how many there are.
const HoursAWeek = 168

// Week is the habit of a load: a duty for each hour of the week by the clock of the site, W,
// from Monday midnight.
type Week struct {
	Duty [HoursAWeek]float64
	// Uncertainty is the standard uncertainty of the duty as a fraction of it, which lasts.
	Uncertainty float64
}

// At returns the duty of the hour.
func (w Week) At(c Conditions) Expected {
	if c.Hour < 0 || c.Hour >= HoursAWeek {
		return Expected{Why: fmt.Sprintf("hour %d is none of the week", c.Hour)}
	}
	duty := w.Duty[c.Hour]
	return Expected{Known: true, Duty: duty, Lasting: w.Uncertainty * math.Abs(duty)}
}
