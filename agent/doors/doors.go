package doors

import (
	"context"
	"errors"
	"fmt"
	"log/slog"
	"net"
	"net/http"
	"syscall"
	"time"

	"heatreeve/agent/access"
	"heatreeve/agent/metrics"

	"golang.org/x/sync/errgroup"
)

// Doors are where the agent listens: for everybody at the address it was given, and for its own
// command line at one that only the address file tells.
type Doors struct {
	public, private *places
	// Metrics count who comes.
	Metrics metrics.Doors
}

const (
	// mostPublic bounds the connections of everybody: a browser keeps up to six, and so many files
	// open leave the history and the brokers theirs.
	mostPublic = 256
	// mostPrivate bounds those of the command line.
	mostPrivate = 32
)

// Open opens both.
func Open(public string) (*Doors, error) {
	all, err := net.Listen("tcp", public)
	switch {
	case errors.Is(err, syscall.EADDRINUSE):
		return nil, fmt.Errorf("listen on %q: %w; stop what listens there, perhaps another agent, or give another --listen", public, err)
	case err != nil:
		return nil, fmt.Errorf("listen on %q: %w", public, err)
	}
	own, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		all.Close()
		return nil, fmt.Errorf("listen for the command line: %w", err)
	}
	m := metrics.NewDoors()
	return &Doors{
		public:  newPlaces(all, mostPublic, m.Open.WithLabelValues("public"), m.Waited.WithLabelValues("public")),
		private: newPlaces(own, mostPrivate, m.Open.WithLabelValues("private"), m.Waited.WithLabelValues("private")),
		Metrics: m,
	}, nil
}

// Public is where everybody may look.
func (d *Doors) Public() net.Addr { return d.public.Addr() }

// Private is where the command line asks.
func (d *Doors) Private() net.Addr { return d.private.Addr() }

// Close closes what is still open.
func (d *Doors) Close() {
	d.public.Close()
	d.private.Close()
}

// sparingEvery is the least time between two lines of the log about the same wrong of those who
// look.
const sparingEvery = 10 * time.Second

// Serve answers everybody with public, as far as the guard lets them, and the command line with
// private, until ctx ends.
func (d *Doors) Serve(ctx context.Context, g *Guard, public, private http.Handler, log *slog.Logger) error {
	spared := newSparing(log.Handler(), sparingEvery)
	both, ctx := errgroup.WithContext(ctx)
	both.Go(func() error { return g.serve(ctx, d.public, public, spared) })
	both.Go(func() error { return servePrivate(ctx, d.private, private, spared) })
	return both.Wait()
}

// serve answers everybody on l until ctx ends.
func (g *Guard) serve(ctx context.Context, l *places, h http.Handler, log slog.Handler) error {
	server := newServer(g.front(access.Door(g.file, g.terms, h, turnAway, slog.New(log))), log)
	return until(ctx, server, l, func() error {
		if !g.terms.TLS {
			return server.Serve(l)
		}
		server.TLSConfig = access.TLS(g.file)
		return server.ServeTLS(l, "", "")
	})
}

// servePrivate answers the command line on l until ctx ends.
func servePrivate(ctx context.Context, l *places, h http.Handler, log slog.Handler) error {
	server := newServer(h, log)
	return until(ctx, server, l, func() error { return server.Serve(l) })
}

// newServer bounds how long each step of a request may take; who has more to tell extends the
// time for writing.
func newServer(h http.Handler, log slog.Handler) *http.Server {
	return &http.Server{
		Handler: h, ReadHeaderTimeout: 5 * time.Second, ReadTimeout: 10 * time.Second,
		WriteTimeout: 20 * time.Second, IdleTimeout: time.Minute, MaxHeaderBytes: 16 << 10,
		HTTP2:    &http.HTTP2Config{MaxConcurrentStreams: 32, WriteByteTimeout: 20 * time.Second},
		ErrorLog: slog.NewLogLogger(log, slog.LevelWarn),
	}
}

// until has a server begin, and ends it with ctx; it then lets requests under way finish for a
// moment.
func until(ctx context.Context, server *http.Server, l *places, begin func() error) error {
	server.ConnState = l.state
	closed := make(chan struct{})
	stop := context.AfterFunc(ctx, func() {
		defer close(closed)
		grace, cancel := context.WithTimeout(context.WithoutCancel(ctx), time.Second)
		defer cancel()
		if server.Shutdown(grace) != nil {
			server.Close()
		}
	})
	err := begin()
	if !stop() {
		<-closed
	}
	if errors.Is(err, http.ErrServerClosed) {
		return nil
	}
	return fmt.Errorf("serve on %s: %w", l.Addr(), err)
}
