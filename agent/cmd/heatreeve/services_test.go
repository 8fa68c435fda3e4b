//go:build services

package main

import (
	"bufio"
	"bytes"
	"context"
	"fmt"
	"heatreeve/agent/answer"
	"io"
	"math"
	"net"
	"net/http"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"sync"
	"testing"
	"time"
)

// patience is how long a test waits for what ought to take a moment.
const patience = 60 * time.Second

var built struct {
	once sync.Once
	path string
	err  error
}

func TestMain(m *testing.M) {
	code := m.Run()
	if built.path != "" {
		os.RemoveAll(filepath.Dir(built.path))
	}
	os.Exit(code)
}

// binary returns the program, built once as it is shipped.
func binary(t *testing.T) string {
	t.Helper()
	built.once.Do(func() { built.path, built.err = build("", "") })
	if built.err != nil {
		t.Fatal(built.err)
	}
	return built.path
}

func build(arch, arm string) (string, error) {
	dir, err := os.MkdirTemp("", "heatreeve")
	if err != nil {
		return "", err
	}
	path := filepath.Join(dir, "heatreeve")
	cmd := exec.Command("go", "build", "-trimpath", "-ldflags", "-s -w", "-o", path, ".")
	cmd.Env = append(os.Environ(), "CGO_ENABLED=0")
	if arch != "" {
		cmd.Env = append(cmd.Env, "GOOS=linux", "GOARCH="+arch, "GOARM="+arm)
	}
	if out, err := cmd.CombinedOutput(); err != nil {
		return "", fmt.Errorf("%v: %w\n%s", cmd.Args, err, out)
	}
	return path, nil
}

// program returns the path of a Debian program; without it the test fails.
func program(t *testing.T, name, debianPackage string) string {
	t.Helper()
	for _, path := range []string{name, "/usr/sbin/" + name} {
		if found, err := exec.LookPath(path); err == nil {
			return found
		}
	}
	t.Fatalf("%s is not here; install Debian's package %s", name, debianPackage)
	return ""
}

func freePort(t *testing.T) int {
	t.Helper()
	l, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	defer l.Close()
	return l.Addr().(*net.TCPAddr).Port
}

// process is a running program whose output a failing test shows.
type process struct {
	cmd  *exec.Cmd
	out  lockedBuffer
	done chan struct{}
	err  error // of Wait, once done is closed
}

type lockedBuffer struct {
	mu  sync.Mutex
	buf bytes.Buffer
}

func (b *lockedBuffer) Write(p []byte) (int, error) {
	b.mu.Lock()
	defer b.mu.Unlock()
	return b.buf.Write(p)
}

func (b *lockedBuffer) String() string {
	b.mu.Lock()
	defer b.mu.Unlock()
	return b.buf.String()
}

func start(t *testing.T, path string, args ...string) *process {
	t.Helper()
	return startReading(t, nil, path, args...)
}

// startReading starts a program that reads from in; nil: from nothing.
func startReading(t *testing.T, in *os.File, path string, args ...string) *process {
	t.Helper()
	p := &process{cmd: exec.Command(path, args...), done: make(chan struct{})}
	if in != nil {
		p.cmd.Stdin = in
	}
	p.cmd.Stdout, p.cmd.Stderr = &p.out, &p.out
	if err := p.cmd.Start(); err != nil {
		t.Fatal(err)
	}
	go func() { p.err = p.cmd.Wait(); close(p.done) }()
	t.Cleanup(func() {
		p.cmd.Process.Kill()
		<-p.done
		if t.Failed() {
			t.Logf("%v said:\n%s", p.cmd.Args, p.out.String())
		}
	})
	return p
}

// end sends the signal and waits for the process.
func (p *process) end(t *testing.T, how os.Signal) {
	t.Helper()
	p.cmd.Process.Signal(how)
	select {
	case <-p.done:
	case <-time.After(patience):
		t.Fatalf("%v does not end", p.cmd.Args)
	}
}

// broker is Debian's mosquitto on a free loopback port, with its persistence in a
// folder of the test.
type broker struct {
	*process
	port int
	conf string
	path string
}

func startBroker(t *testing.T) *broker {
	t.Helper()
	return startBrokerWith(t, "max_inflight_messages 1000\nmax_queued_messages 65000\n")
}

// startBrokerWith starts mosquitto with further lines of configuration.
func startBrokerWith(t *testing.T, lines string) *broker {
	t.Helper()
	dir := t.TempDir()
	os.Chmod(dir, 0o777) // mosquitto gives up root and writes here as its own user
	b := &broker{port: freePort(t), conf: filepath.Join(dir, "mosquitto.conf"), path: program(t, "mosquitto", "mosquitto")}
	text := fmt.Sprintf("listener %d 127.0.0.1\nallow_anonymous true\npersistence true\npersistence_location %s/\nconnection_messages false\n%s", b.port, dir, lines)
	if err := os.WriteFile(b.conf, []byte(text), 0o644); err != nil {
		t.Fatal(err)
	}
	b.start(t)
	return b
}

func (b *broker) start(t *testing.T) {
	t.Helper()
	b.process = start(t, b.path, "-c", b.conf)
	eventually(t, "mosquitto listens", func() error {
		c, err := net.Dial("tcp", fmt.Sprintf("127.0.0.1:%d", b.port))
		if err == nil {
			c.Close()
		}
		return err
	})
}

// publish sends one message, count times, with mosquitto_pub.
func (b *broker) publish(t *testing.T, topic string, count int, how ...string) {
	t.Helper()
	args := append([]string{"-p", strconv.Itoa(b.port), "-q", "1", "-t", topic, "--repeat", strconv.Itoa(count)}, how...)
	if out, err := exec.Command(program(t, "mosquitto_pub", "mosquitto-clients"), args...).CombinedOutput(); err != nil {
		t.Fatalf("mosquitto_pub %q: %v\n%s", args, err, out)
	}
}

