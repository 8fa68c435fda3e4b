package agent_test

import (
	"bytes"
	"compress/gzip"
	"context"
	"encoding/json"
	"io"
	"net/http"
	"net/url"
	"slices"
	"strings"
	"testing"

	"github.com/santhosh-tekuri/jsonschema/v6"

	"heatreeve/agent"
	"heatreeve/agent/answer"
	"heatreeve/agent/demo"
	"heatreeve/agent/page"
	"heatreeve/agent/view"
)

// interfaced is a running agent, whose answers are held to the document that it serves.
type interfaced struct {
	*running
	client   *http.Client
	doc      map[string]any
	compiler *jsonschema.Compiler
}

const documentURL = "https://heatreeve.example/openapi.json"

func (f *interfaced) read(t *testing.T) {
	t.Helper()
	resp, body := f.ask(t, "/api/v1/openapi.json", nil)
	if resp.StatusCode != http.StatusOK || !bytes.Equal(body, page.OpenAPI()) {
		t.Fatalf("the document: %d, %d bytes", resp.StatusCode, len(body))
	}
	x, err := jsonschema.UnmarshalJSON(bytes.NewReader(body))
	if err != nil {
		t.Fatal(err)
	}
	f.doc = x.(map[string]any)
	f.compiler = jsonschema.NewCompiler()
	f.compiler.AssertFormat()
	if err := f.compiler.AddResource(documentURL, x); err != nil {
		t.Fatal(err)
	}
}

// ask has the answer as it comes, with no coding unless it is asked for.
func (f *interfaced) ask(t *testing.T, path string, fields http.Header) (*http.Response, []byte) {
	t.Helper()
	req, err := http.NewRequestWithContext(t.Context(), http.MethodGet, "http://"+f.address+path, nil)
	if err != nil {
		t.Fatal(err)
	}
	for name, values := range fields {
		req.Header[name] = values
	}
	resp, err := f.client.Do(req)
	if err != nil {
		t.Fatal(err)
	}
	defer resp.Body.Close()
	body, err := io.ReadAll(resp.Body)
	if err != nil {
		t.Fatal(err)
	}
	return resp, body
}

func (f *interfaced) follow(pointer string) (map[string]any, string) {
	x := any(f.doc)
	for _, name := range strings.Split(pointer, "/")[1:] {
		o, _ := x.(map[string]any)
		x = o[strings.NewReplacer("~1", "/", "~0", "~").Replace(name)]
	}
	o, _ := x.(map[string]any)
	if ref, ok := o["$ref"].(string); ok {
		return f.follow(strings.TrimPrefix(ref, "#"))
	}
	return o, pointer
}

func escaped(name string) string { return strings.NewReplacer("~", "~0", "/", "~1").Replace(name) }

// check holds an answer to what the document says of the path and the status.
func (f *interfaced) check(t *testing.T, address, status string, fields http.Header) []byte {
	t.Helper()
	resp, body := f.ask(t, address, fields)
	if resp.Status[:3] != status {
		t.Errorf("%s: %s, want %s: %.300s", address, resp.Status, status, body)
		return body
	}
	path, _, _ := strings.Cut(address, "?")
	said, pointer := f.follow("/paths/" + escaped(path) + "/get/responses/" + status)
	if said == nil {
		t.Errorf("%s: the document has no %s", address, status)
		return body
	}
	headers, _ := said["headers"].(map[string]any)
	for name := range headers {
		if h, _ := f.follow(pointer + "/headers/" + name); h["required"] == true && resp.Header.Get(name) == "" {
			t.Errorf("%s: %s has no %s", address, status, name)
		}
	}
	kind, _, _ := strings.Cut(resp.Header.Get("Content-Type"), ";")
	content, _ := said["content"].(map[string]any)
	if content == nil {
		if kind != "" || len(body) > 0 {
			t.Errorf("%s: %s with %d bytes of %q", address, status, len(body), kind)
		}
		return body
	}
	if content[kind] == nil {
		t.Errorf("%s: %s is of %q, which the document has not", address, status, kind)
		return body
	}
	f.validate(t, address, pointer+"/content/"+escaped(kind)+"/schema", kind, body)
	return body
}

