//go:build services

package main

import (
	"fmt"
	"strings"
	"testing"

	"github.com/chromedp/chromedp"
	"github.com/chromedp/chromedp/kb"
)

// widest is how far a page reaches to the right, in pixels; beyond the window it can be
// scrolled there.
const widest = `Math.max(document.documentElement.scrollWidth, document.body.scrollWidth)`

// care holds each page, light and dark, to axe-core and to the width of its window, and takes
// its picture.
func (b *browser) care(t *testing.T, a *agentUnderTest, axe string) {
	dir := shots(t)
	for name, path := range pages {
		x := b.tab(t, a.address)
		x.size(1440, 900)
		x.open(path)
		x.drawn()
		for _, scheme := range []string{"light", "dark"} {
			x.scheme(scheme)
			x.accessible(axe, name+" "+scheme)
			for _, width := range []int64{360, 768, 1440} {
				x.size(width, 900)
				eventually(x.T, name+" fits its window", func() error {
					if w := eval[int64](x, widest); w > width {
						return fmt.Errorf("%d px wide in a window of %d: %s", w, width, eval[string](x, fmt.Sprintf(sticksOut, width)))
					}
					return nil
				})
				write(t, dir, fmt.Sprintf("%s-%d-%s.png", name, width, scheme), x.picture(width))
				x.size(width, 900)
			}
		}
		x.opensEverything(axe, name)
	}
}

// sticksOut names what reaches beyond a width, and does not lie in a part that can be scrolled
// by itself.
const sticksOut = `[...document.querySelectorAll("body *")].filter(e => e.getBoundingClientRect().left + Math.max(e.scrollWidth, e.getBoundingClientRect().width) > %d && !e.closest(".scroll"))
	.slice(-5).map(e => e.tagName + "." + (e.getAttribute("class") || "") + " " + Math.round(e.getBoundingClientRect().right)).join("; ")`

// opensEverything opens what is folded, which axe-core does not see, and looks again on a
// phone.
func (x *tab) opensEverything(axe, name string) {
	x.Helper()
	eval[bool](x, `document.querySelectorAll("details").forEach(d => d.open = true), true`)
	x.size(360, 640)
	x.accessible(axe, name+", opened, 360 px")
	if w := eval[int64](x, widest); w > 360 {
		x.Errorf("%s, opened: %d px wide in a window of 360: %s", name, w, eval[string](x, fmt.Sprintf(sticksOut, 360)))
	}
}

// drawn waits until the ribbons in sight, which the page draws by script, are there.
func (x *tab) drawn() {
	x.Helper()
	x.until("ribbons are drawn", `[...document.querySelectorAll("svg.ribbon")].every(r => r.getBoundingClientRect().bottom > innerHeight || r.querySelector(".base").getAttribute("d"))`)
}

// picture is the whole page as a PNG, in a window as high as it is.
func (x *tab) picture(width int64) []byte {
	x.Helper()
	x.size(width, eval[int64](x, "document.documentElement.scrollHeight"))
	x.drawn()
	return x.view()
}

// view is what the window shows, as a PNG.
func (x *tab) view() []byte {
	x.Helper()
	picture, err := chromedp.Run(x.ctx, chromedp.CaptureScreenshot())
	if err != nil {
		x.Fatal(err)
	}
	return picture
}

// stop is where the focus comes to by the key Tab.
type stop struct {
	What  string // tag, name, text
	Load  string // the band in which it lies
	Seen  bool   // the focus is marked, and nothing lies over it
	Where string
}

const focused = `(() => {
	const e = document.activeElement, s = getComputedStyle(e), r = e.getBoundingClientRect();
	const over = document.elementFromPoint(r.x + r.width / 2, r.y + r.height / 2);
	return {
		What: [e.tagName.toLowerCase(), e.name || "", e.textContent.trim().slice(0, 40)].join(" "),
		Load: e.closest("[data-load]")?.dataset.load ?? "",
		Seen: s.outlineStyle !== "none" && parseFloat(s.outlineWidth) >= 2 && over !== null && (e.contains(over) || over.contains(e) && over !== document.body && over !== document.documentElement),
		Where: [s.outlineStyle, s.outlineWidth, Math.round(r.y), over?.tagName].join(" "),
	};
})()`

// tabulate presses Tab so often, and tells where that leads.
func (x *tab) tabulate(presses int) (all []stop) {
	x.Helper()
	for range presses {
		x.do(chromedp.KeyEvent(kb.Tab))
		s := eval[stop](x, focused)
		if strings.HasPrefix(s.What, "body ") {
			break
		}
		all = append(all, s)
	}
	return all
}

// keyboard goes over the sheet of loads by Tab, in the order in which it is read: the way to
// the content, the filter, each band; and types into the filter.
func (b *browser) keyboard(t *testing.T, a *agentUnderTest) {
	x := b.tab(t, a.address)
	x.size(768, 600)
	x.open("/")
	stops := x.tabulate(60)
	var order []string
	for _, s := range stops {
		if !s.Seen {
			t.Errorf("the focus does not show on %+v", s)
		}
		order = append(order, s.What)
	}
	all := strings.Join(order, "\n")
	at := -1
	for _, want := range []string{"a  To the content", "a  Loads", "input find", "input verdict", "summary  How to read a band", "a  "} {
		i := strings.Index(all[at+1:], want)
		if i < 0 {
			t.Errorf("%q does not come in its turn in:\n%s", want, all)
		}
		at += 1 + i
	}
	for _, load := range []string{"hot-water", "chilled-glycol", "dryer-air", "milk"} {
		if !strings.Contains(all, "a  "+load) {
			t.Errorf("Tab does not come to the band of %s:\n%s", load, all)
		}
	}
	for name, path := range pages {
		x.open(path)
		stops := x.tabulate(80)
		for _, s := range stops {
			if !s.Seen {
				t.Errorf("%s: the focus does not show on %+v", name, s)
			}
		}
		if len(stops) < 12 {
			t.Errorf("%s: Tab stops only at %+v", name, stops)
		}
	}
	x.open("/")
	x.do(chromedp.Focus(chromedp.CSS("input[name=find]")), chromedp.KeyEvent("MILK"))
	x.until("the filter leaves milk alone", `[...document.querySelectorAll("[data-load]")].every(b => (b.dataset.load === "milk") === (b.getClientRects().length > 0))`)
	x.do(chromedp.KeyEvent(kb.Enter))
	x.until("the filter is in the address", `location.search.includes("find=MILK")`)
	x.until("one band is left", `document.querySelectorAll("[data-load]:not([hidden])").length === 1`)
}
