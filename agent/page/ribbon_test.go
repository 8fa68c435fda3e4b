package page

import (
	"context"
	"fmt"
	"net/http"
	"net/url"
	"slices"
	"strings"
	"testing"
	"testing/synctest"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/shown"
	"heatreeve/agent/view"
)

// minutes is a series of minutes that begins at an instant: of each the mean duty, "b" where it
// is bridged, "-" where it is missing, and what is below zero is the other way.
func minutes(from time.Time, text string) *answer.Series {
	s := &answer.Series{Span: 60}
	for i, word := range strings.Fields(text) {
		var duty float64
		measured, bridged := 60.0, 0.0
		switch word {
		case "-":
			continue
		case "b":
			measured, bridged = 0, 60
		default:
			if _, err := fmt.Sscan(word, &duty); err != nil {
				panic(err)
			}
		}
		mean := &duty
		if measured == 0 {
			mean = nil
		}
		s.Start = append(s.Start, from.Unix()+int64(60*i))
		s.Mean, s.Measured, s.Bridged = append(s.Mean, mean), append(s.Measured, measured), append(s.Bridged, bridged)
		s.Given, s.Taken = append(s.Given, max(0, 60*duty)), append(s.Taken, max(0, -60*duty))
	}
	return s
}

// A ribbon has each minute as high as its duty, those of one height as one bar; given and taken
// apart, hatched where bridged, and nothing where nothing was measured.
func TestRibbonIsDrawn(t *testing.T) {
	from := noon.Add(-24 * time.Hour)
	r := drawn(minutes(from, "10 10 5 - 0 b b -10"), from.Unix())
	for _, tt := range []struct{ what, got, want string }{
		{"given", r.Given, "M0 20v-20h2v20zM2 20v-10h1v10z"},
		{"taken", r.Taken, "M7 20v-20h1v20z"},
		{"bridged", r.Bridged, "M5 20v-10h2v10z"},
		{"base", r.Base, "M0 20v1h3v-1zM4 20v1h1v-1zM7 20v1h1v-1z"},
		{"said", r.Said, "the last 24 hours: measured 0.3 %"},
	} {
		if tt.got != tt.want {
			t.Errorf("%s: %q, want %q", tt.what, tt.got, tt.want)
		}
	}
}

// A ribbon is drawn once a minute of event time, and served as paths and as an image.
func TestRibbonsAreKeptForTheirMinute(t *testing.T) {
	p, source := mill(t, cooler(), hall())
	asked := 0
	source.series = func(q answer.SeriesQuery) (*answer.Series, error) {
		asked++
		if q.Load != "cooler" {
			return nil, errNothing
		}
		if want := "2026-11-30T12:0"; !strings.HasPrefix(q.From, want) {
			t.Errorf("from %s, want %s...", q.From, want)
		}
		return minutes(noon.Add(-24*time.Hour), "10 5"), nil
	}
	const want = `{"cooler":{"base":"M0 20v1h2v-1z","given":"M0 20v-20h1v20zM1 20v-10h1v10z","taken":"","bridged":"","said":"the last 24 hours: measured 0.1 %"}}`
	for range 3 {
		if got := get(p, "/ribbons?load=cooler&load=hall&load=nobody").Body.String(); strings.TrimSpace(got) != want {
			t.Errorf("%s, want %s", got, want)
		}
	}
	if asked != 1+3 {
		t.Errorf("asked %d times, want once for the cooler and each time for the hall", asked)
	}
	image := get(p, "/ribbon.svg?load=cooler")
	if got := image.Header().Get("Content-Type"); got != "image/svg+xml" || !strings.Contains(image.Body.String(), `d="M0 20v-20h1v20zM1 20v-10h1v10z"`) {
		t.Errorf("%s: %s", got, image.Body)
	}
	if got := get(p, "/ribbon.svg?load=nobody").Code; got != 404 {
		t.Errorf("of no load: %d", got)
	}
	later := *source.snapshot
	later.At += 60e9
	source.snapshot = &later
	get(p, "/ribbons?load=cooler")
	if asked != 5 {
		t.Errorf("a minute later it is not drawn anew: asked %d times", asked)
	}
	if got := get(p, "/ribbons?load="+strings.Repeat("&load=", ribbonsAtOnce)).Code; got != 400 {
		t.Errorf("too many at once: %d", got)
	}
}

// The scale of a line holds all that is on it, in round steps, and places are parts of it.
func TestLineIsToScale(t *testing.T) {
	p, source := mill(t, cooler())
	b := p.bandOf(&frame{Units: p.usual}, source.snapshot, 0)
	l := b.Line
	if l.Low != 0 || l.High != 60 || l.Lens != "68.00%" || l.Width != "1.17%" || l.Notch != "66.67%" || l.BracketA != "60.00%" || l.BracketB != "73.33%" || l.Zero != "0.00%" {
		t.Errorf("%+v", l)
	}
	if len(l.Ticks) != 7 || l.Ticks[3] != (tick{"50.00%", "30"}) {
		t.Errorf("ticks %v", l.Ticks)
	}
	back := view.Load{Name: "x", Design: -40e3, Allow: 0.1}
	back.Figure.Duty = -12e3
	n := now{figure: back.Figure}
	if l := lineOf(&n, &back, p.usual); l.Low != -60 || l.High != 0 || l.Lens != "80.00%" || l.Zero != "100.00%" {
		t.Errorf("of a duty the other way: %+v", l)
	}
}

// Long figures leave marks without one between them, so that they stand apart on a telephone.
func TestLineHasRoomForItsFigures(t *testing.T) {
	l := view.Load{Name: "x", Design: -640e3, Allow: 0.08}
	n := now{figure: l.Figure}
	for unit, want := range map[string][]string{
		"kW":    {"-1000", "-800", "-600", "-400", "-200", "0"},
		"Btu/h": {"-3000000", "", "-2000000", "", "-1000000", "", "0"},
	} {
		u := shown.Usual()
		if err := u.Set("duty", unit); err != nil {
			t.Fatal(err)
		}
		var got []string
		for _, tick := range lineOf(&n, &l, u).Ticks {
			got = append(got, tick.Text)
		}
		if !slices.Equal(got, want) {
			t.Errorf("%s: %q, want %q", unit, got, want)
		}
	}
}

// busy is a source that has no time for a series.
type busy struct{ *fixed }

func (busy) Series(ctx context.Context, _ answer.SeriesQuery) (*answer.Series, error) {
	ctx, cancel := context.WithTimeout(ctx, 15*time.Second)
	defer cancel()
	<-ctx.Done()
	return nil, ctx.Err()
}

// All ribbons of a request together wait no longer than an answer may take.
func TestRibbonsDoNotWaitInALine(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p, source := mill(t, many(20)...)
		p.Source = busy{source}
		query := url.Values{}
		for i := range 20 {
			query.Add("load", fmt.Sprintf("load-%d", i))
		}
		begin := time.Now()
		w := get(p, "/ribbons?"+query.Encode())
		if took := time.Since(begin); took > sheetWait || w.Code != http.StatusOK || w.Body.String() != "{}" {
			t.Errorf("after %v: %d %s", took, w.Code, w.Body)
		}
	})
}
