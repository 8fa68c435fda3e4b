package site

import (
	"errors"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// Whatever the file is, Parse answers with a site whose figures are finite and in
// order, or with faults that each have a place and one line of text.
func FuzzParse(f *testing.F) {
	f.Add([]byte(plant))
	wrong, err := filepath.Glob("testdata/wrong/*.yaml")
	right, err2 := filepath.Glob("../../configs/*.yaml")
	if err != nil || err2 != nil || len(wrong) == 0 || len(right) == 0 {
		f.Fatalf("no seeds: %v, %v", err, err2)
	}
	for _, path := range append(wrong, right...) {
		text, err := os.ReadFile(path)
		if err != nil {
			f.Fatal(err)
		}
		f.Add(text)
	}
	f.Fuzz(func(t *testing.T, text []byte) {
		s, err := Parse("fuzz.yaml", text)
		if err == nil {
			checkFigures(t, s)
			return
		}
		var faults Faults
		if s != nil || !errors.As(err, &faults) || len(faults) == 0 {
			t.Fatalf("Parse = %v, %v", s, err)
		}
		for i, f := range faults {
			if f.Line < 1 || f.Column < 1 || f.Message == "" || strings.ContainsAny(f.Error(), "\n\r") {
				t.Errorf("fault %d: %q at %d:%d", i, f.Error(), f.Line, f.Column)
			}
		}
	})
}

func checkFigures(t *testing.T, s *Site) {
	t.Helper()
	if s.Zone == nil || s.Name == "" || len(s.Tags) == 0 || len(s.Loads) == 0 || s.Broker.URL == "" || s.Broker.ClientID == "" {
		t.Fatalf("incomplete: %+v", s)
	}
	figures := []float64{s.Barometer}
	for i, tag := range s.Tags {
		a := tag.Accuracy
		figures = append(figures, tag.Scale, tag.Offset, a.Abs, a.Rel, a.Zero, tag.Resolution, tag.Deadband)
		if c := tag.Counter; c != nil {
			figures = append(figures, c.Modulus, c.Largest)
		}
		if g := tag.Signal; g != nil {
			figures = append(figures, g.FullAt, g.CutOff, g.R0, g.Lead)
			if g.Loop == (g.R0 > 0) && !g.Root || g.Root && tag.Min != 0 || g.Root && !g.Loop && !(g.FullAt > 0) || g.CutOff < 0 || g.Lead < 0 || tag.Counter != nil {
				t.Errorf("tag %q: signal %+v", tag.Name, g)
			}
		}
		if x := tag.Screen; x != nil {
			figures = append(figures, x.Low, x.High, x.Fastest)
			if x.Low > x.High || x.Fastest < 0 || x.Stuck < 0 || tag.Counter != nil || x.Spikes && tag.Resolution <= 0 {
				t.Errorf("tag %q: tests %+v", tag.Name, x)
			}
		}
		if tag.HasBeside && (tag.Beside == i || s.Tags[tag.Beside].Unit.Dimension != tag.Unit.Dimension || tag.Counter != nil) {
			t.Errorf("tag %q: beside %d", tag.Name, tag.Beside)
		}
		if q := tag.Quality; q != nil && (q.At == "" || q.Code == "" && len(q.Good)+len(q.Uncertain)+len(q.Bad) == 0) || tag.Liveness == nil && tag.Numbers.Symbol == "" {
			t.Errorf("tag %q: quality %+v, numbers in %+v", tag.Name, q, tag.Numbers)
		}
		if l := tag.Samples; l != nil && (tag.Time == "" || tag.Value == "" && l.Step <= 0) {
			t.Errorf("tag %q: samples %+v without stamps or values", tag.Name, l)
		}
		if !(tag.Min < tag.Max) || (tag.Topic == "") == (tag.Metric == nil) || a.Abs+a.Rel <= 0 && tag.Liveness == nil || tag.MaxAge <= 0 || tag.Scale <= 0 ||
			tag.OnChange && s.Tags[tag.Alive].Liveness == nil {
			t.Errorf("tag %+v", tag)
		}
	}
	for i := range s.Loads {
		figures = append(figures, checkLoad(t, s, &s.Loads[i])...)
	}
	for _, x := range figures {
		if math.IsNaN(x) || math.IsInf(x, 0) {
			t.Errorf("figure %v in %+v", x, s)
		}
	}
}

// checkLoad returns the figures of a load.
func checkLoad(t *testing.T, s *Site, l *HeatLoad) []float64 {
	t.Helper()
	d := l.Design
	name, fluid := l.Fluid()
	if name == "" || fluid == nil || d.Lasting <= 0 || (l.Stream == nil) == (l.Vessel == nil) {
		t.Errorf("load %+v", l)
	}
	figures := []float64{d.Duty, d.Allow, d.Inlet, d.Outlet, d.Pressure}
	if st := l.Stream; st != nil {
		figures = append(figures, st.Margin, st.IdleBelow, st.Pair, st.Hold, st.Stored)
		figures = append(figures, st.CalibratedAt)
		if st.FlowKind == 0 || st.Stored > 0 && st.StoredOver <= 0 {
			t.Errorf("stream %+v", st)
		}
	}
	if v := l.Vessel; v != nil {
		figures = append(figures, v.Margin, v.IdleBelow, v.Shell, v.Still)
		if v.Over <= 0 || v.ContentKind == 0 || v.Temperature.Constant() {
			t.Errorf("vessel %+v", v)
		}
	}
	for _, source := range l.Sources() {
		figures = append(figures, source.Value)
		if source.Tag >= s.Declared() || source.Constant() && source.Value <= 0 && source != nowhere {
			t.Errorf("load %q: source %+v", l.Name, source)
		}
	}
	return figures
}
