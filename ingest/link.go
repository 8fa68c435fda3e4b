package ingest

import (
	"bufio"
	"fmt"
	"io"
	"net"
	"sync"
	"sync/atomic"
	"time"
)

// link is a connection to the broker with what the client library leaves out:
// buffered reads, a limit for every write, and a bound on what one packet makes
// us allocate. Messages and their acknowledgements do not go through the library,
// where seven goroutines pass them on one by one; waking those cost more than all
// that is done with a reading.
type link struct {
	net.Conn
	in      inflow
	timeout time.Duration
	writing sync.Mutex
	failed  error                 // of the first write that did; guarded by writing
	left    bool                  // our goodbye is written; guarded by writing
	cause   atomic.Pointer[error] // why we ended it
	parting atomic.Bool           // the next Close follows our goodbye
	closing sync.Once
	closed  error // what closing gave
}

const readBuffer = 64 << 10 // bytes

// newLink gives each message to deliver, in the goroutine that reads. Once we part,
// the wait for the broker's end takes bytes from that goroutine, and what it reads
// may be no message any more.
func newLink(c net.Conn, writeTimeout time.Duration, deliver func(*link, *delivery)) *link {
	l := &link{Conn: c, timeout: writeTimeout}
	l.in = inflow{r: bufio.NewReaderSize(c, readBuffer), deliver: func(d *delivery) {
		if !l.parting.Load() {
			deliver(l, d)
		}
	}}
	return l
}

func (l *link) Read(p []byte) (int, error) {
	n, err := l.in.Read(p)
	if cause := l.cause.Load(); err != nil && cause != nil {
		err = *cause
	}
	return n, err
}

// Write fails when the peer takes nothing for the timeout; without it a dead
// link blocks the library's detection of dead links. No write follows one that
// failed, for that may have ended within a packet. One at a time writes: the limit
// of the next must not put off that of one which is stuck.
func (l *link) Write(p []byte) (int, error) {
	if len(p) > 0 && p[0]>>4 == pingreq {
		l.in.probed.Store(true)
	}
	l.in.asked.note(p)
	l.writing.Lock()
	defer l.writing.Unlock()
	return l.write(p)
}

// write is for who holds writing.
func (l *link) write(p []byte) (int, error) {
	if l.failed != nil {
		return 0, l.failed
	}
	if err := l.Conn.SetWriteDeadline(time.Now().Add(l.timeout)); err != nil {
		return 0, err
	}
	n, err := l.Conn.Write(p)
	if err != nil {
		l.failed = err
		return n, err
	}
	l.left = l.left || len(p) > 0 && p[0]>>4 == disconnect
	// Reading may have to write as well, at any time: RFC 8446, section 4.6.3.
	_ = l.Conn.SetWriteDeadline(time.Time{}) // fails only on a connection that we have closed
	return n, nil
}

// SetWriteDeadline does nothing: each write has a limit of its own, which another
// goroutine must not take from it.
func (l *link) SetWriteDeadline(time.Time) error { return nil }

// acknowledge sends acknowledgements. If they cannot be sent the connection has
// ended, and the broker delivers again what it got none for. Nothing may follow
// our goodbye: MQTT 3.1.1, section 3.14.4.
func (l *link) acknowledge(packets []byte) {
	l.writing.Lock()
	defer l.writing.Unlock()
	if l.left {
		return
	}
	if _, err := l.write(packets); err != nil {
		l.end(fmt.Errorf("acknowledge: %w", err))
	}
}

// publish sends a message.
func (l *link) publish(packet []byte) error {
	if l.parting.Load() {
		return net.ErrClosed
	}
	_, err := l.Write(packet)
	if err != nil {
		l.end(fmt.Errorf("publish: %w", err))
	}
	return err
}

// end makes the library lose this connection for a reason; a plain Close it
// would take for its own and not reconnect.
func (l *link) end(why error) {
	l.cause.CompareAndSwap(nil, &why)
	_ = l.SetReadDeadline(time.Unix(1, 0)) // fails only on a closed connection, which has ended
}

// parted bounds the wait for the broker's end of a connection that we leave.
const parted = 400 * time.Millisecond

// Close, after our goodbye, first lets the broker read to the end. A close with
// bytes not yet read here would reset the connection, and a successor of this
// process may connect before the broker has read all acknowledgements; in both
// cases they could be lost. The library closes twice: the second waits as well.
func (l *link) Close() error {
	l.closing.Do(func() {
		if l.parting.Load() {
			l.part()
		}
		l.closed = l.Conn.Close()
	})
	return l.closed
}

func (l *link) part() {
	half, ok := l.Conn.(interface{ CloseWrite() error })
	if ok && half.CloseWrite() == nil && l.SetReadDeadline(time.Now().Add(parted)) == nil {
		_, _ = io.Copy(io.Discard, l.Conn) // until the broker closes, or the deadline
	}
}
