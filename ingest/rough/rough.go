// Package rough is a rough road to a broker: a forwarder on the loopback address that
// does to connections what networks do. Tests put it between agent and broker.
package rough

import (
	"context"
	"errors"
	"net"
	"sync"
	"time"
)

// Road forwards connections to one address. Its methods may be called at any time, and
// hold for the connections that stand as well as for new ones.
type Road struct {
	listener net.Listener
	target   string
	ctx      context.Context
	end      context.CancelFunc
	running  sync.WaitGroup

	mu      sync.Mutex
	conns   map[net.Conn]bool
	closed  bool          // no way through
	frozen  chan struct{} // closed when it thaws; nil: it flows
	latency time.Duration
	rate    int // bytes a second each way; 0: as they come
}

// Open opens a road to the address, on a free port.
func Open(target string) (*Road, error) {
	l, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		return nil, err
	}
	r := &Road{listener: l, target: target, conns: make(map[net.Conn]bool)}
	r.ctx, r.end = context.WithCancel(context.Background())
	r.running.Go(r.accept)
	return r, nil
}

// Address is where the road begins, as host:port.
func (r *Road) Address() string { return r.listener.Addr().String() }

// Close ends all connections, and returns when nothing runs any more.
func (r *Road) Close() error {
	err := r.listener.Close()
	r.end()
	r.Reset()
	r.running.Wait()
	return err
}

// Reset ends the connections that stand, as a peer does that knows nothing of them.
func (r *Road) Reset() {
	r.mu.Lock()
	defer r.mu.Unlock()
	for c := range r.conns {
		if tcp, ok := c.(*net.TCPConn); ok {
			_ = tcp.SetLinger(0) // fails only on a connection that has ended
		}
		_ = c.Close()
	}
}

// Shut ends all connections and lets no new one through, until it is told otherwise.
func (r *Road) Shut(shut bool) {
	r.mu.Lock()
	r.closed = shut
	r.mu.Unlock()
	if shut {
		r.Reset()
	}
}

// Freeze lets no byte through and ends no connection, as behind a dead link.
func (r *Road) Freeze(freeze bool) {
	r.mu.Lock()
	defer r.mu.Unlock()
	switch {
	case freeze && r.frozen == nil:
		r.frozen = make(chan struct{})
	case !freeze && r.frozen != nil:
		close(r.frozen)
		r.frozen = nil
	}
}

// Delay holds up every piece of data that long, each way.
func (r *Road) Delay(d time.Duration) {
	r.mu.Lock()
	defer r.mu.Unlock()
	r.latency = d
}

// Drip lets so many bytes a second through, each way, a few at a time; 0: as they come.
func (r *Road) Drip(rate int) {
	r.mu.Lock()
	defer r.mu.Unlock()
	r.rate = rate
}

func (r *Road) accept() {
	for {
		near, err := r.listener.Accept()
		if err != nil {
			return
		}
		r.running.Go(func() { r.carry(near) })
	}
}

func (r *Road) carry(near net.Conn) {
	defer near.Close()
	if !r.enter(near) {
		return
	}
	defer r.leave(near)
	far, err := net.Dial("tcp", r.target)
	if err != nil {
		return
	}
	defer far.Close()
	if !r.enter(far) {
		return
	}
	defer r.leave(far)
	var both sync.WaitGroup
	both.Go(func() { r.flow(far, near) })
	both.Go(func() { r.flow(near, far) })
	both.Wait()
}

func (r *Road) enter(c net.Conn) bool {
	r.mu.Lock()
	defer r.mu.Unlock()
	if r.closed || r.ctx.Err() != nil {
		return false
	}
	r.conns[c] = true
	return true
}

func (r *Road) leave(c net.Conn) {
	r.mu.Lock()
	defer r.mu.Unlock()
	delete(r.conns, c)
}

// flow copies one way, and passes the end on.
func (r *Road) flow(to, from net.Conn) {
	buf := make([]byte, 32<<10)
	for {
		n, err := from.Read(buf)
		for sent := 0; sent < n; {
			piece, ok := r.pass(n - sent)
			if !ok {
				return
			}
			if _, err := to.Write(buf[sent : sent+piece]); err != nil {
				_ = from.Close()
				return
			}
			sent += piece
		}
		if err != nil {
			r.ends(to, err)
			return
		}
	}
}

// ends passes on how the other side ended.
func (r *Road) ends(to net.Conn, err error) {
	var gone *net.OpError
	if tcp, ok := to.(*net.TCPConn); ok && !errors.As(err, &gone) {
		_ = tcp.CloseWrite() // what is on its way back still comes
		return
	}
	_ = to.Close()
}

// pass waits until some of n bytes may go on, and says how many.
func (r *Road) pass(n int) (piece int, ok bool) {
	r.mu.Lock()
	frozen, wait, rate := r.frozen, r.latency, r.rate
	r.mu.Unlock()
	if frozen != nil {
		select {
		case <-frozen:
		case <-r.ctx.Done():
			return 0, false
		}
	}
	if rate > 0 {
		n = min(n, max(1, rate/20))
		wait += time.Duration(n) * time.Second / time.Duration(rate)
	}
	if wait == 0 {
		return n, r.ctx.Err() == nil
	}
	timer := time.NewTimer(wait)
	defer timer.Stop()
	select {
	case <-timer.C:
		return n, true
	case <-r.ctx.Done():
		return 0, false
	}
}
