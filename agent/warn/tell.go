package warn

import (
	"fmt"
	"math"
	"strings"
	"time"

	"heatreeve/agent/design"
)

// Document is a warning as it goes out. Its keys are those of configs/warning.schema.json.
type Document struct {
	Site         string          `json:"site,omitempty"`
	Subject      string          `json:"subject"`
	Kind         design.Kind     `json:"kind"`
	State        State           `json:"state"`
	Active       bool            `json:"active"`
	Begin        string          `json:"begin"`
	End          *string         `json:"end"`
	Since        string          `json:"since"`
	Deviation    *float64        `json:"deviation_ratio"`
	Greatest     *float64        `json:"greatest_deviation_ratio"`
	Significance *float64        `json:"significance"`
	Times        int             `json:"times_begun"`
	Earlier      int             `json:"earlier_unacknowledged"`
	Acknowledged *MarkDocument   `json:"acknowledged"`
	Shelved      *MarkDocument   `json:"shelved"`
	Causes       []CauseDocument `json:"causes"`
}

// MarkDocument is a mark as it goes out.
type MarkDocument struct {
	By     string  `json:"by"`
	Reason string  `json:"reason"`
	At     string  `json:"at"`
	Until  *string `json:"until,omitempty"` // of a shelf
}

// CauseDocument is a cause as it goes out.
type CauseDocument struct {
	Kind    string  `json:"kind"`
	Subject string  `json:"subject"`
	Weight  float64 `json:"weight"`
	Says    string  `json:"says"`
}

// Document tells the warning by the clock of a place.
func (l *Listed) Document(site string, place *time.Location) Document {
	d := Document{
		Site: site, Subject: l.Subject, Kind: l.Kind, State: l.State(), Active: l.End == 0,
		Begin: stamp(l.Begin, place), Since: stamp(l.Since, place),
		Deviation: ratio(l.Now), Greatest: ratio(l.Greatest), Significance: ratio(l.Significance),
		Times: l.Times, Earlier: l.Earlier, Causes: []CauseDocument{},
	}
	if l.End != 0 {
		end := stamp(l.End, place)
		d.End = &end
	}
	if l.Mark != nil {
		d.Acknowledged = l.Mark.Document(place)
	}
	if l.Shelf != nil {
		d.Shelved = l.Shelf.Document(place)
	}
	for _, c := range l.Causes {
		weight := c.Weight
		if w := ratio(weight); w != nil {
			weight = *w
		}
		d.Causes = append(d.Causes, CauseDocument{string(c.Kind), c.Subject, weight, c.Says})
	}
	return d
}

// Document tells the mark by the clock of a place.
func (m *Mark) Document(place *time.Location) *MarkDocument {
	return &MarkDocument{By: m.By, Reason: m.Reason, At: stamp(m.At, place)}
}

// Document tells the mark of the shelf, with its end.
func (s *Shelf) Document(place *time.Location) *MarkDocument {
	d, until := s.Mark.Document(place), stamp(s.Until, place)
	d.Until = &until
	return d
}

func stamp(at int64, place *time.Location) string {
	return time.Unix(0, at).In(place).Format(time.RFC3339)
}

// ratio rounds to a hundredth of a percent; what is no number is none.
func ratio(x float64) *float64 {
	x = math.Round(x*1e4) / 1e4
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return nil
	}
	return &x
}

// Text tells the warning in a line, as its event does: while it stands, the figures are those
// of when it was raised.
func (e *Entry) Text(place *time.Location) string {
	var b strings.Builder
	if e.End == 0 {
		fmt.Fprintf(&b, "%s: %s when it was raised", e.Kind, Deviation(e.Kind, e.Now))
	} else {
		fmt.Fprintf(&b, "%s, ended; at the greatest %s", e.Kind, Deviation(e.Kind, e.Greatest))
	}
	fmt.Fprintf(&b, "; since %s", clock(e.Since, place))
	if e.Times > 1 {
		fmt.Fprintf(&b, "; has begun %d times", e.Times)
	}
	if len(e.Causes) > 0 {
		fmt.Fprintf(&b, "; first cause: %s", e.Causes[0].Says)
	}
	return b.String()
}

func clock(at int64, place *time.Location) string {
	return time.Unix(0, at).In(place).Format("2006-01-02 15:04 -07:00")
}

// Deviation tells a deviation in words of its kind.
func Deviation(k design.Kind, part float64) string {
	side := "above"
	if part < 0 {
		side = "below"
	}
	percent := fmt.Sprintf("%.1f %%", 100*math.Abs(part))
	switch k {
	case design.WarnFouling:
		return percent + " " + side + " the clean conductance"
	case design.WarnUnbalanced:
		return "duties " + percent + " apart"
	}
	return percent + " " + side + " what is expected"
}

// Text tells the shelf in a line.
func (s *Shelf) Text(place *time.Location) string {
	return fmt.Sprintf("%s, until %s, by %s: %s", s.Kind, clock(s.Until, place), s.By, s.Reason)
}
