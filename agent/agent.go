// Package agent is the running program: it wires the session with the broker,
// the accounts, the history and the metrics together, and owns start and stop.
//
// Data takes one road: the session decodes, the beat takes what came, the
// accounts compute, the history commits, the session acknowledges, readers see
// a snapshot. One goroutine, the beat's, owns accounts and history; readers get
// an immutable snapshot through an atomic pointer.
package agent

import (
	"context"
	"errors"
	"fmt"
	"log/slog"
	"maps"
	"net"
	"os"
	"path/filepath"
	"sync/atomic"
	"time"

	"github.com/prometheus/client_golang/prometheus"
	"github.com/prometheus/client_golang/prometheus/collectors"
	"golang.org/x/sync/errgroup"

	"heatreeve/agent/doors"
	"heatreeve/agent/metrics"
	"heatreeve/agent/page"
	"heatreeve/agent/relay"
	"heatreeve/agent/site"
	"heatreeve/agent/view"
	"heatreeve/store"
)

// HistoryFile is the name of the history in the data folder.
const HistoryFile = "history.db"

// Options are what the agent needs besides its site.
type Options struct {
	Data    string // folder of the history; made when it is not there
	Listen  string // where everybody may look, "host:port"
	Version string
	Log     *slog.Logger
	// WebConfig is a file of the Prometheus exporters' format that says which certificates and
	// passwords who looks must have; "" for none.
	WebConfig string
	// Openly lets others than this machine look without either, by any name of it.
	Openly bool
	// Now is the clock that stamps arrivals and moves silent event time; nil is
	// the system's, which is not followed at once where it is set. A demo may run a
	// faster one. Waits and disk intervals keep to the system's clock.
	Now func() time.Time
	// Ready is told the address that is listened on once the agent serves; may
	// be nil.
	Ready func(net.Addr)
	// Beat is told of each snapshot, in the goroutine of the beat; may be nil.
	Beat func(*view.Snapshot)
}

// looking are those that tell who may look.
func (o *Options) looking() doors.Options {
	return doors.Options{Listen: o.Listen, WebConfig: o.WebConfig, Openly: o.Openly}
}

// CheckLooking says what is wrong with those of the options that tell who may look, before
// anything is started.
func CheckLooking(o Options) error {
	_, err := doors.NewGuard(o.looking())
	return err
}

// Agent is one plant's agent.
type Agent struct {
	site    *site.Site
	o       Options
	guard   *doors.Guard
	clock   *stepless // nil where Options give one
	intakes []*intake
	relay   *relay.Relay  // nil where the site publishes nothing; for the beat alone
	reached chan struct{} // one slot: a broker has sent all that it sends without an acknowledgement
	latest  atomic.Pointer[view.Snapshot]
	page    atomic.Pointer[page.Page] // nil before it is served
	health  health
	commits prometheus.Histogram
	watch   *watch // for the beat alone
	// questions are asked of the beat, which knows the newest figures.
	questions chan question
	orders    chan mark // for the beat to carry out
}

// New returns an agent for s that is not started yet.
func New(s *site.Site, o Options) (*Agent, error) {
	guard, err := doors.NewGuard(o.looking())
	if err != nil {
		return nil, err
	}
	var clock *stepless
	if o.Now == nil {
		clock = systemClock(o.Log)
		o.Now = clock.Now
	}
	reached := make(chan struct{}, 1)
	intakes, err := newIntakes(s, o, reached)
	if err != nil {
		return nil, err
	}
	a := &Agent{site: s, o: o, guard: guard, clock: clock, intakes: intakes, relay: newRelay(s), reached: reached, commits: metrics.CommitSeconds(), questions: make(chan question), orders: make(chan mark)}
	a.health.latest, a.health.now = &a.latest, o.Now
	a.watch = newWatch(o.Log, len(s.Loads))
	return a, nil
}

// URL is how a browser finds what listens at the address that Ready is told.
func (a *Agent) URL(at net.Addr) string { return a.guard.URL(at) }

