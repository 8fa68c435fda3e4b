package main

import (
	"context"
	"fmt"
	"io"
	"log/slog"
	"net"
	"os"
	"slices"
	"sync"
	"time"

	"golang.org/x/sync/errgroup"
	"golang.org/x/term"

	"heatreeve/agent"
	"heatreeve/agent/demo"
	"heatreeve/agent/view"
)

func runDemo(ctx context.Context, c *call) error {
	data := c.flags.String("data", "", "`DIR` that keeps the history; without it, the history is thrown away at the end")
	looking := c.lookingOptions()
	length := c.flags.Duration("for", 0, "end by itself after `DURATION`, such as 10s or 5m")
	speed := c.flags.Float64("speed", 1, fmt.Sprintf("run the plant `N` times faster, 1 to %d", demo.MaxSpeed))
	if err := c.parse(0, ""); err != nil {
		return err
	}
	if !(*speed >= 1 && *speed <= demo.MaxSpeed) {
		return wrongf("heatreeve demo: --speed %g: allowed are 1 to %d", *speed, demo.MaxSpeed)
	}
	if *length < 0 {
		return wrongf("heatreeve demo: --for %s is not a length of time", *length)
	}
	o, err := looking.options(c.name)
	if err != nil {
		return err
	}
	if *length > 0 {
		var cancel context.CancelFunc
		ctx, cancel = context.WithTimeout(ctx, *length)
		defer cancel()
	}
	if *data == "" {
		dir, err := os.MkdirTemp("", "heatreeve-demo-")
		if err != nil {
			return err
		}
		defer os.RemoveAll(dir)
		*data = dir
	}
	o.Data = *data
	return c.demo(ctx, o, *speed)
}

// demo runs plant, broker and agent until ctx ends.
func (c *call) demo(ctx context.Context, o agent.Options, speed float64) error {
	before, err := agent.EventTime(o.Data)
	if err != nil {
		return err
	}
	log := c.demoLog()
	d, err := demo.Start(demo.Options{Speed: speed, After: before, Log: log})
	if err != nil {
		return err
	}
	defer d.Close()
	display := c.display(d)
	seen := false // a first figure; before it there is nothing to show
	subscribed := make(chan struct{})
	heard := sync.OnceFunc(func() { close(subscribed) })
	o.Version, o.Log, o.Now = version, log, d.Clock.Now
	o.Beat = func(s *view.Snapshot) {
		if s.Broker.Topics > 0 {
			heard()
		}
		if seen = seen || anyMeasured(s); seen {
			display.Show(s)
		}
	}
	var a *agent.Agent
	o.Ready = func(at net.Addr) { c.whereToLook(d, a.URL(at)) }
	a, err = agent.New(d.Site, o)
	if err != nil {
		return err
	}
	g, ctx := errgroup.WithContext(ctx)
	g.Go(func() error { return a.Run(ctx) })
	g.Go(func() error { return speak(ctx, d, subscribed) })
	return g.Wait()
}

func anyMeasured(s *view.Snapshot) bool {
	return slices.ContainsFunc(s.Loads, func(l view.Load) bool { return l.Figure.Measured() })
}

// speak lets the plant publish once somebody listens.
func speak(ctx context.Context, d *demo.Demo, subscribed <-chan struct{}) error {
	select {
	case <-subscribed:
		return d.Run(ctx)
	case <-ctx.Done():
		return nil
	}
}

func (c *call) whereToLook(d *demo.Demo, at string) {
	fmt.Fprintf(c.stdout, "%s, an invented plant, with a broker of its own at\n%s\n\n", d.Site.Name, d.Broker.URL())
	fmt.Fprintf(c.stdout, "page:    %s/\nmetrics: %s/metrics\nhealth:  %s/readyz\n\n%s\n\n", at, at, at, agent.Safety)
}

// display is the table of the loads: drawn over in a terminal, and from time to
// time elsewhere.
func (c *call) display(d *demo.Demo) *demo.Display {
	o := demo.DisplayOptions{Table: demo.TableOptions{Zone: d.Site.Zone, Notice: agent.Safety}, Every: 10 * time.Second}
	if fd, ok := terminal(c.stdout); ok {
		o.Terminal, o.Every, o.Table.Colour = true, 0, os.Getenv("NO_COLOR") == ""
		o.Width = func() int {
			width, _, err := term.GetSize(fd)
			if err != nil {
				return 80
			}
			return width
		}
	}
	return demo.NewDisplay(c.stdout, o)
}

// demoLog is silent in a terminal, where it would run through the table.
func (c *call) demoLog() *slog.Logger {
	if _, ok := terminal(c.stderr); ok {
		return slog.New(slog.DiscardHandler)
	}
	return slog.New(slog.NewTextHandler(c.stderr, nil))
}

func terminal(w io.Writer) (fd int, ok bool) {
	f, ok := w.(*os.File)
	if !ok {
		return 0, false
	}
	return int(f.Fd()), term.IsTerminal(int(f.Fd()))
}