func (f *interfaced) validate(t *testing.T, address, pointer, kind string, body []byte) {
	t.Helper()
	schema, err := f.compiler.Compile(documentURL + "#" + pointer)
	if err != nil {
		t.Fatal(err)
	}
	x := any(string(body))
	if strings.HasSuffix(kind, "json") {
		if x, err = jsonschema.UnmarshalJSON(bytes.NewReader(body)); err != nil {
			t.Errorf("%s: %v", address, err)
			return
		}
	}
	if err := schema.Validate(x); err != nil {
		t.Errorf("%s: %v\n%.600s", address, err, body)
	}
}

// queries are, for each path of the interface, one that is answered.
var queries = map[string]string{
	"/api/v1/site": "", "/api/v1/loads": "", "/api/v1/warnings": "", "/api/v1/openapi.json": "",
	"/api/v1/events":  "?limit=1",
	"/api/v1/series":  "?load=hot-water&from=2000-01-01&points=50",
	"/api/v1/report":  "?from=2000-01-01&by=month",
	"/api/v1/explain": "?load=hot-water",
	"/api/v1/export":  "?load=hot-water&format=json",
}

// What a running agent answers is what the document that it serves says (OpenAPI 3.1, JSON
// Schema 2020-12).
func TestInterface(t *testing.T) {
	d, err := demo.Start(demo.Options{Speed: 60, Seed: 1})
	if err != nil {
		t.Fatal(err)
	}
	defer d.Close()
	data := t.TempDir()
	f := &interfaced{running: start(t, d, data), client: &http.Client{Transport: &http.Transport{DisableKeepAlives: true, DisableCompression: true}}}
	published := make(chan error, 1)
	ctx, cancel := context.WithCancel(t.Context())
	go func() { published <- d.Run(ctx) }()
	f.await(t, "figures of all loads, and their heat on disk", func(s *view.Snapshot) bool {
		return !slices.ContainsFunc(s.Loads, func(l view.Load) bool { return !l.Figure.Measured() || l.Booked.Given+l.Booked.Taken == 0 })
	})
	f.read(t)
	paths := f.doc["paths"].(map[string]any)
	for path := range paths {
		if path == "/api/v1/stream" { // which has no end
			continue
		}
		t.Run(strings.TrimPrefix(path, "/api/v1/"), func(t *testing.T) { f.path(t, path) })
	}
	f.check(t, "/api/v1/stream?duty=furlong", "400", nil)
	f.parameters(t, "/api/v1/stream", "")
	for _, q := range []string{"report?from=2199-01-01", "explain?load=hot-water&at=2000-01-01T00:00", "export?load=hot-water&from=2199-01-01"} {
		f.check(t, "/api/v1/"+q, "404", nil)
	}
	f.check(t, "/api/v1/export?tag=CT-1&load=hot-water", "400", nil)
	f.pages(t)
	f.validators(t)
	f.coding(t)
	happened(t, data)
	cancel()
	if err := <-published; err != nil {
		t.Error(err)
	}
	if err := f.stop(); err != nil {
		t.Error(err)
	}
}

// path asks one path in all ways.
func (f *interfaced) path(t *testing.T, path string) {
	query, ok := queries[path]
	if !ok {
		t.Fatal("no query is known")
	}
	f.check(t, path+query, "200", nil)
	if path != "/api/v1/export" {
		f.check(t, path+query, "304", http.Header{"If-None-Match": {"*"}})
	}
	f.parameters(t, path, query)
}

// parameters holds those that the code knows to those of the document: a path lists them where
// it is asked for another one, and takes each of them.
func (f *interfaced) parameters(t *testing.T, path, query string) {
	t.Helper()
	var p answer.Problem
	if err := json.Unmarshal(f.check(t, path+"?nonsense=1", "400", nil), &p); err != nil {
		t.Fatal(err)
	}
	list, ok := strings.CutPrefix(p.Detail, "nonsense is no parameter; known: ")
	known := strings.Split(list, ", ")
	if !ok || list == "none" {
		known = nil
	}
	var said []string
	get, pointer := f.follow("/paths/" + escaped(path) + "/get")
	for _, x := range get["parameters"].([]any) {
		o, _ := f.follow(strings.TrimPrefix(x.(map[string]any)["$ref"].(string), "#"))
		if o["in"] == "query" {
			said = append(said, o["name"].(string))
		}
	}
	slices.Sort(known)
	slices.Sort(said)
	if !ok || !slices.Equal(known, said) {
		t.Errorf("%s: the code knows %q (%s), the document %q", pointer, known, p.Detail, said)
	}
	for _, name := range said {
		_, body := f.ask(t, path+"?"+url.Values{name: {"\x7f"}}.Encode(), nil)
		if strings.Contains(string(body), "is no parameter") {
			t.Errorf("%s does not take %s: %s", path, name, body)
		}
	}
}

