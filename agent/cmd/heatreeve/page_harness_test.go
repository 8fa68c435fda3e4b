//go:build services

package main

import (
	"fmt"
	"io"
	"net/http"
	"net/http/httptest"
	"slices"
	"strings"
	"testing"
)

// A page with every fault that the tests of the page look for: were these not seen here, that
// none is seen elsewhere would say nothing.
const badPage = `<!DOCTYPE html><html lang="en"><title>Bad</title><link rel="icon" href="data:,">
<main><h1>Bad</h1><p id="pale">pale</p><img src="/missing.png"><div id="wide">wide</div><button>a</button></main>
<script src="/bad.js"></script></html>`

const badScript = `
document.getElementById("pale").style.cssText = "color: #ddd; background: #fff";
document.getElementById("wide").style.width = "900px";
document.querySelector("button").style.outline = "none";
console.error("said");
setTimeout(() => { throw new Error("thrown"); });
fetch("http://192.0.2.1/beyond").catch(() => {});
document.getElementById("pale").setAttribute("onclick", "alert(1)");
document.getElementById("pale").click();
document.title = "over";
`

func (b *browser) sees(t *testing.T, axe string) {
	server := httptest.NewServer(http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		w.Header().Set("Content-Security-Policy", "script-src 'self'; style-src 'self' 'unsafe-inline'")
		switch r.URL.Path {
		case "/":
			w.Header().Set("Content-Type", "text/html; charset=utf-8")
			io.WriteString(w, badPage)
		case "/bad.js":
			io.WriteString(w, badScript)
		default:
			http.NotFound(w, r)
		}
	}))
	t.Cleanup(server.Close)
	x := b.tab(t, strings.TrimPrefix(server.URL, "http://"))
	x.size(360, 640)
	x.open("/")
	x.until("the bad script ends", `document.title === "over"`)
	eval[bool](x, `new Promise(done => setTimeout(() => done(true)))`)
	said := ""
	eventually(t, "each fault of a bad page is seen", func() error {
		said += strings.Join(x.faults(), "\n")
		for _, want := range []string{"said", "exception: Uncaught", "asks beyond the agent: http://192.0.2.1/beyond", "resource: net::ERR_NAME_NOT_RESOLVED", "/missing.png", "Content Security Policy"} {
			if !strings.Contains(said, want) {
				return fmt.Errorf("%q is not in:\n%s", want, said)
			}
		}
		return nil
	})
	var found []string
	for _, f := range x.judge(axe).Violations {
		found = append(found, f.ID)
	}
	for _, want := range []string{"color-contrast", "image-alt"} {
		if !slices.Contains(found, want) {
			t.Errorf("axe-core does not find %s, but %v", want, found)
		}
	}
	if eval[int](x, widest) <= 360 {
		t.Error("a page that is too wide is not seen to be")
	}
	if stop := x.tabulate(3)[0]; stop.Seen {
		t.Errorf("a focus that does not show is taken to: %+v", stop)
	}
}
