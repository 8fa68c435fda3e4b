package doors

import (
	"crypto/tls"
	"net"
	"net/http"
	"slices"
	"sync"

	"github.com/prometheus/client_golang/prometheus"
)

// places bounds how many connections a listener has at a time. Who comes when all places are
// taken waits for one, and gets that of a connection which is kept open for a next request.
type places struct {
	net.Listener
	taken  chan struct{} // holds one a connection
	closed chan struct{}
	close  func() // closes closed, once
	open   prometheus.Gauge
	waited prometheus.Counter

	mu      sync.Mutex
	waiting bool       // somebody does
	idle    []net.Conn // the longest idle first
}

func newPlaces(l net.Listener, most int, open prometheus.Gauge, waited prometheus.Counter) *places {
	p := &places{Listener: l, taken: make(chan struct{}, most), closed: make(chan struct{}), open: open, waited: waited}
	p.close = sync.OnceFunc(func() { close(p.closed) })
	return p
}

// Accept implements [net.Listener].
func (p *places) Accept() (net.Conn, error) {
	c, err := p.Listener.Accept()
	if err != nil {
		return nil, err
	}
	select {
	case p.taken <- struct{}{}:
	default:
		if !p.wait() {
			c.Close()
			return nil, net.ErrClosed
		}
	}
	p.open.Inc()
	return &placed{Conn: c, leave: sync.OnceFunc(func() { p.open.Dec(); <-p.taken })}, nil
}

// wait takes the next place that becomes free, and tells whether there is one before the end.
func (p *places) wait() bool {
	p.waited.Inc()
	p.await(true)
	defer p.await(false)
	select {
	case p.taken <- struct{}{}:
		return true
	case <-p.closed:
		return false
	}
}

// await notes whether somebody waits, for whom the longest idle connection is closed.
func (p *places) await(waiting bool) {
	p.mu.Lock()
	defer p.mu.Unlock()
	p.waiting = waiting
	if waiting && len(p.idle) > 0 {
		drop(p.idle[0])
		p.idle = slices.Delete(p.idle, 0, 1)
	}
}

// state follows what becomes of a connection; it is the server's ConnState.
func (p *places) state(c net.Conn, s http.ConnState) {
	p.mu.Lock()
	defer p.mu.Unlock()
	if i := slices.Index(p.idle, c); i >= 0 {
		p.idle = slices.Delete(p.idle, i, i+1)
	}
	switch {
	case s == http.StateIdle && p.waiting:
		drop(c)
	case s == http.StateIdle:
		p.idle = append(p.idle, c)
	}
}

// drop closes a connection without a word, for which the other side might not wait.
func drop(c net.Conn) {
	if t, ok := c.(*tls.Conn); ok {
		c = t.NetConn()
	}
	c.Close()
}

// Close implements [net.Listener].
func (p *places) Close() error {
	p.close()
	return p.Listener.Close()
}

// placed is a connection that leaves its place when it is closed.
type placed struct {
	net.Conn
	leave func()
}

// Close implements [net.Conn].
func (c *placed) Close() error {
	defer c.leave()
	return c.Conn.Close()
}
