//go:build services

package deploy

import (
	"context"
	"fmt"
	"net"
	"os/exec"
	"strings"
	"syscall"
	"testing"
	"time"
)

// patience bounds every wait; on a good day none comes near it.
const patience = 150 * time.Second

func within(t *testing.T) context.Context {
	t.Helper()
	ctx, cancel := context.WithTimeout(t.Context(), patience)
	t.Cleanup(cancel)
	return ctx
}

// program finds an outside program, and fails the test without it.
func program(t *testing.T, name string) string {
	t.Helper()
	path, err := exec.LookPath(name)
	if err != nil {
		path, err = exec.LookPath("/usr/sbin/" + name)
	}
	if err != nil {
		t.Fatalf("%s is needed: %v; deploy/test installs it", name, err)
	}
	return path
}

// output runs a program to its end and returns all it said.
func output(t *testing.T, name string, args ...string) (string, error) {
	t.Helper()
	out, err := exec.CommandContext(within(t), program(t, name), args...).CombinedOutput()
	return string(out), err
}

// must is output of a program that has to succeed.
func must(t *testing.T, name string, args ...string) string {
	t.Helper()
	out, err := output(t, name, args...)
	if err != nil {
		t.Fatalf("%s %q: %v\n%s", name, args, err, out)
	}
	return out
}

// process is a program in the background; it is stopped at the end of the test, if not before.
type process struct {
	cmd  *exec.Cmd
	log  strings.Builder
	done chan struct{}
	err  error // how it ended; to be read after done
}

func start(t *testing.T, cmd *exec.Cmd) *process {
	t.Helper()
	p := &process{cmd: cmd, done: make(chan struct{})}
	cmd.Stdout, cmd.Stderr = &p.log, &p.log
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	go func() {
		p.err = cmd.Wait()
		close(p.done)
	}()
	t.Cleanup(func() {
		p.stop(t)
		if t.Failed() {
			t.Logf("%s said:\n%s", cmd.Path, p.log.String())
		}
	})
	return p
}

// stop asks the process to end and waits until it has.
func (p *process) stop(t *testing.T) {
	t.Helper()
	_ = p.cmd.Process.Signal(syscall.SIGTERM) // an error: it has ended already
	select {
	case <-p.done:
	case <-time.After(patience):
		_ = p.cmd.Process.Kill()
		<-p.done
		t.Errorf("%s did not stop when asked", p.cmd.Path)
	}
}

// eventually asks again and again until the answer is nil; it gives up when the process ends or patience does.
func (p *process) eventually(t *testing.T, ask func() error) {
	t.Helper()
	tick := time.NewTicker(50 * time.Millisecond)
	defer tick.Stop()
	end := time.After(patience)
	for {
		err := ask()
		if err == nil {
			return
		}
		select {
		case <-tick.C:
		case <-p.done:
			t.Fatalf("%s ended (%v) before: %v\n%s", p.cmd.Path, p.err, err, p.log.String())
		case <-end:
			t.Fatalf("waited %v: %v", patience, err)
		}
	}
}

// listening waits for a TCP port to answer.
func (p *process) listening(t *testing.T, address string) {
	t.Helper()
	p.eventually(t, func() error {
		c, err := net.Dial("tcp", address)
		if err != nil {
			return err
		}
		return c.Close()
	})
}

// freePort is a loopback port that nobody holds at this moment.
func freePort(t *testing.T) string {
	t.Helper()
	l, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	defer l.Close()
	return fmt.Sprint(l.Addr().(*net.TCPAddr).Port)
}

// moved puts other paths and ports into a file's text, and fails where one to be replaced does not occur.
func moved(t *testing.T, text string, pairs ...string) string {
	t.Helper()
	for i := 0; i < len(pairs); i += 2 {
		if !strings.Contains(text, pairs[i]) {
			t.Fatalf("no %q to replace in:\n%s", pairs[i], text)
		}
	}
	return strings.NewReplacer(pairs...).Replace(text)
}
