//go:build services

package deploy

import (
	"bytes"
	"debug/buildinfo"
	"debug/elf"
	"os"
	"os/exec"
	"path/filepath"
	"runtime"
	"strings"
	"sync"
	"testing"
)

// target is a machine that a binary is built for.
type target struct {
	name    string // as deploy/build calls it
	env     string // where deploy/test says that the binary is already built
	class   elf.Class
	machine elf.Machine
	goarch  string
}

var targets = []target{
	{"amd64", "HEATREEVE_BIN_AMD64", elf.ELFCLASS64, elf.EM_X86_64, "amd64"},
	{"arm64", "HEATREEVE_BIN_ARM64", elf.ELFCLASS64, elf.EM_AARCH64, "arm64"},
	{"armv7", "HEATREEVE_BIN_ARM", elf.ELFCLASS32, elf.EM_ARM, "arm"},
}

// sizeBound is what a gateway's small flash can spare.
const sizeBound = 20 << 20

// builds holds the binaries made here for a run without deploy/test; TestMain removes them.
var builds struct {
	sync.Mutex
	dir string
}

func TestMain(m *testing.M) {
	code := m.Run()
	if builds.dir != "" {
		_ = os.RemoveAll(builds.dir)
	}
	os.Exit(code)
}

// binary is the path of the binary for a target, built unless deploy/test has done so.
func binary(t *testing.T, to target) string {
	t.Helper()
	if path := os.Getenv(to.env); path != "" {
		return path
	}
	builds.Lock()
	defer builds.Unlock()
	if builds.dir == "" {
		dir, err := os.MkdirTemp("", "heatreeve")
		if err != nil {
			t.Fatal(err)
		}
		builds.dir = dir
	}
	path := filepath.Join(builds.dir, "heatreeve-linux-"+to.name)
	if _, err := os.Stat(path); err == nil {
		return path
	}
	if out, err := exec.CommandContext(t.Context(), "./build", builds.dir, to.name).CombinedOutput(); err != nil {
		t.Fatalf("deploy/build: %v\n%s", err, out)
	}
	return path
}

// native is the binary for the machine that runs the tests.
func native(t *testing.T) string {
	t.Helper()
	for _, to := range targets {
		if to.goarch == runtime.GOARCH {
			return binary(t, to)
		}
	}
	t.Fatalf("no binary is built for %s", runtime.GOARCH)
	return ""
}

func TestBinariesAreStaticAndSmall(t *testing.T) {
	top, err := filepath.Abs("..")
	if err != nil {
		t.Fatal(err)
	}
	for _, to := range targets {
		t.Run(to.name, func(t *testing.T) {
			path := binary(t, to)
			checkELF(t, path, to)
			checkSettings(t, path, to)
			data, err := os.ReadFile(path)
			if err != nil {
				t.Fatal(err)
			}
			t.Logf("%d bytes", len(data))
			if len(data) > sizeBound {
				t.Errorf("%d bytes; want at most %d", len(data), sizeBound)
			}
			if bytes.Contains(data, []byte(top+"/")) {
				t.Errorf("the path of the sources, %s, stands in the binary", top)
			}
		})
	}
}

// checkELF wants the right machine, no dynamic loader, no libraries and no symbol table.
func checkELF(t *testing.T, path string, to target) {
	t.Helper()
	f, err := elf.Open(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	if f.Class != to.class || f.Machine != to.machine {
		t.Errorf("built for %v %v; want %v %v", f.Class, f.Machine, to.class, to.machine)
	}
	for _, p := range f.Progs {
		if p.Type == elf.PT_INTERP || p.Type == elf.PT_DYNAMIC {
			t.Errorf("not static: it has a segment %v", p.Type)
		}
	}
	if f.Section(".symtab") != nil {
		t.Error("not stripped: it has a symbol table")
	}
}

func checkSettings(t *testing.T, path string, to target) {
	t.Helper()
	info, err := buildinfo.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	got := map[string]string{}
	for _, s := range info.Settings {
		got[s.Key] = s.Value
	}
	want := map[string]string{"CGO_ENABLED": "0", "GOOS": "linux", "GOARCH": to.goarch, "-trimpath": "true"}
	if to.goarch == "arm" {
		want["GOARM"] = "7"
	}
	wantSettings(t, got, want)
}

// TestARMBinaryRuns runs the arm/v7 binary under qemu: it checks every example site, and runs the demo to its end.
func TestARMBinaryRuns(t *testing.T) {
	path := binary(t, targets[2])
	must(t, "qemu-arm-static", path, "version")
	sites, err := filepath.Glob("../configs/*.yaml")
	if err != nil || len(sites) == 0 {
		t.Fatalf("no example sites: %v", err)
	}
	for _, site := range sites {
		must(t, "qemu-arm-static", path, "check", site)
	}
	address := "127.0.0.1:" + freePort(t)
	out := must(t, "qemu-arm-static", path, "demo", "--for", "10s", "--listen", address, "--data", t.TempDir())
	if !strings.Contains(out, address) {
		t.Errorf("the demo does not say where to look, %s:\n%s", address, out)
	}
}
