// Package working tells the working of one figure of a load, line by line, as one would
// write it on paper.
//
// The numbers are those that the engine used and found ([loads.Basis]): nothing is worked a
// second way. Each line with a formula can be followed with a pocket calculator: what the
// printed numbers give is the printed value, in all digits shown. A value has as many digits
// as that allows, and is that of the engine rounded to them.
//
// Terminal, JSON and page have the same lines. Package working is pure: instants come in.
package working

import (
	"encoding/json"
	"math"
	"time"
)

// CoverageFactor is that of the expanded uncertainty: about 95 % where many inputs make one
// up (JCGM 100:2008, 6.3.3).
const CoverageFactor = 2

// Working is that of one figure.
type Working struct {
	Site string    `json:"site"`
	Load string    `json:"load"`
	At   time.Time `json:"at"`     // where the interval of the figure begins
	Span float64   `json:"span_s"` // its length
	// Duty, positive in the load's service, and its standard uncertainty are null where there
	// is none.
	Duty        *float64 `json:"duty_W"`
	Uncertainty *float64 `json:"standard_uncertainty_W"`
	Factor      float64  `json:"coverage_factor"`
	// Quality is the worst of the readings that were used, with its reason and their tag.
	Quality  string    `json:"quality,omitempty"`
	Reason   string    `json:"quality_reason,omitempty"`
	By       string    `json:"quality_by,omitempty"`
	Idle     bool      `json:"idle"`
	Fault    string    `json:"fault,omitempty"` // why there is no duty, in a word or two
	Verdict  string    `json:"verdict,omitempty"`
	Sections []Section `json:"sections"`
	Causes   []Cause   `json:"causes,omitempty"` // what to look at first
	Notes    []string  `json:"notes,omitempty"`
}

// Section is a step of the working.
type Section struct {
	Title string `json:"title"`
	Lines []Line `json:"lines"`
}

// Line is one line of it: a reading, a value that is given, or one that is worked.
type Line struct {
	Symbol string `json:"symbol,omitempty"` // which formulas further down have
	Words  string `json:"words"`
	// Law is the formula in symbols and Formula in numbers; both are empty where the value
	// is given.
	Law     string  `json:"law,omitempty"`
	Formula string  `json:"formula,omitempty"`
	Value   float64 `json:"value"`           // in Unit, with all the digits that there are; NaN, in JSON null, where a reading has none
	Shown   string  `json:"shown,omitempty"` // as it is printed; empty where there is none
	Unit    string  `json:"unit,omitempty"`
	Source  string  `json:"source,omitempty"` // whence the value or its law is
	Reading *Sample `json:"reading,omitempty"`
}

// line is a Line as it stands in JSON, where a value that is none is null.
type line struct {
	plain
	Value *float64 `json:"value"`
}

type plain Line

// MarshalJSON writes null for a value that is none.
func (l Line) MarshalJSON() ([]byte, error) {
	x := line{plain: plain(l)}
	if !math.IsNaN(l.Value) {
		x.Value = &l.Value
	}
	return json.Marshal(x)
}

// UnmarshalJSON reads what MarshalJSON writes.
func (l *Line) UnmarshalJSON(text []byte) error {
	var x line
	if err := json.Unmarshal(text, &x); err != nil {
		return err
	}
	*l = Line(x.plain)
	if l.Value = math.NaN(); x.Value != nil {
		l.Value = *x.Value
	}
	return nil
}

// Sample is a reading that was used, or the last one that was seen.
type Sample struct {
	Tag     string    `json:"tag"`
	At      time.Time `json:"at"`
	Age     float64   `json:"age_s"` // at the instant of the figure
	Quality string    `json:"quality"`
	Reason  string    `json:"reason,omitempty"` // of its quality
	Fault   string    `json:"fault,omitempty"`  // why it cannot be used
}

func (w *Working) note(text string) {
	if text != "" {
		w.Notes = append(w.Notes, text)
	}
}
