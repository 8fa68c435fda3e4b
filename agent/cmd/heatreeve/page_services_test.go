//go:build services

package main

import (
	"context"
	"fmt"
	"os"
	"path/filepath"
	"testing"
)

// TestPage looks at the page through Debian's Chromium as its readers do. All its parts share
// one browser; those that do not wait for the clock of a plant share one demo.
func TestPage(t *testing.T) {
	b := startBrowser(t)
	axe := axe(t)
	t.Run("harness", func(t *testing.T) { b.sees(t, axe) })
	if *pictures != "" {
		t.Run("pictures", func(t *testing.T) { b.portraits(t, *pictures) })
	}
	binary(t)
	t.Run("all", func(t *testing.T) {
		t.Run("live", func(t *testing.T) { t.Parallel(); b.live(t) })
		t.Run("hostile", func(t *testing.T) { t.Parallel(); b.hostile(t) })
		t.Run("demo", func(t *testing.T) { t.Parallel(); b.onDemo(t, axe) })
	})
}

func (b *browser) onDemo(t *testing.T, axe string) {
	a := startDemo(t, "60")
	t.Run("figures", func(t *testing.T) { b.figures(t, a) })
	t.Run("light", func(t *testing.T) { b.light(t, a) })
	t.Run("readout", func(t *testing.T) { b.readout(t, a) })
	t.Run("care", func(t *testing.T) { b.care(t, a, axe) })
	t.Run("keyboard", func(t *testing.T) { b.keyboard(t, a) })
	t.Run("without script", func(t *testing.T) { b.still(t, a) })
	t.Run("print", func(t *testing.T) { b.print(t, a) })
}

// startDemo runs the demo in this process and waits for its first figures.
func startDemo(t *testing.T, speed string, more ...string) *agentUnderTest {
	t.Helper()
	a := &agentUnderTest{address: fmt.Sprintf("127.0.0.1:%d", freePort(t))}
	ctx, cancel := context.WithCancel(context.Background())
	var said heard
	ended := make(chan int, 1)
	go func() {
		ended <- run(ctx, append([]string{"demo", "--listen", a.address, "--speed", speed}, more...), &said, &said)
	}()
	t.Cleanup(func() {
		cancel()
		if status := <-ended; status != exitGood || t.Failed() {
			t.Errorf("the demo ends with status %d:\n%s", status, said.String())
		}
	})
	eventually(t, "the demo measures", func() error {
		all, err := a.series()
		if err == nil && all[`heatreeve_load_duty_watts{load="hot-water"}`] == "" {
			err = os.ErrNotExist
		}
		return err
	})
	return a
}

// pages are one of each kind, of the demo.
var pages = map[string]string{
	"loads":   "/",
	"load":    "/loads/hot-water",
	"account": "/account",
}

// shots is the folder that screenshots go to.
func shots(t *testing.T) string {
	t.Helper()
	dir := os.Getenv("HEATREEVE_SCREENSHOTS")
	if dir == "" {
		return t.TempDir()
	}
	if err := os.MkdirAll(dir, 0o755); err != nil {
		t.Fatal(err)
	}
	return dir
}

func write(t *testing.T, dir, name string, content []byte) {
	t.Helper()
	if err := os.WriteFile(filepath.Join(dir, name), content, 0o644); err != nil {
		t.Fatal(err)
	}
}