// Run opens the history and the listener, connects, and works until ctx ends; it
// then commits, acknowledges, disconnects and closes, in this order. Being asked
// to stop is no error.
func (a *Agent) Run(ctx context.Context) (err error) {
	if err := os.MkdirAll(a.o.Data, 0o750); err != nil {
		return fmt.Errorf("data folder: %w", err)
	}
	db, err := openHistory(ctx, filepath.Join(a.o.Data, HistoryFile), store.Options{
		MaxAge: a.site.History.MaxAge, MaxBytes: a.site.History.MaxBytes, Log: a.o.Log,
	})
	switch {
	case errors.Is(err, context.Canceled):
		return nil // asked to stop before it began
	case err != nil:
		return err
	}
	defer func() { err = errors.Join(err, db.Close()) }()
	if err := forgetAddress(a.o.Data); err != nil {
		return err
	}
	books, err := openLedger(a.site, db, a.o, time.Now())
	if err != nil {
		return err
	}
	open, err := doors.Open(a.o.Listen)
	if err != nil {
		return err
	}
	defer open.Close()
	if err := a.guard.Admit(open, a.o.Log); err != nil {
		return err
	}
	reports := newReports(history{db: db, site: a.site.Name, zone: a.site.Zone, through: books.through.Load, current: names(a.site.Loads, func(l site.HeatLoad) string { return l.Name }), units: maps.Clone(books.accounts.units)})
	at := newAddress(open.Private())
	if err := leaveAddress(a.o.Data, at); err != nil {
		a.o.Log.Warn("the command line will not find the agent while it runs", "error", err)
	}
	defer func() { err = errors.Join(err, forgetAddress(a.o.Data)) }()
	return a.work(ctx, books, open, at, reports)
}

// work runs the parts. The session outlives the beat, so that the last
// acknowledgements still go out.
func (a *Agent) work(ctx context.Context, books *ledger, open *doors.Doors, at address, reports *reports) error {
	a.o.Log.Info("heatreeve serves", "site", a.site.Name, "version", a.o.Version, "address", open.Public().String(), "loads", len(a.site.Loads), "tags", len(a.site.Tags))
	if a.o.Ready != nil {
		a.o.Ready(open.Public())
	}
	sessionCtx, endSession := context.WithCancel(context.WithoutCancel(ctx))
	defer endSession()
	g, ctx := errgroup.WithContext(ctx)
	explains := newExplains(reports, a.site, a.questions)
	page := page.New(newDesk(&a.health, reports, explains), page.Options{Site: a.site, Version: a.o.Version, Safety: Safety, Ended: ctx.Done()})
	a.page.Store(page)
	through := books.through.Load()
	g.Go(func() error {
		a.awaitClock(sessionCtx, through)
		return a.connect(sessionCtx)
	})
	g.Go(func() error {
		defer endSession()
		return a.beats(ctx, books)
	})
	reg := a.registry()
	reg.MustRegister(open.Metrics)
	public := handler(page, metricsHandler(reg, a.collector(), a.o.Log), &a.health, reports, explains, a.o.Version)
	private := doors.Private(at.run, at.key, privately(public, a.orders))
	g.Go(func() error { return open.Serve(ctx, a.guard, public, private, a.o.Log) })
	return g.Wait()
}

// connect keeps the sessions with all brokers until ctx ends.
func (a *Agent) connect(ctx context.Context) error {
	var g errgroup.Group
	for _, f := range a.intakes {
		g.Go(func() error { return f.session.Run(ctx) })
	}
	return g.Wait()
}

func (a *Agent) collector() *metrics.Collector {
	return metrics.NewCollector(a.latest.Load, func() int64 { return a.o.Now().UnixNano() })
}

// registry has what the collector has not.
func (a *Agent) registry() *prometheus.Registry {
	reg := prometheus.NewRegistry()
	reg.MustRegister(
		metrics.BuildInfo(a.o.Version),
		a.commits,
		collectors.NewGoCollector(),
		collectors.NewProcessCollector(collectors.ProcessCollectorOpts{}),
	)
	return reg
}
