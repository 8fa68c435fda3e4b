package bench

import (
	"bufio"
	"bytes"
	"fmt"
	"io"
	"net"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"sync"
	"testing"
	"time"

	"golang.org/x/sys/unix"
)

// process is a program under measurement.
type process struct {
	cmd    *exec.Cmd
	in     io.Writer
	out    *bufio.Reader
	stderr bytes.Buffer // to be read after the end
	ended  chan struct{}
	end    func()
}

// launch starts a program; it is killed at the end of the benchmark at the latest.
func launch(b *testing.B, path string, args ...string) *process {
	b.Helper()
	p := &process{cmd: exec.Command(path, args...), ended: make(chan struct{})}
	p.cmd.Stderr = &p.stderr
	in, err := p.cmd.StdinPipe()
	if err != nil {
		b.Fatal(err)
	}
	out, err := p.cmd.StdoutPipe()
	if err != nil {
		b.Fatal(err)
	}
	p.in, p.out = in, bufio.NewReader(out)
	p.cmd.Env = append(os.Environ(), serviceEnvironment...)
	if err := p.cmd.Start(); err != nil {
		b.Fatal(err)
	}
	p.end = sync.OnceFunc(func() {
		_ = p.cmd.Process.Kill() // it may have ended
		_ = p.cmd.Wait()         // by our signal
		close(p.ended)
	})
	b.Cleanup(p.end)
	return p
}

// serviceEnvironment is what deploy/systemd/heatreeve.service sets.
var serviceEnvironment = []string{"GOMEMLIMIT=128MiB"}

// stop ends the process as a service manager does, and waits for it.
func (p *process) stop(b *testing.B) {
	b.Helper()
	if err := p.cmd.Process.Signal(unix.SIGTERM); err != nil {
		b.Fatal(err)
	}
	if err := p.cmd.Wait(); err != nil {
		b.Fatalf("%s: %v\n%s", p.cmd.Path, err, &p.stderr)
	}
	p.end()
}

// cpu is what the process has used of the processor, in user mode and in the kernel.
func (p *process) cpu(b *testing.B) time.Duration {
	b.Helper()
	var t unix.Timespec
	// The clock of a process: ^pid << 3 | 2, clock_getcpuclockid(3).
	if err := unix.ClockGettime(int32(^p.cmd.Process.Pid<<3|2), &t); err != nil {
		b.Fatal(err)
	}
	return time.Duration(t.Nano())
}

// memory is what of the process is resident, in bytes: all of it, and what no file
// stands behind.
func (p *process) memory(b *testing.B) (all, anonymous float64) {
	b.Helper()
	status, err := os.ReadFile(fmt.Sprintf("/proc/%d/status", p.cmd.Process.Pid))
	if err != nil {
		b.Fatal(err)
	}
	for line := range strings.Lines(string(status)) {
		name, value, _ := strings.Cut(line, ":")
		kB, _ := strconv.ParseFloat(strings.TrimSuffix(strings.TrimSpace(value), " kB"), 64)
		switch name {
		case "VmRSS":
			all = kB * 1024
		case "RssAnon":
			anonymous = kB * 1024
		}
	}
	if all == 0 || anonymous == 0 {
		b.Fatalf("no resident memory in\n%s", status)
	}
	return all, anonymous
}

// line is the next line of what the process writes.
func (p *process) line(b *testing.B) string {
	b.Helper()
	s, err := p.out.ReadString('\n')
	if err != nil {
		p.end()
		b.Fatalf("%s: %v\n%s", p.cmd.Path, err, &p.stderr)
	}
	return strings.TrimSpace(s)
}

// programs builds the agent, as it is shipped, and the bare subscriber.
var programs = sync.OnceValues(func() (dir string, err error) {
	dir = filepath.Join(workFolder, "programs")
	for _, build := range []struct{ from, what string }{{"../..", "./agent/cmd/heatreeve"}, {".", "./bare"}} {
		c := exec.Command("go", "build", "-trimpath", "-ldflags", "-s -w", "-o", dir+"/", build.what)
		c.Dir, c.Env = build.from, append(os.Environ(), "CGO_ENABLED=0")
		if out, err := c.CombinedOutput(); err != nil {
			return "", fmt.Errorf("%s: %w\n%s", c, err, out)
		}
	}
	return dir, nil
})

func program(b *testing.B, name string) string {
	b.Helper()
	dir, err := programs()
	if err != nil {
		b.Fatal(err)
	}
	return filepath.Join(dir, name)
}

// workFolder is for what all benchmarks share.
var workFolder string

func TestMain(m *testing.M) { os.Exit(inWorkFolder(m)) }

func inWorkFolder(m *testing.M) int {
	dir, err := os.MkdirTemp("", "heatreeve-bench-")
	if err != nil {
		fmt.Fprintln(os.Stderr, "error:", err)
		return 1
	}
	defer os.RemoveAll(dir)
	workFolder = dir
	return m.Run()
}

// freeAddress is one that nobody listens on.
func freeAddress(b *testing.B) string {
	b.Helper()
	l, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		b.Fatal(err)
	}
	defer l.Close()
	return l.Addr().String()
}

// eventually waits until something holds, a minute at most.
func eventually(b *testing.B, what string, holds func() bool) {
	b.Helper()
	tick := time.NewTicker(5 * time.Millisecond)
	defer tick.Stop()
	for deadline := time.Now().Add(time.Minute); !holds(); <-tick.C {
		if time.Now().After(deadline) {
			b.Fatalf("waited a minute in vain: %s", what)
		}
	}
}
