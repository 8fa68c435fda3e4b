package page

import (
	"context"
	"math"
	"strconv"
	"time"

	"heatreeve/agent/answer"
)

const (
	// ribbonSpan is the time that a day ribbon tells of, minute by minute.
	ribbonSpan    = 24 * time.Hour
	ribbonMinutes = int(ribbonSpan / time.Minute)
	// ribbonHeight is that of the highest minute, in units of the drawing.
	ribbonHeight = 20
)

// ribbon is a day ribbon as paths of SVG: a unit along is a minute, and the base is at
// [ribbonHeight]. What is missing is in no path.
type ribbon struct {
	Base    string `json:"base"`    // measured minutes, a unit high, below the base
	Given   string `json:"given"`   // minutes in which more heat was given than taken
	Taken   string `json:"taken"`   // the others
	Bridged string `json:"bridged"` // minutes that are bridged for the greater part
	Said    string `json:"said"`
}

// ribbonOf draws the last day of a load, to the time that is accounted for.
func (p *Page) ribbonOf(ctx context.Context, load string, through time.Time) (*ribbon, error) {
	through = through.Truncate(time.Minute)
	s, err := p.Series(ctx, answer.SeriesQuery{
		Load: load, Points: ribbonMinutes,
		From: through.Add(-ribbonSpan).Format(time.RFC3339), To: through.Format(time.RFC3339),
	})
	if err != nil {
		return nil, err
	}
	return drawn(s, through.Add(-ribbonSpan).Unix()), nil
}

// drawn is a series of minutes from an instant on as a ribbon.
func drawn(s *answer.Series, from int64) *ribbon {
	highest, measured := 0.0, 0.0
	for i, m := range s.Mean {
		if m != nil {
			highest = max(highest, math.Abs(*m))
		}
		measured += s.Measured[i]
	}
	var base, given, taken, bridged pathOfBars
	for i := range s.Start {
		x, width := int(s.Start[i]-from)/60, max(1, int(s.Span)/60)
		switch {
		case s.Bridged[i] > s.Measured[i]:
			bridged.bar(x, width, ribbonHeight/2)
		case s.Mean[i] != nil && s.Measured[i] > 0:
			base.bar(x, width, -1)
			height := 0
			if highest > 0 {
				height = int(math.Round(ribbonHeight * math.Abs(*s.Mean[i]) / highest))
			}
			if s.Given[i] >= s.Taken[i] {
				given.bar(x, width, height)
			} else {
				taken.bar(x, width, height)
			}
		}
	}
	share := measured / ribbonSpan.Seconds()
	return &ribbon{
		Base: base.path(), Given: given.path(), Taken: taken.path(), Bridged: bridged.path(),
		Said: "the last 24 hours: measured " + coverageText(share),
	}
}

// pathOfBars joins bars of equal height that touch into one, which most minutes do.
type pathOfBars struct {
	text          []byte
	x, end, level int // of the bar in the making
}

func (p *pathOfBars) bar(x, width, level int) {
	if level == p.level && x == p.end {
		p.end += width
		return
	}
	p.flush()
	p.x, p.end, p.level = x, x+width, level
}

func (p *pathOfBars) flush() {
	if p.level == 0 || p.end == p.x {
		return
	}
	number := func(command byte, n int) {
		p.text = strconv.AppendInt(append(p.text, command), int64(n), 10)
	}
	number('M', p.x)
	number(' ', ribbonHeight)
	number('v', -p.level)
	number('h', p.end-p.x)
	number('v', p.level)
	p.text = append(p.text, 'z')
}

func (p *pathOfBars) path() string {
	p.flush()
	p.level = 0
	return string(p.text)
}
