package agent

import (
	"encoding/json"
	"errors"
	"io"
	"os/exec"
	"strings"
	"testing"
)

// arrows says which of the project's packages each may import; a name ending in
// /... stands for everything below as well, and a longer name goes before it. Tests may
// import more.
//
// A family of fluids knows the contract, and of the others at most those that it is
// made of; named alone knows them all.
var arrows = map[string][]string{
	"thermo":           {},
	"thermo/...":       {"thermo", "thermo/unit/near", "thermo/roster", "thermo/water", "thermo/table", "thermo/gas/helmholtz"},
	"thermo/named":     {"thermo/..."},
	"thermo/unit":      {"thermo", "thermo/unit/near"},
	"thermo/table":     {"thermo"},
	"thermo/water":     {"thermo"},
	"store":            {},
	"ingest":           {"ingest/...", "thermo/unit"},
	"ingest/...":       {"ingest/quality"},
	"ingest/authority": {},
	"configs":          {},
	"agent/loads":      {"thermo", "ingest/quality", "ingest/screen"},
	"agent/design":     {"agent/design/...", "thermo"},
	"agent/design/...": {},
	"agent/site":       {"thermo/...", "agent/design/exchanger", "agent/shown"},
	"agent/warn":       {"agent/design"},
	"agent/view":       {"agent/warn", "agent/loads", "agent/design", "agent/design/...", "ingest/quality"},
	"agent/account": {
		"agent/loads",
	},
	"agent/access": {},
	"agent/doors":  {"agent/access", "agent/answer", "agent/metrics"},
	"agent/figure": {},
	"agent/answer": {"agent/account", "agent/loads", "agent/warn"},
	"agent/shown":  {"thermo/unit"},
	"agent/page": {
		"agent/account", "agent/answer", "agent/shown", "agent/view", "agent/warn", "agent/working", "agent/loads", "agent/design", "agent/design/exchanger", "agent/site", "thermo", "thermo/unit", "ingest/quality",
	},
	"agent/learning": {"agent/design/expect", "agent/site", "thermo/unit"},
	"agent/parquet":  {},
	"agent/proving": {
		"agent/site", "agent/loads", "ingest/quality", "thermo/unit",
	},
	"agent/working": {"agent/figure", "agent/loads", "agent/design", "agent/design/...", "agent/site", "ingest/quality", "thermo", "thermo/unit"},
	"agent/survey": {
		"agent/site", "ingest", "ingest/quality", "ingest/sparkplug", "thermo/unit",
	},
	"agent/metrics": {
		"agent/figure", "agent/view", "agent/warn", "agent/loads", "agent/design", "ingest/quality",
	},
	"agent/relay": {"agent/view", "agent/warn", "agent/loads", "ingest/quality"},
	"agent/demo": {
		"agent/view", "agent/warn", "agent/site", "agent/loads", "agent/design", "configs", "thermo/...",
	},
	"agent":               {"agent/doors", "agent/answer", "agent/page", "agent/survey", "agent/proving", "agent/account", "agent/learning", "agent/site", "agent/view", "agent/metrics", "agent/relay", "agent/warn", "agent/loads", "agent/design", "agent/design/...", "agent/parquet", "agent/working", "ingest", "ingest/...", "store", "thermo", "thermo/unit", "thermo/water", "thermo/unit/near"},
	"agent/cmd/heatreeve": {"agent", "agent/answer", "agent/warn", "agent/working", "agent/survey", "agent/proving", "agent/site", "agent/view", "agent/demo", "agent/loads", "thermo", "thermo/named", "thermo/unit", "thermo/unit/near"},
	"deploy":              {},
}

// outside lists the pure packages and what they must not touch: clocks, files,
// sockets, loggers.
var outside = map[string][]string{
	"thermo/...":       {"os", "net", "log", "log/slog", "context", "time", "database/sql", "net/http"},
	"ingest/quality":   {"os", "net", "log", "log/slog", "context", "time", "net/http"},
	"ingest/signal":    {"os", "net", "log", "log/slog", "context", "time", "net/http"},
	"ingest/screen":    {"os", "net", "log", "log/slog", "context", "time", "net/http"},
	"ingest/sparkplug": {"os", "net", "log", "log/slog", "context", "net/http"},
	"agent/loads":      {"os", "net", "log", "log/slog", "context", "time", "net/http"},
	"agent/design":     {"os", "net", "log", "log/slog", "context", "net/http"},
	"agent/design/...": {"os", "net", "log", "log/slog", "context", "net/http"},
	"agent/warn":       {"os", "net", "log", "log/slog", "context", "net/http"},
	"agent/working":    {"os", "net", "log", "log/slog", "context", "net/http"},
	"agent/relay":      {"os", "net", "log", "log/slog", "context", "net/http"},
	"agent/parquet":    {"os", "net", "log", "log/slog", "context", "time", "net/http"},
	"agent/account": {
		"os", "net", "log", "log/slog", "context", "net/http",
	},
}

func matches(pattern, path string) bool {
	root, below := strings.CutSuffix(pattern, "/...")
	return path == root || below && strings.HasPrefix(path, root+"/")
}

// find returns the rule of that very name, else that of the longest one that matches.
func find[T any](rules map[string]T, path string) (rule T, ok bool) {
	if rule, ok = rules[path]; ok {
		return rule, true
	}
	longest := 0
	for pattern, r := range rules {
		if matches(pattern, path) && len(pattern) > longest {
			longest, rule, ok = len(pattern), r, true
		}
	}
	return rule, ok
}

func TestArrowsPointOneWay(t *testing.T) {
	out, err := exec.Command("go", "list", "-json=ImportPath,Imports", "heatreeve/...").Output()
	if err != nil {
		t.Fatalf("go list: %v", err)
	}
	packages := 0
	for d := json.NewDecoder(strings.NewReader(string(out))); ; packages++ {
		var p struct {
			ImportPath string
			Imports    []string
		}
		if err := d.Decode(&p); errors.Is(err, io.EOF) {
			break
		} else if err != nil {
			t.Fatal(err)
		}
		path := strings.TrimPrefix(p.ImportPath, "heatreeve/")
		allowed, known := find(arrows, path)
		if !known {
			t.Errorf("package %s is in no rule: say in arrows whom it may import", path)
		}
		banned, _ := find(outside, path)
		for _, imported := range p.Imports {
			checkArrow(t, path, imported, allowed, banned)
		}
	}
	if packages < len(arrows) {
		t.Errorf("go list shows %d packages, fewer than the %d rules", packages, len(arrows))
	}
}

func checkArrow(t *testing.T, path, imported string, allowed, banned []string) {
	t.Helper()
	for _, b := range banned {
		if imported == b {
			t.Errorf("%s imports %s, but is pure: pass in what it needs", path, b)
		}
	}
	own, ours := strings.CutPrefix(imported, "heatreeve/")
	if !ours {
		if strings.HasPrefix(path, "thermo") && strings.Contains(imported, ".") {
			t.Errorf("%s imports %s, but thermo needs the standard library only", path, imported)
		}
		return
	}
	for _, a := range allowed {
		if matches(a, own) {
			return
		}
	}
	t.Errorf("%s imports %s; it may import only %v", path, own, allowed)
}
