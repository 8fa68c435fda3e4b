//go:build services

package main

import (
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
)

// axe has npm fetch axe-core 4.14.1, which judges a page by rules that are mostly those of
// WCAG 2.2, and returns its script.
func axe(t *testing.T) string {
	t.Helper()
	dir := t.TempDir()
	install := exec.Command("npm", "install", "--prefix", dir, "--no-audit", "--no-fund", "--ignore-scripts", "axe-core@4.14.1")
	if out, err := install.CombinedOutput(); err != nil {
		t.Fatalf("npm (Debian's packages npm and nodejs) cannot install axe-core: %v\n%s", err, out)
	}
	script, err := os.ReadFile(filepath.Join(dir, "node_modules", "axe-core", "axe.min.js"))
	if err != nil {
		t.Fatal(err)
	}
	return string(script)
}

// violation is a rule that a page breaks, and where.
type violation struct {
	ID, Impact, Help string
	Nodes            []struct {
		Target         []any
		FailureSummary string
	}
}

func (f *violation) String() string {
	var b strings.Builder
	fmt.Fprintf(&b, "%s (%s): %s", f.ID, f.Impact, f.Help)
	for _, n := range f.Nodes {
		fmt.Fprintf(&b, "\n\t%v: %s", n.Target, strings.Join(strings.Fields(n.FailureSummary), " "))
	}
	return b.String()
}

// judged is what axe-core makes of a page: what it finds wrong, and how many rules it has held
// the page to that were kept.
type judged struct {
	Violations []violation
	Kept       int
}

func (x *tab) judge(axe string) judged {
	x.Helper()
	eval[bool](x, axe+"; true")
	return eval[judged](x, `axe.run(document, {resultTypes: ["violations"]}).then(r => ({Violations: r.violations, Kept: r.passes.length}))`)
}

// accessible holds the page to axe-core: nothing serious or critical, and enough rules that
// apply for this to say something.
func (x *tab) accessible(axe, what string) {
	x.Helper()
	j := x.judge(axe)
	for _, f := range j.Violations {
		if f.Impact == "serious" || f.Impact == "critical" {
			x.Errorf("%s: axe-core finds %v", what, &f)
		} else {
			x.Logf("%s: axe-core remarks %v", what, &f)
		}
	}
	if j.Kept < 15 {
		x.Errorf("%s: only %d rules of axe-core apply", what, j.Kept)
	}
}
