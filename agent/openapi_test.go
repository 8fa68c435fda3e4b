package agent

import (
	"encoding/json"
	"maps"
	"net/http"
	"reflect"
	"slices"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/page"
	"heatreeve/agent/site"
	"heatreeve/agent/warn"
	"heatreeve/agent/working"
)

// object is one of JSON.
type object = map[string]any

func described(t *testing.T) object {
	t.Helper()
	var doc object
	if err := json.Unmarshal(page.OpenAPI(), &doc); err != nil {
		t.Fatalf("the document is no JSON: %v", err)
	}
	return doc
}

// at follows a JSON Pointer without its sign of escape; nil where it leads nowhere.
func at(x any, pointer string) any {
	for _, name := range strings.Split(pointer, "/")[1:] {
		o, ok := x.(object)
		if !ok {
			return nil
		}
		x = o[name]
	}
	return x
}

// walk visits all objects.
func walk(x any, visit func(object)) {
	switch x := x.(type) {
	case object:
		visit(x)
		for _, y := range x {
			walk(y, visit)
		}
	case []any:
		for _, y := range x {
			walk(y, visit)
		}
	}
}

// Every reference of the document leads somewhere, and every component is referred to.
func TestReferencesOfTheInterface(t *testing.T) {
	doc := described(t)
	used := make(map[string]bool)
	walk(doc, func(o object) {
		ref, ok := o["$ref"].(string)
		if !ok {
			return
		}
		used[ref] = true
		if pointer, here := strings.CutPrefix(ref, "#"); !here || at(doc, pointer) == nil {
			t.Errorf("%s leads nowhere", ref)
		}
	})
	for kind, all := range doc["components"].(object) {
		for name := range all.(object) {
			if ref := "#/components/" + kind + "/" + name; kind != "securitySchemes" && !used[ref] {
				t.Errorf("nothing refers to %s", ref)
			}
		}
	}
}

// The document has the paths of the code, and no others.
func TestPathsOfTheInterface(t *testing.T) {
	code := newAPI(http.NotFoundHandler(), newReports(history{}), &explains{site: &site.Site{Zone: time.UTC}}, &health{}, "test")
	want := slices.Sorted(maps.Keys(code))
	if got := slices.Sorted(maps.Keys(described(t)["paths"].(object))); !slices.Equal(got, want) {
		t.Errorf("the document has %q, the code %q", got, want)
	}
}

// The document has the kinds of events that there are.
func TestKindsOfEventsInTheInterface(t *testing.T) {
	var got []string
	for _, k := range at(described(t), "/components/parameters/kind/schema/enum").([]any) {
		got = append(got, k.(string))
	}
	if !slices.Equal(got, eventKinds) {
		t.Errorf("the document has %q, the code %q", got, eventKinds)
	}
}

// answered are the types that answers are made of.
var answered = map[string]any{
	"Problem": answer.Problem{}, "Site": answer.Site{}, "ShownIn": answer.ShownIn{}, "SiteLoad": answer.SiteLoad{}, "SiteDesign": answer.SiteDesign{},
	"SiteExchanger": answer.SiteExchanger{}, "Loads": answer.Loads{}, "Present": answer.Present{}, "Mean": answer.Mean{}, "Register": answer.Register{},
	"Series": answer.Series{}, "Report": answer.Report{}, "LoadReport": answer.LoadReport{}, "Period": answer.PeriodReport{}, "Share": answer.Share{},
	"Extreme": answer.Extreme{}, "Demand": answer.Demand{}, "Peak": answer.Peak{}, "Witness": answer.Witness{}, "SiteFile": answer.SiteFile{},
	"Event": answer.Event{}, "Events": answer.Events{}, "Standing": answer.Standing{}, "Shelf": answer.Shelved{}, "Warning": warn.Document{},
	"Mark": warn.MarkDocument{}, "WarningCause": warn.CauseDocument{}, "Working": working.Working{}, "Section": working.Section{}, "Line": working.Line{},
	"Sample": working.Sample{}, "Cause": working.Cause{}, "Figure": working.Figure{},
}

// Every schema is closed, and has the fields of its type: those that may be left out as such.
func TestSchemasOfTheInterface(t *testing.T) {
	schemas := at(described(t), "/components/schemas").(object)
	for name, x := range schemas {
		s := x.(object)
		if s["type"] != "object" {
			continue
		}
		if s["additionalProperties"] != false {
			t.Errorf("%s is open", name)
		}
		if answered[name] == nil {
			t.Errorf("%s is of no type", name)
		}
	}
	for name, x := range answered {
		s, ok := schemas[name].(object)
		if !ok {
			t.Errorf("there is no schema %s", name)
			continue
		}
		fields := make(map[string]bool)
		collect(reflect.TypeOf(x), fields)
		if name == "Warning" {
			delete(fields, "site") // which a message names, and an answer has once
		}
		var required []string
		for _, r := range s["required"].([]any) {
			required = append(required, r.(string))
		}
		for field, always := range fields {
			if s["properties"].(object)[field] == nil || always != slices.Contains(required, field) {
				t.Errorf("%s: %s is not in the document, or not as it is left out", name, field)
			}
		}
		for field := range s["properties"].(object) {
			if _, ok := fields[field]; !ok {
				t.Errorf("%s: %s is in the document alone", name, field)
			}
		}
	}
}

// collect has the names of the fields in JSON, true where one is never left out.
func collect(t reflect.Type, fields map[string]bool) {
	for f := range t.Fields() {
		if f.Anonymous {
			collect(f.Type, fields)
			continue
		}
		name, options, _ := strings.Cut(f.Tag.Get("json"), ",")
		fields[name] = options != "omitempty"
	}
}
