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
	files, err := filepath.Glob("testdata/wrong/*.yaml")
	if err != nil || len(files) == 0 {
		f.Fatalf("no seeds: %v", err)
	}
	for _, path := range files {
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
	for _, tag := range s.Tags {
		a := tag.Accuracy
		figures = append(figures, tag.Scale, tag.Offset, a.Abs, a.Rel, a.Zero)
		if !(tag.Min < tag.Max) || tag.Topic == "" || a.Abs+a.Rel <= 0 || tag.MaxAge <= 0 {
			t.Errorf("tag %+v", tag)
		}
	}
	for _, l := range s.Loads {
		st, d := l.Stream, l.Design
		if st.Fluid == nil || st.FlowKind == 0 || d.Lasting <= 0 {
			t.Errorf("load %+v", l)
		}
		figures = append(figures, st.Margin, st.IdleBelow, d.Duty, d.Allow, d.Inlet, d.Outlet, d.Pressure)
		for _, source := range []Source{st.Flow, st.Inlet, st.Outlet, st.Pressure, st.OutletPressure, st.Humidity, st.Coil} {
			figures = append(figures, source.Value)
			if source.Tag >= len(s.Tags) || source.Constant() && source.Value <= 0 && source != nowhere {
				t.Errorf("load %q: source %+v", l.Name, source)
			}
		}
	}
	for _, x := range figures {
		if math.IsNaN(x) || math.IsInf(x, 0) {
			t.Errorf("figure %v in %+v", x, s)
		}
	}
}
