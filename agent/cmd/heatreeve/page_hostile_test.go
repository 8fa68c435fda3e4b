//go:build services

package main

import (
	"encoding/json"
	"fmt"
	"net/url"
	"slices"
	"strings"
	"testing"
	"time"
)

// hostileNames are those that a site file may have: printable, of at most 64 bytes.
var hostileNames = []string{
	`<img src=x onerror=alert(1)>`,
	`"><script>alert(1)</script>`,
	`' onmouseover='alert(1)' x='`,
	`</title></svg><svg onload=alert(1)>`,
	`javascript:alert(1)`,
	`a/b?c=d#e%2F&amp;{{.Site}}`,
	`__proto__`,
	`קירור مبرد`, // from right to left
	strings.Repeat("W", 64),
}

// hostileTexts come with an address or with a payload, and may be anything.
var hostileTexts = append([]string{
	"\u202egnol\u202c and \u2066of two ways",
	strings.Repeat("<b>W", 50),
	"\x00\x1b[31m\r\n\r\n<script>alert(2)</script>",
}, hostileNames...)

// hostileSite has loads of these names; some of them far short of their design.
func hostileSite() string {
	quoted := func(s string) string {
		b, _ := json.Marshal(s) // of a string; and JSON is YAML
		return string(b)
	}
	var b strings.Builder
	fmt.Fprintf(&b, "site: %s\ntimezone: UTC\nbroker: {url: \"mqtt://127.0.0.1:%%PORT%%\", client_id: hostile}\ntiming: {lateness: 1 s, commit: 1 s}\ntags:\n", quoted(hostileNames[0]))
	tags := []string{`<i>TT"1</i>`, `TT'2 onclick=alert(1)`, `<script>FT</script>`}
	for i, topic := range []string{"tt-1", "tt-2", "ft-1"} {
		fmt.Fprintf(&b, "  %s: {topic: bench/%s, unit: %s, value: /v, time: /ts, accuracy: 0.5 %% of reading, max_age: 4 s}\n", quoted(tags[i]), topic, []string{"°C", "°C", "m3/h"}[i])
	}
	fmt.Fprintln(&b, "loads:")
	for i, name := range hostileNames {
		design := ""
		if i%2 == 0 {
			design = fmt.Sprintf("\n    design: {duty: %d kW, allow: 8 %%, lasting: 1 s}", 700+5000*(i%4))
		}
		fmt.Fprintf(&b, "  %s:\n    stream: {fluid: water, flow: %s, inlet: %s, outlet: %s, pressure: 3.2 bar, meter_at: inlet, gives: heat}%s\n", quoted(name), quoted(tags[2]), quoted(tags[0]), quoted(tags[1]), design)
	}
	return b.String()
}

// injected counts what can be in a page only where a name was taken for markup.
const injected = `document.querySelectorAll("[onerror], [onload], [onmouseover], [onclick], img[src=x], b b, i b, script:not([src])").length`

// hostile looks for names and texts as they are, and for nothing that they would do.
func (b *browser) hostile(t *testing.T) {
	m := startBroker(t)
	a := startAgent(t, m.site(t, hostileSite()))
	m.plant(t)
	c := m.publisherAs(t, "sender of hostile texts")
	for _, text := range hostileTexts {
		c.Publish("bench/tt-1", 1, false, fmt.Sprintf(`{"v":%q,"ts":%d}`, text, time.Now().UnixMilli()))
		c.Publish("bench/ft-1", 1, false, text)
	}
	x := b.tab(t, a.address)
	x.size(360, 800)
	x.open("/")
	x.until("every load is measured", `[...document.querySelectorAll(".duty")].every(d => d.textContent !== "–")`)
	x.harmless("/")
	names := eval[[]string](x, `[...document.querySelectorAll(".band h3")].map(h => h.textContent)`)
	slices.Sort(names)
	if want := slices.Sorted(slices.Values(hostileNames)); !slices.Equal(names, want) {
		t.Errorf("the bands are called\n%q\nwant\n%q", names, want)
	}
	eventually(t, "a warning names a load", func() error {
		x.open("/")
		if text := eval[string](x, `document.querySelector(".warnings")?.textContent ?? ""`); !strings.Contains(text, hostileNames[2]) {
			return fmt.Errorf("the warnings are %q", text)
		}
		return nil
	})
	x.harmless("/ with warnings")
	links := eval[map[string]string](x, `Object.fromEntries([...document.querySelectorAll(".band")].map(b => [b.querySelector("h3").textContent, b.querySelector("h3 a").getAttribute("href")]))`)
	for _, name := range hostileNames {
		x.open(links[name])
		x.harmless(links[name])
		if h := eval[string](x, `document.querySelector("h1").textContent`); !strings.Contains(h, name) {
			t.Errorf("the sheet of %q is headed %q", name, h)
		}
	}
	eventually(t, "there is an account", func() error { _, err := a.get("/account"); return err })
	x.open("/account")
	x.harmless("/account")
	account := eval[string](x, `document.querySelector("main").textContent`)
	for _, name := range hostileNames {
		if !strings.Contains(account, name) {
			t.Errorf("the account does not name %q", name)
		}
	}
	x.askedHostile()
}

// harmless looks at what the names have done to a page.
func (x *tab) harmless(where string) {
	x.Helper()
	if n := eval[int](x, injected); n > 0 {
		x.Errorf("%s: %d elements come from a name", where, n)
	}
	if title := eval[string](x, "document.title"); !strings.Contains(title, hostileNames[0]) {
		x.Errorf("%s: the title is %q", where, title)
	}
	if w := eval[int](x, widest); w > 360 {
		x.Errorf("%s: %d px wide in a window of 360: %s", where, w, eval[string](x, fmt.Sprintf(sticksOut, 360)))
	}
	x.blameless()
}

// askedHostile puts the texts into addresses. They are answered with 400 or 404, of which the
// console tells.
func (x *tab) askedHostile() {
	x.Helper()
	x.mu.Lock()
	x.lossy = true
	x.mu.Unlock()
	for _, text := range hostileTexts {
		q := url.QueryEscape(text)
		for _, path := range []string{"/?find=" + q + "&verdict=" + q, "/?duty=" + q, "/loads/" + url.PathEscape(text+"."), "/account?from=" + q + "&by=" + q + "&load=" + q} {
			x.open(path)
			if n := eval[int](x, injected); n > 0 {
				x.Errorf("%s: %d elements come from the address", path, n)
			}
		}
	}
}
