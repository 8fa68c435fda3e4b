//go:build services

package main

import (
	"context"
	"fmt"
	"net/url"
	"os"
	"slices"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/chromedp/cdproto/cdp"
	"github.com/chromedp/cdproto/emulation"
	"github.com/chromedp/cdproto/log"
	"github.com/chromedp/cdproto/network"
	"github.com/chromedp/cdproto/page"
	"github.com/chromedp/cdproto/runtime"
	"github.com/chromedp/chromedp"
)

// browser is Debian's Chromium without a window. It can reach the loopback alone.
type browser struct{ ctx context.Context }

func startBrowser(t *testing.T) *browser {
	t.Helper()
	options := append(slices.Clone(chromedp.DefaultExecAllocatorOptions[:]),
		chromedp.ExecPath(program(t, "chromium", "chromium")),
		chromedp.Flag("host-resolver-rules", "MAP * ~NOTFOUND , EXCLUDE 127.0.0.1"),
		chromedp.Flag("lang", "en-GB"))
	if os.Geteuid() == 0 {
		options = append(options, chromedp.NoSandbox) // which Chromium refuses to root
	}
	allocator, stop := chromedp.NewExecAllocator(context.Background(), options...)
	t.Cleanup(stop)
	ctx, _ := chromedp.NewContext(allocator)
	t.Cleanup(func() {
		if err := chromedp.Cancel(ctx); err != nil {
			t.Errorf("chromium does not end as it should: %v", err)
		}
	})
	if err := chromedp.Do(ctx); err != nil {
		t.Fatalf("chromium does not start: %v", err)
	}
	return &browser{ctx}
}

// tab is one page of the browser. Whatever it asks for that is not of its agent, and whatever
// its console has of errors and warnings, fails the test.
type tab struct {
	*testing.T
	ctx    context.Context
	origin string // of the agent, such as http://127.0.0.1:9617

	mu       sync.Mutex
	asked    []string // addresses
	seen     int      // of asked, those that faults has looked at
	said     []string // errors, warnings and dialogues
	received float64  // bytes over the wire
	lossy    bool     // the agent may be away: what the network says is no fault
}

// tab opens an empty tab for an agent's address, host:port.
func (b *browser) tab(t *testing.T, address string) *tab {
	t.Helper()
	x := &tab{T: t, origin: "http://" + address}
	ctx, cancel := chromedp.NewContext(b.ctx, chromedp.WithListener(x.hear), chromedp.WithNewBrowserContext())
	x.ctx = ctx
	t.Cleanup(func() {
		x.blameless()
		cancel()
	})
	devtools(x, network.Enable, network.EnableParams{})
	devtools(x, log.Enable, cdp.Empty{})
	return x
}

// hear takes note of what a page asks for and says.
func (x *tab) hear(event any) {
	x.mu.Lock()
	defer x.mu.Unlock()
	switch e := event.(type) {
	case *network.EventRequestWillBeSent:
		x.asked = append(x.asked, e.Request.URL)
	case *network.EventLoadingFinished:
		x.received += e.EncodedDataLength
	case *runtime.EventExceptionThrown:
		x.said = append(x.said, "exception: "+e.ExceptionDetails.Text)
	case *runtime.EventConsoleAPICalled:
		if e.Type == runtime.ConsoleAPICalledTypeError || e.Type == runtime.ConsoleAPICalledTypeWarning || e.Type == runtime.ConsoleAPICalledTypeAssert {
			x.said = append(x.said, fmt.Sprintf("console: %s%s", e.Type, spelt(e.Args)))
		}
	case *log.EventEntryAdded:
		if l := e.Entry; l.Level != log.EntryLevelInfo && l.Level != log.EntryLevelVerbose && !(x.lossy && l.Source == log.EntrySourceNetwork) {
			x.said = append(x.said, fmt.Sprintf("%s: %s: %s %s", l.Source, l.Level, l.Text, l.URL))
		}
	case *page.EventJavascriptDialogOpening:
		x.said = append(x.said, "dialogue: "+e.Message)
	}
}

