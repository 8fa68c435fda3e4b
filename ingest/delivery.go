package ingest

import (
	"encoding/binary"
	"fmt"
)

// delivery is a PUBLISH packet (MQTT 3.1.1, section 3.3). What its slices hold is
// good until the next packet is read.
type delivery struct {
	topic, payload []byte
	qos            byte
	retained       bool
	id             uint16 // meant with a qos above 0 only
}

// parse takes a packet apart, given the first byte of its fixed header and its body.
func (d *delivery) parse(first byte, body []byte) error {
	d.qos, d.retained = first>>1&3, first&1 != 0
	if d.qos > 2 {
		return fmt.Errorf("message with quality of service %d; MQTT has 0 to 2", d.qos)
	}
	var ok bool
	if d.topic, body, ok = prefixed(body); !ok {
		return fmt.Errorf("message of %d bytes ends in its topic", len(body))
	}
	if d.qos > 0 {
		if len(body) < 2 {
			return fmt.Errorf("message on topic %q ends in its identifier", d.topic)
		}
		d.id, body = binary.BigEndian.Uint16(body), body[2:]
	}
	d.payload = body
	return nil
}

// prefixed splits off a string with its length before it: MQTT 3.1.1, section 1.5.3.
func prefixed(b []byte) (text, rest []byte, ok bool) {
	if len(b) < 2 {
		return nil, b, false
	}
	end := 2 + int(binary.BigEndian.Uint16(b))
	if len(b) < end {
		return nil, b, false
	}
	return b[2:end], b[end:], true
}

// answer is the packet that acknowledges a message: PUBACK, or PUBREC for quality of
// service 2, which we ask for nowhere but may find in a session of another program.
// The library gives the last answer to that. MQTT 3.1.1, sections 3.4 and 3.5.
type answer [4]byte

// id is the packet identifier.
func (a answer) id() uint16 { return binary.BigEndian.Uint16(a[2:]) }

func (d *delivery) answer() answer {
	kind := byte(4)
	if d.qos == 2 {
		kind = 5
	}
	return answer{kind << 4, 2, byte(d.id >> 8), byte(d.id)}
}
