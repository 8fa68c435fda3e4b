package site

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
)

// Each file of testdata/wrong ends with the faults that it must be given, in
// order: the place, the path, and pieces of the message parted by " | ".
//
//	#! 15:49 loads.near.stream.inlet: tag "TT-20" is not declared | near: "TT-201"
var wanted = regexp.MustCompile(`(?m)^#! (\d+:\d+) (.+)$`)

func TestWrongFiles(t *testing.T) {
	files, err := filepath.Glob("testdata/wrong/*.yaml")
	if err != nil || len(files) < 10 {
		t.Fatalf("found %d wrong files, %v", len(files), err)
	}
	told := 0
	for _, path := range files {
		t.Run(filepath.Base(path), func(t *testing.T) {
			text, err := os.ReadFile(path)
			if err != nil {
				t.Fatal(err)
			}
			_, err = Load(path)
			var faults Faults
			if !errors.As(err, &faults) {
				t.Fatalf("Load = %v, want Faults", err)
			}
			want := wanted.FindAllStringSubmatch(string(text), -1)
			told += len(want)
			compare(t, faults, want)
		})
	}
	if told < 300 {
		t.Errorf("the files have %d faults in all", told)
	}
}

func compare(t *testing.T, faults Faults, want [][]string) {
	t.Helper()
	if len(want) == 0 || len(faults) != len(want) {
		t.Errorf("%d faults, want %d", len(faults), len(want))
	}
	for i, f := range faults {
		text := strings.TrimPrefix(f.Error(), f.File+":")
		if i >= len(want) {
			t.Errorf("besides: #! %s", text)
			continue
		}
		place := fmt.Sprintf("%d:%d", f.Line, f.Column)
		pieces := strings.Split(want[i][2], " | ")
		if place != want[i][1] || !strings.HasPrefix(text, place+": "+pieces[0]) {
			t.Errorf("got  %s\nwant %s: %s", text, want[i][1], want[i][2])
		}
		for _, piece := range pieces[1:] {
			if !strings.Contains(f.Message, piece) {
				t.Errorf("%s: does not say %q", text, piece)
			}
		}
	}
}
