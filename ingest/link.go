package ingest

import (
	"bufio"
	"errors"
	"fmt"
	"io"
	"net"
	"sync"
	"sync/atomic"
	"time"
)

// link is a connection to the broker with what the client library leaves out:
// buffered reads, a limit for every write, and a bound on what one packet makes
// the library allocate.
type link struct {
	net.Conn
	in      clipper
	timeout time.Duration
	cause   atomic.Pointer[error] // why we ended it
	parting atomic.Bool           // the next Close follows our goodbye
	closing sync.Once
	closed  error // what closing gave
}

const readBuffer = 64 << 10 // bytes

func newLink(c net.Conn, writeTimeout time.Duration) *link {
	return &link{Conn: c, in: clipper{r: bufio.NewReaderSize(c, readBuffer)}, timeout: writeTimeout}
}

func (l *link) Read(p []byte) (int, error) {
	n, err := l.in.Read(p)
	if cause := l.cause.Load(); err != nil && cause != nil {
		err = *cause
	}
	return n, err
}

// Write fails when the peer takes nothing for the timeout; without it a dead
// link blocks the library's detection of dead links.
func (l *link) Write(p []byte) (int, error) {
	if err := l.SetWriteDeadline(time.Now().Add(l.timeout)); err != nil {
		return 0, err
	}
	return l.Conn.Write(p)
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

// maxPacket is the longest body of an inbound packet: topic with its length,
// packet identifier, and a payload one byte longer than is read.
const maxPacket = 2 + maxTopic + 2 + MaxPayload + 1

// clipper passes MQTT packets on (MQTT 3.1.1, section 2.2). It cuts a PUBLISH
// beyond maxPacket, which may announce 256 MiB, so that it arrives as a message
// with a payload too large and can be refused and acknowledged; otherwise it
// would come again at every reconnection.
type clipper struct {
	r    *bufio.Reader
	room [5]byte
	head []byte // of the packet, yet to be passed on
	body int    // bytes to pass on after it
	skip int    // bytes to leave out after these
}

func (c *clipper) Read(p []byte) (int, error) {
	if len(c.head) == 0 && c.body == 0 {
		if err := c.next(); err != nil {
			return 0, err
		}
	}
	if len(c.head) > 0 {
		n := copy(p, c.head)
		c.head = c.head[n:]
		return n, nil
	}
	n, err := c.r.Read(p[:min(len(p), c.body)])
	c.body -= n
	return n, err
}

const publish = 3 // packet type: MQTT 3.1.1, table 2.1

// next reads the fixed header of a packet.
func (c *clipper) next() error {
	for c.skip > 0 {
		n, err := c.r.Discard(c.skip)
		c.skip -= n
		if err != nil {
			return err
		}
	}
	kind, err := c.r.ReadByte()
	if err != nil {
		return err
	}
	length, err := c.length()
	if err != nil {
		return err
	}
	if length > maxPacket {
		if kind>>4 != publish {
			return fmt.Errorf("packet of type %d with %d bytes; expected at most %d", kind>>4, length, maxPacket)
		}
		c.skip = length - maxPacket
		length = maxPacket
	}
	c.body = length
	c.head = appendLength(append(c.room[:0], kind), length)
	return nil
}

// length reads a remaining length: MQTT 3.1.1, section 2.2.3.
func (c *clipper) length() (int, error) {
	n := 0
	for shift := 0; shift < 28; shift += 7 {
		b, err := c.r.ReadByte()
		if errors.Is(err, io.EOF) {
			err = io.ErrUnexpectedEOF
		}
		if err != nil {
			return 0, err
		}
		n |= int(b&0x7f) << shift
		if b < 0x80 {
			return n, nil
		}
	}
	return 0, errors.New("packet length has more than four bytes; is this an MQTT broker?")
}

func appendLength(b []byte, n int) []byte {
	for n >= 0x80 {
		b = append(b, byte(n)|0x80)
		n >>= 7
	}
	return append(b, byte(n))
}
