package ingest

import (
	"bufio"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"sync/atomic"
	"time"
)

// maxPacket is the longest body of an inbound packet: topic with its length,
// packet identifier, and a payload one byte longer than is read.
const maxPacket = 2 + maxTopic + 2 + MaxPayload + 1

// inflow takes the messages, and what confirms ours, out of a stream of MQTT packets (MQTT
// 3.1.1, section 2.2), and passes the other packets on. It cuts a PUBLISH beyond the longest, which
// may announce 256 MiB, so that it is delivered with a payload too large and can be
// refused and acknowledged; otherwise it would come again at every reconnection.
// The first packet is passed on whatever it is: the library judges it.
//
// The library probes a connection on which it sees nothing, and would take one on which
// the answer comes behind many messages, or a long one, for dead. So whatever comes of a
// message answers the probe too. But a message that never ends must not keep the connection.
type inflow struct {
	r       *bufio.Reader
	deliver func(*delivery)
	confirm func(id uint16) // a message of ours has come to the broker
	asked   requests
	most    int      // bytes of a body that are read; 0: maxPacket
	message delivery // at hand
	begun   bool     // the first packet has come
	taking  bool     // a message comes, with this first byte and so many bytes of body
	first   byte
	size    int
	long    []byte        // what has come of it, where it does not fit the buffer of the reader
	rest    int           // bytes of a message delivered that are to be left out
	since   time.Time     // when the message began
	within  time.Duration // that a message may take; 0: any time
	probed  atomic.Bool   // the library waits for an answer
	room    [5]byte
	head    []byte // of the packet, yet to be passed on
	body    int    // bytes to pass on after it
}

func (f *inflow) Read(p []byte) (int, error) {
	for len(f.head) == 0 && f.body == 0 {
		if err := f.next(); err != nil {
			return 0, err
		}
	}
	if len(f.head) > 0 {
		n := copy(p, f.head)
		f.head = f.head[n:]
		return n, nil
	}
	n, err := f.r.Read(p[:min(len(p), f.body)])
	f.body -= n
	return n, err
}

const ( // packet types: MQTT 3.1.1, table 2.1
	publish    = 3
	puback     = 4
	subscribe  = 8
	subAck     = 9
	pingreq    = 12
	pingresp   = 13
	disconnect = 14
)

// next takes a message, or the fixed header of another packet.
func (f *inflow) next() error {
	switch {
	case (f.rest > 0 || f.taking) && f.within > 0 && time.Since(f.since) > f.within:
		return fmt.Errorf("message of %d bytes has not come to its end within %v", f.size, f.within)
	case f.rest > 0:
		return f.skip()
	case f.taking:
		return f.take()
	}
	first, err := f.r.ReadByte()
	if err != nil {
		return err
	}
	length, err := f.length()
	switch {
	case err != nil:
		return err
	case first>>4 == publish && f.begun:
		f.taking, f.first, f.size = true, first, length
		f.since = time.Now()
		return f.take()
	case first>>4 == puback && f.begun && length == 2 && f.confirm != nil:
		if ours, err := f.confirmed(); ours || err != nil {
			return err
		}
	case length > f.longest():
		return fmt.Errorf("packet of type %d with %d bytes; expected at most %d", first>>4, length, f.longest())
	case first>>4 == subAck && f.begun:
		// Its results are one byte for each topic asked for: they fit the buffer.
		body, err := f.r.Peek(length)
		if err != nil && !errors.Is(err, bufio.ErrBufferFull) {
			return cutShort(err)
		}
		if err := f.asked.answered(body); err != nil {
			return err
		}
	}
	f.begun = true
	f.body = length
	f.head = appendLength(append(f.room[:0], first), length)
	return nil
}

func (f *inflow) longest() int { return max(f.most, maxPacket) }

// take delivers a message once it is there; before that it returns to answer a probe.
func (f *inflow) take() error {
	kept := min(f.size, f.longest())
	there, err := f.gather(kept)
	if !there {
		return cutShort(err)
	}
	body := f.long
	f.rest, f.long = f.size-len(body), nil
	if body == nil {
		body, _ = f.r.Peek(kept) // which is there
	}
	if err := f.message.parse(f.first, body); err != nil {
		return err
	}
	f.taking = false
	f.deliver(&f.message)
	f.answer()
	return nil
}

// gather waits for n bytes, in the buffer of the reader or, where they do not fit, in long.
// They are not there yet when it has answered a probe.
func (f *inflow) gather(n int) (there bool, err error) {
	if n > f.r.Size() && f.long == nil {
		f.long = make([]byte, 0, n)
	}
	for {
		if f.long == nil && f.r.Buffered() >= n || f.long != nil && len(f.long) == n {
			return true, nil
		}
		if err := f.more(n); err != nil || f.answer() {
			return false, err
		}
	}
}

// more waits for at least one byte of n.
func (f *inflow) more(n int) error {
	if f.long == nil {
		_, err := f.r.Peek(f.r.Buffered() + 1)
		return err
	}
	got, err := f.r.Read(f.long[len(f.long):n])
	f.long = f.long[:len(f.long)+got]
	return err
}

// skip leaves out what is not wanted of a message, or returns to answer a probe.
func (f *inflow) skip() error {
	if f.r.Buffered() == 0 {
		if _, err := f.r.Peek(1); err != nil {
			return cutShort(err)
		}
		f.answer()
	}
	n, err := f.r.Discard(min(f.rest, f.r.Buffered()))
	f.rest -= n
	return err
}

// answer passes an answer on, if the library waits for one to its probe.
func (f *inflow) answer() bool {
	if !f.probed.Swap(false) {
		return false
	}
	f.head = append(f.room[:0], pingresp<<4, 0)
	return true
}

// confirmed takes a PUBACK (MQTT 3.1.1, section 3.4), unless it is of a packet of the
// library's.
func (f *inflow) confirmed() (ours bool, err error) {
	body, err := f.r.Peek(2)
	if err != nil {
		return false, cutShort(err)
	}
	id := binary.BigEndian.Uint16(body)
	if id < firstID {
		return false, nil
	}
	f.confirm(id)
	f.answer()
	_, err = f.r.Discard(2)
	return true, err
}

// cutShort tells an end within a packet from one between two.
func cutShort(err error) error {
	if errors.Is(err, io.EOF) {
		return io.ErrUnexpectedEOF
	}
	return err
}

// length reads a remaining length: MQTT 3.1.1, section 2.2.3.
func (f *inflow) length() (int, error) {
	n := 0
	for shift := 0; shift < 28; shift += 7 {
		b, err := f.r.ReadByte()
		if err != nil {
			return 0, cutShort(err)
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