// pages follows the links from page to page: they come to all loads, and to all events, once.
func (f *interfaced) pages(t *testing.T) {
	t.Helper()
	for _, tt := range []struct{ address, list, name string }{{"/api/v1/loads?limit=1", "loads", "load"}, {"/api/v1/events?limit=1", "events", "text"}} {
		var whole map[string]any
		path, _, _ := strings.Cut(tt.address, "?")
		if err := json.Unmarshal(f.check(t, path, "200", nil), &whole); err != nil {
			t.Fatal(err)
		}
		want := whole[tt.list].([]any)
		var got []any
		for address := tt.address; address != ""; {
			var one map[string]any
			if err := json.Unmarshal(f.check(t, address, "200", nil), &one); err != nil {
				t.Fatal(err)
			}
			resp, _ := f.ask(t, address, nil)
			got = append(got, one[tt.list].([]any)...)
			address, _ = one["next"].(string)
			if link := resp.Header.Get("Link"); (link == "<"+address+`>; rel="next"`) != (address != "") {
				t.Errorf("Link %q, next %q", link, address)
			}
			if len(got) > len(want)+9 {
				t.Fatalf("%s comes to no end", tt.address)
			}
		}
		if len(want) == 0 || len(got) < len(want) {
			t.Fatalf("%s: %d by pages, %d at once", tt.address, len(got), len(want))
		}
		for i := range want {
			if a, b := want[i].(map[string]any)[tt.name], got[i].(map[string]any)[tt.name]; a != b {
				t.Errorf("%s: %v by pages, %v at once", tt.address, b, a)
			}
		}
	}
	for _, q := range []string{"loads?after=nobody", "loads?limit=0", "loads?limit=1001", "events?after=yesterday", "events?after=1.", "events?limit=many"} {
		f.check(t, "/api/v1/"+q, "400", nil)
	}
}

// validators asks again for what is at hand.
func (f *interfaced) validators(t *testing.T) {
	t.Helper()
	const path = "/api/v1/site"
	resp, _ := f.ask(t, path, nil)
	f.check(t, path, "304", http.Header{"If-None-Match": {`"another", ` + resp.Header.Get("ETag")}})
	f.check(t, path, "200", http.Header{"If-None-Match": {`"another"`}})
}

// coding asks for gzip, and then again with the validator of that.
func (f *interfaced) coding(t *testing.T) {
	t.Helper()
	const path = "/api/v1/openapi.json"
	zipped := http.Header{"Accept-Encoding": {"gzip"}}
	resp, body := f.ask(t, path, zipped)
	z, err := gzip.NewReader(bytes.NewReader(body))
	if err != nil {
		t.Fatalf("%v: %v", resp.Header, err)
	}
	if text, err := io.ReadAll(z); err != nil || !bytes.Equal(text, page.OpenAPI()) || 3*len(body) > len(text) {
		t.Errorf("%d bytes for %d, %v", len(body), len(text), err)
	}
	f.check(t, path, "304", http.Header{"Accept-Encoding": {"gzip"}, "If-None-Match": {resp.Header.Get("ETag")}})
	f.check(t, path, "200", http.Header{"If-None-Match": {resp.Header.Get("ETag")}})
}

// happened has the command line follow the pages.
func happened(t *testing.T, data string) {
	t.Helper()
	e, err := agent.Happened(t.Context(), data, answer.EventQuery{})
	if err != nil || len(e.Events) == 0 || e.Next != "" || e.Zone == "" {
		t.Errorf("%+v, %v", e, err)
	}
	if _, err := agent.Happened(t.Context(), data, answer.EventQuery{Kind: "warnings"}); err == nil || !strings.HasPrefix(err.Error(), `kind "warnings" is none; there are started`) {
		t.Errorf("a kind that is none: %v", err)
	}
}
