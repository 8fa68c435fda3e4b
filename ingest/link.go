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
	failed  atomic.Pointer[error] // of the first write that did
	cause   atomic.Pointer[error] // why we ended it
	parting atomic.Bool           // the next Close follows our goodbye
	closing sync.Once
	closed  error // what closing gave
}

const readBuffer = 64 << 10 // bytes

// newLink gives each message to deliver, in the goroutine that reads.
func newLink(c net.Conn, writeTimeout time.Duration, deliver func(*link, *delivery)) *link {
	l := &link{Conn: c, timeout: writeTimeout}
	l.in = inflow{r: bufio.NewReaderSize(c, readBuffer), deliver: func(d *delivery) { deliver(l, d) }}
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
// failed, for that may have ended within a packet.
func (l *link) Write(p []byte) (int, error) {
	if failed := l.failed.Load(); failed != nil {
		return 0, *failed
	}
	if err := l.SetWriteDeadline(time.Now().Add(l.timeout)); err != nil {
		return 0, err
	}
	if len(p) > 0 && p[0]>>4 == pingreq {
		l.in.probed.Store(true)
	}
	l.in.asked.note(p)
	n, err := l.Conn.Write(p)
	if err != nil {
		l.failed.CompareAndSwap(nil, &err)
	}
	return n, err
}

// acknowledge sends acknowledgements. If they cannot be sent the connection has
// ended, and the broker delivers again what it got none for. Nothing may follow
// our goodbye: MQTT 3.1.1, section 3.14.4.
func (l *link) acknowledge(packets []byte) {
	if l.parting.Load() {
		return
	}
	if _, err := l.Write(packets); err != nil {
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
