package page

import (
	"compress/gzip"
	"io"
	"net/http"
	"net/http/httptest"
	"strings"
	"testing"
)

const long = 2048

// answered asks for a body of n letters, with some header fields.
func answered(t *testing.T, h http.Handler, method string, fields http.Header) *http.Response {
	t.Helper()
	r := httptest.NewRequest(method, "/", nil)
	r.Header = fields
	w := httptest.NewRecorder()
	h.ServeHTTP(w, r)
	return w.Result()
}

func letters(n int) http.Handler {
	return http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		Answer(w, r, "application/json", []byte(strings.Repeat("a", n)))
	})
}

// The validator answers 304 without a body, with the fields
// that 200 would have had (RFC 9110, 15.4.5).
func TestValidators(t *testing.T) {
	own := answered(t, letters(long), "GET", nil).Header.Get("ETag")
	if !strings.HasPrefix(own, `"`) {
		t.Fatalf("validator %s", own)
	}
	if other := answered(t, letters(long+1), "GET", nil).Header.Get("ETag"); other == own {
		t.Errorf("two bodies have the validator %s", own)
	}
	for _, tt := range []struct {
		match []string
		want  int
	}{
		{[]string{own}, 304},
		{[]string{"W/" + own}, 304},
		{[]string{`"x,y", ` + own}, 304},
		{[]string{`"x"`, own}, 304},
		{[]string{" * "}, 304},
		{[]string{`"x"`}, 200},
		{[]string{strings.Trim(own, `"`)}, 200},
		{[]string{`"x` + own}, 200},
		{[]string{`"x" ` + own}, 200},
		{[]string{""}, 200},
	} {
		resp := answered(t, letters(long), "GET", http.Header{"If-None-Match": tt.match})
		body, err := io.ReadAll(resp.Body)
		if err != nil || resp.StatusCode != tt.want || (len(body) == 0) != (tt.want == 304) {
			t.Errorf("If-None-Match %q: %d with %d bytes, %v; want %d", tt.match, resp.StatusCode, len(body), err, tt.want)
		}
		if h := resp.Header; h.Get("ETag") != own || h.Get("Cache-Control") != "no-cache" || tt.want == 304 && h.Get("Content-Type") != "" {
			t.Errorf("If-None-Match %q: %v", tt.match, h)
		}
	}
}

// A real client, whose connection stays in use, is told the same; HEAD has no body.
func TestOnTheWire(t *testing.T) {
	server := httptest.NewServer(letters(long))
	defer server.Close()
	ask := func(method, match string) (*http.Response, int) {
		req, err := http.NewRequestWithContext(t.Context(), method, server.URL, nil)
		if err != nil {
			t.Fatal(err)
		}
		if match != "" {
			req.Header.Set("If-None-Match", match)
		}
		resp, err := server.Client().Do(req)
		if err != nil {
			t.Fatal(err)
		}
		defer resp.Body.Close()
		text, err := io.ReadAll(resp.Body)
		if err != nil {
			t.Fatal(err)
		}
		return resp, len(text)
	}
	first, n := ask("GET", "")
	if first.StatusCode != 200 || n != long {
		t.Errorf("first: %d, %d bytes", first.StatusCode, n)
	}
	if again, n := ask("GET", first.Header.Get("ETag")); again.StatusCode != 304 || n != 0 {
		t.Errorf("again: %d, %d bytes", again.StatusCode, n)
	}
	if head, n := ask("HEAD", ""); head.StatusCode != 200 || n != 0 || head.Header.Get("ETag") == "" {
		t.Errorf("head: %d, %d bytes, %v", head.StatusCode, n, head.Header)
	}
}

// Who takes gzip is given it, of long answers, with a validator of its own that holds.
func TestAnswerIsCompressed(t *testing.T) {
	packed := answered(t, letters(long), http.MethodGet, http.Header{"Accept-Encoding": {"gzip"}})
	plain := answered(t, letters(long), http.MethodGet, nil)
	tag := packed.Header.Get("ETag")
	if packed.Header.Get("Content-Encoding") != "gzip" || packed.Header.Get("Vary") != "Accept-Encoding" || tag == "" || tag == plain.Header.Get("ETag") {
		t.Errorf("%v; plain %v", packed.Header, plain.Header)
	}
	z, err := gzip.NewReader(packed.Body)
	if err != nil {
		t.Fatal(err)
	}
	if text, err := io.ReadAll(z); err != nil || string(text) != strings.Repeat("a", long) {
		t.Errorf("%d bytes, %v", len(text), err)
	}
	again := answered(t, letters(long), http.MethodGet, http.Header{"Accept-Encoding": {"gzip"}, "If-None-Match": {tag}})
	if body, _ := io.ReadAll(again.Body); again.StatusCode != http.StatusNotModified || len(body) != 0 || again.Header.Get("ETag") != tag {
		t.Errorf("asked again: %s, %d bytes, %v", again.Status, len(body), again.Header)
	}
	for _, take := range []string{"", "br", "gzip;q=0", "*, gzip; q=0", "gzip;q=x"} {
		if got := answered(t, letters(long), http.MethodGet, http.Header{"Accept-Encoding": {take}}).Header.Get("Content-Encoding"); got != "" {
			t.Errorf("who takes %q is given %s", take, got)
		}
	}
	if short := answered(t, letters(100), http.MethodGet, http.Header{"Accept-Encoding": {"gzip"}}); short.Header.Get("Content-Encoding") != "" {
		t.Error("100 bytes are compressed")
	}
}

func TestTakesGzip(t *testing.T) {
	for _, lines := range [][]string{{"gzip"}, {"deflate, gzip;q=0.5"}, {"*"}, {"br", "GZIP"}, {"identity;q=0, *;q=0.1"}} {
		if !takesGzip(lines) {
			t.Errorf("%q takes it", lines)
		}
	}
}

// An asset has a validator as it is and another one compressed, each of which holds.
func TestAssetsHaveValidators(t *testing.T) {
	ask := func(coding, match string) *http.Response {
		r := httptest.NewRequest(http.MethodGet, "/assets/sheet.js", nil)
		r.Header = http.Header{"Accept-Encoding": {coding}, "If-None-Match": {match}}
		w := httptest.NewRecorder()
		assets().ServeHTTP(w, r)
		return w.Result()
	}
	plain, packed := ask("identity", "").Header.Get("ETag"), ask("gzip", "").Header.Get("ETag")
	if plain == "" || packed == "" || plain == packed {
		t.Errorf("validators %s and %s", plain, packed)
	}
	for _, tt := range []struct {
		coding, match string
		want          int
	}{
		{"identity", plain, 304}, {"gzip", `"x", ` + packed, 304}, {"gzip", "*", 304}, {"gzip", plain, 200}, {"gzip;q=0", packed, 200},
	} {
		resp := ask(tt.coding, tt.match)
		if resp.StatusCode != tt.want || resp.Header.Get("Vary") != "Accept-Encoding" || (resp.Header.Get("Content-Encoding") == "gzip") != (tt.coding == "gzip" && tt.want == 200) {
			t.Errorf("%s, If-None-Match %s: %d %v, want %d", tt.coding, tt.match, resp.StatusCode, resp.Header, tt.want)
		}
	}
}
