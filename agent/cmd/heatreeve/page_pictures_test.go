//go:build services

package main

import (
	"bytes"
	"cmp"
	"flag"
	"fmt"
	"image"
	"image/color"
	"image/png"
	"maps"
	"slices"
	"testing"
	"time"
)

var pictures = flag.String("pictures", "", "`DIR` into which TestPage puts the README's pictures of the demo; look at them before they are committed")

// pictureBytes is the most that a picture in the README may have.
const pictureBytes = 120e3

// portraits lets the demo run for a day, and takes the README's pictures of one that goes on
// from there at a pace that can be followed.
func (b *browser) portraits(t *testing.T, dir string) {
	data := t.TempDir()
	t.Run("a day", func(t *testing.T) {
		a := startDemo(t, "1440", "--data", data)
		a.goesOn(t, 24*time.Hour)
	})
	a := startDemo(t, "60", "--data", data)
	a.goesOn(t, 30*time.Minute)
	x := b.tab(t, a.address)
	x.scheme("light")
	for name, path := range map[string]string{"sheet-of-loads": "/", "load": "/loads/milk?span=1d"} {
		x.size(1120, 1040)
		x.open(path)
		x.drawn()
		x.until("charts are drawn", `[...document.querySelectorAll(".chart")].every(c => c.querySelector("canvas"))`)
		eval[any](x, fmt.Sprintf(`document.querySelector("%s").scrollIntoView()`, map[string]string{"sheet-of-loads": "body", "load": ".band"}[name]))
		small := palette(t, x.view())
		if len(small) > pictureBytes {
			t.Errorf("%s has %d bytes, of at most %g", name, len(small), pictureBytes)
		}
		write(t, dir, name+".png", small)
	}
}

// goesOn waits until the demo's time has gone on by so much.
func (a *agentUnderTest) goesOn(t *testing.T, span time.Duration) {
	t.Helper()
	const at = "heatreeve_event_timestamp_seconds"
	end := a.value(t, at) + span.Seconds()
	for last := 0.0; last < end; { // each hour of the plant within patience
		next := min(end, last+3600)
		eventually(t, "the demo goes on", func() error {
			if last = a.value(t, at); last < next {
				return fmt.Errorf("it is at %.0f", last)
			}
			return nil
		})
	}
}

// palette is a PNG in the 256 colours that it has most of.
func palette(t *testing.T, picture []byte) []byte {
	t.Helper()
	from, err := png.Decode(bytes.NewReader(picture))
	if err != nil {
		t.Fatal(err)
	}
	box, counts := from.Bounds(), make(map[color.Color]int)
	for y := box.Min.Y; y < box.Max.Y; y++ {
		for x := box.Min.X; x < box.Max.X; x++ {
			counts[from.At(x, y)]++
		}
	}
	most := slices.SortedFunc(maps.Keys(counts), func(a, b color.Color) int { return cmp.Compare(counts[b], counts[a]) })
	to := image.NewPaletted(box, color.Palette(most[:min(256, len(most))]))
	for y := box.Min.Y; y < box.Max.Y; y++ {
		for x := box.Min.X; x < box.Max.X; x++ {
			to.Set(x, y, from.At(x, y))
		}
	}
	var b bytes.Buffer
	if err := (&png.Encoder{CompressionLevel: png.BestCompression}).Encode(&b, to); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}
