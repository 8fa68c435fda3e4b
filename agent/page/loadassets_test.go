package page

import (
	"bytes"
	"compress/gzip"
	"net/http"
	"net/http/httptest"
	"reflect"
	"regexp"
	"strings"
	"testing"

	"heatreeve/agent/answer"
)

// The script reads the columns of a series by the names that these have in JSON.
func TestScriptKnowsTheColumns(t *testing.T) {
	script, err := assetFiles.ReadFile("assets/load.js")
	if err != nil {
		t.Fatal(err)
	}
	names := make(map[string]bool)
	for f := range reflect.TypeFor[answer.Series]().Fields() {
		name, _, _ := strings.Cut(f.Tag.Get("json"), ",")
		names[name] = true
	}
	read := regexp.MustCompile(`\b(?:c|data)\.([a-z]+(?:_[A-Za-z]+)*|start|from|to)\b`).FindAllSubmatch(script, -1)
	columns := 0
	for _, m := range read {
		name := string(m[1])
		switch {
		case names[name]:
			columns++
		case strings.Contains(name, "_"):
			t.Errorf("a series has no %s", name)
		}
	}
	if columns < 12 {
		t.Errorf("the script reads %d columns", columns)
	}
}

// The sheet of a load with all that a browser fetches for it stays small: at most 150 kB
// compressed, and fewer than 15 requests with series, stream, ribbon and icon.
func TestWeightOfASheet(t *testing.T) {
	page := sheetOf(t, newFakePlant(t), "hot-water", "")
	var b bytes.Buffer
	z := gzip.NewWriter(&b)
	_, _ = z.Write([]byte(page))
	_ = z.Close()
	weight, requests := b.Len(), 1+3
	for _, x := range elements(parsed(t, page), "") {
		path := attribute(x, "src")
		if x.Data == "link" {
			path = attribute(x, "href")
		}
		if path == "" || x.Data == "img" {
			continue // the picture is for those who have no script
		}
		if !strings.HasPrefix(path, "/assets/") {
			t.Errorf("%s is fetched from %s", x.Data, path)
		}
		r := httptest.NewRequest(http.MethodGet, path, nil)
		r.Header.Set("Accept-Encoding", "gzip")
		w := httptest.NewRecorder()
		assets().ServeHTTP(w, r)
		if w.Code != http.StatusOK {
			t.Errorf("%s: status %d", path, w.Code)
		}
		weight, requests = weight+w.Body.Len(), requests+1
	}
	t.Logf("%d bytes in %d requests", weight, requests)
	if weight > 150e3 || requests >= 15 {
		t.Errorf("%d bytes in %d requests", weight, requests)
	}
}