// spelt is what a page has told its console.
func spelt(args []*runtime.RemoteObject) (text string) {
	for _, a := range args {
		text += fmt.Sprintf(" %s%s", a.Description, a.Value)
	}
	return text
}

// blameless fails the test for what the page has asked for and said so far.
func (x *tab) blameless() {
	x.Helper()
	for _, s := range x.faults() {
		x.Error(s)
	}
}

// faults are what the page has asked for and said that it must not, since the last look.
func (x *tab) faults() []string {
	x.mu.Lock()
	defer x.mu.Unlock()
	all := x.said
	for _, s := range x.asked[x.seen:] {
		u, err := url.Parse(s)
		if err != nil || u.Scheme != "data" && u.Scheme != "blob" && u.Scheme+"://"+u.Host != x.origin {
			all = append(all, "asks beyond the agent: "+s)
		}
	}
	x.said, x.seen = nil, len(x.asked)
	return all
}

// requests are the paths asked for since the tab was opened, and the bytes that came.
func (x *tab) requests() (paths []string, bytes float64) {
	x.mu.Lock()
	defer x.mu.Unlock()
	for _, s := range x.asked {
		paths = append(paths, strings.TrimPrefix(s, x.origin))
	}
	return paths, x.received
}

// do runs actions, each within patience.
func (x *tab) do(steps ...chromedp.Action[chromedp.Void]) {
	x.Helper()
	ctx, cancel := context.WithTimeout(x.ctx, patience)
	defer cancel()
	if err := chromedp.Do(ctx, steps...); err != nil {
		x.Fatal(err)
	}
}

// open loads a path of the agent.
func (x *tab) open(path string) {
	x.Helper()
	x.do(chromedp.Navigate(x.origin + path))
}

// devtools sends a command of the DevTools protocol.
func devtools[P, R any](x *tab, c cdp.Command[P, R], parameters P) R {
	x.Helper()
	if err := chromedp.Do(x.ctx); err != nil { // opens the tab, which lives as long as this context
		x.Fatal(err)
	}
	ctx, cancel := context.WithTimeout(x.ctx, patience)
	defer cancel()
	r, err := chromedp.Call(ctx, c, parameters)
	if err != nil {
		x.Fatalf("%s: %v", c.Method, err)
	}
	return r
}

// eval is the value of a JavaScript expression, once its promise is kept.
func eval[T any](x *tab, expression string) T {
	x.Helper()
	v, err := evaluated[T](x, expression)
	if err != nil {
		x.Fatalf("%.200s: %v", expression, err)
	}
	return v
}

func evaluated[T any](x *tab, expression string) (T, error) {
	ctx, cancel := context.WithTimeout(x.ctx, patience)
	defer cancel()
	return chromedp.Run(ctx, chromedp.Evaluate[T](expression, chromedp.EvalAwaitPromise))
}

// until waits for a JavaScript expression to be true. A page that is just being loaded anew is
// asked again.
func (x *tab) until(what, expression string) {
	x.Helper()
	eventually(x.T, what, func() error {
		if so, err := evaluated[bool](x, "Boolean("+expression+")"); err != nil {
			return err
		} else if !so {
			return fmt.Errorf("not so at %s: %s", time.Now().Format("15:04:05.0"), expression)
		}
		return nil
	})
}

// scheme is "light" or "dark".
func (x *tab) scheme(name string) {
	x.Helper()
	devtools(x, emulation.SetEmulatedMedia, emulation.SetEmulatedMediaParams{Features: []*emulation.MediaFeature{
		{Name: "prefers-color-scheme", Value: name}, {Name: "prefers-reduced-motion", Value: "reduce"},
	}})
}

// size is that of the window, in pixels.
func (x *tab) size(width, height int64) {
	x.Helper()
	devtools(x, emulation.SetDeviceMetricsOverride, emulation.SetDeviceMetricsOverrideParams{Width: width, Height: height, DeviceScaleFactor: 1})
}
