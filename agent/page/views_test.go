package page

import (
	"bytes"
	"os"
	"os/exec"
	"path/filepath"
	"testing"
)

// The views that are compiled in are those that stand in *.qtpl.
func TestViewsAreCompiled(t *testing.T) {
	views, err := filepath.Glob("*.qtpl")
	if err != nil || len(views) == 0 {
		t.Fatalf("%d views, %v", len(views), err)
	}
	dir := filepath.Join(t.TempDir(), "page") // the name of the package is that of the folder
	if err := os.Mkdir(dir, 0o700); err != nil {
		t.Fatal(err)
	}
	for _, name := range views {
		text, err := os.ReadFile(name)
		if err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(filepath.Join(dir, name), text, 0o600); err != nil {
			t.Fatal(err)
		}
	}
	if out, err := exec.Command("go", "tool", "qtc", "-skipLineComments", "-dir", dir).CombinedOutput(); err != nil {
		t.Fatalf("qtc: %v\n%s", err, out)
	}
	compiled, err := filepath.Glob("*.qtpl.go")
	if err != nil || len(compiled) != len(views) {
		t.Errorf("%d views and %d compiled, %v", len(views), len(compiled), err)
	}
	for _, name := range compiled {
		got, err := os.ReadFile(name)
		if err != nil {
			t.Fatal(err)
		}
		want, err := os.ReadFile(filepath.Join(dir, name))
		if err != nil || !bytes.Equal(got, want) {
			t.Errorf("%s is not what its view says (%v): go generate ./agent/page", name, err)
		}
	}
}
