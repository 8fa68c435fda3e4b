package ingest

import (
	"bufio"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"sync/atomic"
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
// the answer comes behind many messages for dead. So a message answers the probe too.
type inflow struct {
	r       *bufio.Reader
	deliver func(*delivery)
	confirm func(id uint16) // a message of ours has come to the broker
	asked   requests
	most    int         // bytes of a body that are read; 0: maxPacket
	message delivery    // at hand
	begun   bool        // the first packet has come
	probed  atomic.Bool // the library waits for an answer
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
	first, err := f.r.ReadByte()
	if err != nil {
		return err
	}
	length, err := f.length()
	switch {
	case err != nil:
		return err
	case first>>4 == publish && f.begun:
		return f.take(first, length)
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

// take delivers a message, which lies in the buffer of the reader where it fits.
func (f *inflow) take(first byte, length int) error {
	kept := min(length, f.longest())
	rest := length
	body, err := f.r.Peek(kept)
	if errors.Is(err, bufio.ErrBufferFull) {
		body, rest = make([]byte, kept), length-kept
		_, err = io.ReadFull(f.r, body)
	}
	if err == nil {
		err = f.message.parse(first, body)
	}
	if err != nil {
		return cutShort(err)
	}
	f.deliver(&f.message)
	if f.probed.Swap(false) {
		f.head = append(f.room[:0], pingresp<<4, 0)
	}
	_, err = f.r.Discard(rest)
	return cutShort(err)
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
	if f.probed.Swap(false) {
		f.head = append(f.room[:0], pingresp<<4, 0)
	}
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