// lines is a mosquitto_pub that publishes each line written to it.
type lines struct {
	cmd *exec.Cmd
	in  io.WriteCloser
}

func (b *broker) lines(t *testing.T, topic string) *lines {
	t.Helper()
	cmd := exec.Command(program(t, "mosquitto_pub", "mosquitto-clients"), "-p", strconv.Itoa(b.port), "-q", "1", "-t", topic, "-l")
	in, err := cmd.StdinPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { in.Close(); cmd.Process.Kill() })
	return &lines{cmd, in}
}

func (l *lines) send(t *testing.T, format string, args ...any) {
	t.Helper()
	if _, err := fmt.Fprintf(l.in, format+"\n", args...); err != nil {
		t.Fatal(err)
	}
}

// close waits until the broker has taken every line.
func (l *lines) close(t *testing.T) {
	t.Helper()
	l.in.Close()
	if err := l.cmd.Wait(); err != nil {
		t.Fatal(err)
	}
}

// agentUnderTest is a running agent, its site and its data.
type agentUnderTest struct {
	*process
	site, data string
	address    string
	events     []answer.Event // of the last report
}

// site writes a site file for the broker; %PORT% stands for its port.
func (b *broker) site(t *testing.T, text string) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), "site.yaml")
	if err := os.WriteFile(path, []byte(strings.ReplaceAll(text, "%PORT%", strconv.Itoa(b.port))), 0o644); err != nil {
		t.Fatal(err)
	}
	return path
}

func startAgent(t *testing.T, site string) *agentUnderTest {
	t.Helper()
	a := &agentUnderTest{site: site, data: t.TempDir(), address: fmt.Sprintf("127.0.0.1:%d", freePort(t))}
	a.start(t)
	return a
}

func (a *agentUnderTest) start(t *testing.T) {
	t.Helper()
	a.process = start(t, binary(t), "run", "--site", a.site, "--data", a.data, "--listen", a.address)
	eventually(t, "agent is ready", func() error {
		_, err := a.get("/readyz")
		return err
	})
}

func (a *agentUnderTest) get(path string) (string, error) {
	ctx, cancel := context.WithTimeout(context.Background(), 5*time.Second)
	defer cancel()
	req, err := http.NewRequestWithContext(ctx, http.MethodGet, "http://"+a.address+path, nil)
	if err != nil {
		return "", err
	}
	resp, err := http.DefaultClient.Do(req)
	if err != nil {
		return "", err
	}
	defer resp.Body.Close()
	body, err := io.ReadAll(resp.Body)
	if err == nil && resp.StatusCode != http.StatusOK {
		err = fmt.Errorf("%s: %s: %s", path, resp.Status, bytes.TrimSpace(body))
	}
	return string(body), err
}

// series returns the sample lines of the metrics page by their series.
func (a *agentUnderTest) series() (map[string]string, error) {
	page, err := a.get("/metrics")
	if err != nil {
		return nil, err
	}
	all := make(map[string]string)
	for s := bufio.NewScanner(strings.NewReader(page)); s.Scan(); {
		if name, value, ok := strings.Cut(s.Text(), " "); ok && !strings.HasPrefix(name, "#") {
			// Label values of these tests hold no blanks.
			all[name] = value
		}
	}
	return all, nil
}

// value returns one sample; NaN where there is none.
func (a *agentUnderTest) value(t *testing.T, series string) float64 {
	t.Helper()
	all, err := a.series()
	if err != nil {
		t.Fatal(err)
	}
	v, err := strconv.ParseFloat(all[series], 64)
	if err != nil {
		return math.NaN()
	}
	return v
}

// eventually asks until f has no error.
func eventually(t *testing.T, what string, f func() error) {
	t.Helper()
	deadline := time.Now().Add(patience)
	ticker := time.NewTicker(20 * time.Millisecond)
	defer ticker.Stop()
	for {
		err := f()
		if err == nil {
			return
		}
		if time.Now().After(deadline) {
			t.Fatalf("%s: %v", what, err)
		}
		<-ticker.C
	}
}

// reaches waits until a series has at least the value.
func (a *agentUnderTest) reaches(t *testing.T, series string, least float64) {
	t.Helper()
	eventually(t, series, func() error {
		if v := a.value(t, series); !(v >= least) {
			return fmt.Errorf("is %v, want at least %v", v, least)
		}
		return nil
	})
}

// subscribed waits until messages on topic reach the agent: it sends what no tag
// can read until one is counted.
func (a *agentUnderTest) subscribed(t *testing.T, b *broker, topic, tag string) {
	t.Helper()
	eventually(t, "agent is subscribed", func() error {
		b.publish(t, topic, 1, "-m", "probe")
		all, err := a.series()
		if err != nil {
			return err
		}
		for _, reason := range []string{"not-a-number", "not-json"} {
			if v := all[`heatreeve_tag_refused_total{reason="`+reason+`",tag="`+tag+`"}`]; v != "" && v != "0" {
				return nil
			}
		}
		return fmt.Errorf("no probe has come through")
	})
}

func within(t *testing.T, what string, got, want, relative float64) {
	t.Helper()
	if !(math.Abs(got/want-1) <= relative) {
		t.Errorf("%s is %.10g, want %.10g within %g", what, got, want, relative)
		return
	}
	t.Logf("%s is %.10g, reference %.10g: off by %+.2g", what, got, want, got/want-1)
}
