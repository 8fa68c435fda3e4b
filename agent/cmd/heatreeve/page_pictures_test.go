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
)

var pictures = flag.String("pictures", "", "`DIR` into which TestPage puts the README's pictures of the demo; look at them before they are committed")

// pictureBytes is the most that a picture in the README may have.
const pictureBytes = 120e3

// portraits lets the demo run for more than a day, and takes the README's pictures of it while
// a load is short.
func (b *browser) portraits(t *testing.T, dir string) {
	a := startDemo(t, "1440")
	begun := a.value(t, "heatreeve_event_timestamp_seconds")
	for passed := 0.0; passed < 27*3600; {
		eventually(t, "the demo goes on", func() error {
			now := a.value(t, "heatreeve_event_timestamp_seconds") - begun
			if now < passed+3600 {
				return fmt.Errorf("%g s have passed", now)
			}
			passed = now
			return nil
		})
	}
	x := b.tab(t, a.address)
	for name, p := range map[string]struct {
		path   string
		height int64 // 0 for the whole page
	}{"sheet-of-loads": {"/", 0}, "load": {"/loads/milk?span=1d", 1000}} {
		x.scheme("light")
		x.size(1120, 900)
		x.open(p.path)
		x.drawn()
		if p.height == 0 {
			p.height = eval[int64](x, "document.documentElement.scrollHeight")
		}
		x.size(1120, p.height)
		small := palette(t, x.picture(1120))
		if len(small) > pictureBytes {
			t.Errorf("%s has %d bytes, of at most %g", name, len(small), pictureBytes)
		}
		write(t, dir, name+".png", small)
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
