package page

import (
	"net/url"
	"strings"
	"testing"

	"golang.org/x/net/html"
)

// ownPages is how the address of each page and picture of ours begins.
var ownPages = []string{"/loads/", "/account", "/assets/", "/api/", "/metrics"}

// checkAddresses holds all that a page leads to, fetches or sends to: each is a place on the
// page or an address of our own, whatever names the site file gives.
func checkAddresses(t *testing.T, page *html.Node) {
	t.Helper()
	for _, x := range elements(page, "") {
		for _, name := range []string{"href", "src", "action", "formaction", "poster", "data"} {
			if to := attribute(x, name); to != "" && !ours(to) {
				t.Errorf("<%s %s=%q> leads away from the pages", x.Data, name, to)
			}
		}
	}
}

// ours tells whether an address is one of our own pages.
func ours(to string) bool {
	if strings.HasPrefix(to, "#") || strings.HasPrefix(to, "?") || to == "/" {
		return true
	}
	u, err := url.Parse(to)
	if err != nil || u.IsAbs() || u.Host != "" {
		return false
	}
	for _, begin := range ownPages {
		if strings.HasPrefix(u.EscapedPath(), begin) {
			return true
		}
	}
	return u.Path == "/"
}

func TestOurs(t *testing.T) {
	for to, want := range map[string]bool{
		"/": true, "/?duty=MW": true, "#heat": true, "?span=1h": true, "/loads/a%2Fb": true, "/account?duty=MW": true,
		"//evil.example/": false, "https://evil.example": false, "javascript:alert(1)": false, "loads/x": false, "/elsewhere": false, `/\evil.example`: false,
	} {
		if ours(to) != want {
			t.Errorf("%s: ours %v", to, !want)
		}
	}
}

// A load may be named as an address is: its links lead to its own page all the same.
func TestNamesThatLookLikeAddresses(t *testing.T) {
	for _, name := range []string{"javascript:alert(1)", "//evil.example/", "https://evil.example/", "data:text/html,x", "#", "?duty=MW"} {
		load := cooler()
		load.Name = name
		p, _ := mill(t, load)
		page := parsed(t, get(p, "/").Body.String())
		to := attribute(byOwnPage(page), "href")
		if back, err := url.PathUnescape(strings.TrimPrefix(to, "/loads/")); err != nil || back != name {
			t.Errorf("the load %q is behind %q", name, to)
		}
	}
}

// byOwnPage is the first link to the page of a load, or an empty one.
func byOwnPage(page *html.Node) *html.Node {
	for _, a := range elements(page, "a") {
		if strings.HasPrefix(attribute(a, "href"), "/loads/") {
			return a
		}
	}
	return new(html.Node)
}
