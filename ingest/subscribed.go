package ingest

import (
	"encoding/binary"
	"fmt"
	"sync"
)

// requests are the SUBSCRIBE packets of a connection that have no answer yet. The client
// library panics at an answer with more results than there were topics, and takes missing
// ones as granted; so an answer is held against what was asked.
type requests struct {
	mu     sync.Mutex
	topics map[uint16]int // by packet identifier
}

// note takes in a packet about to be written, if it is a SUBSCRIBE: MQTT 3.1.1, section
// 3.8. The library writes each packet whole.
func (r *requests) note(packet []byte) {
	if len(packet) < 2 || packet[0]>>4 != subscribe {
		return
	}
	body := packet[1:]
	for len(body) > 0 && body[0] >= 0x80 {
		body = body[1:]
	}
	if len(body) < 3 {
		return
	}
	id, body, n := binary.BigEndian.Uint16(body[1:]), body[3:], 0
	for len(body) > 0 {
		_, rest, ok := prefixed(body)
		if !ok || len(rest) == 0 {
			return
		}
		n, body = n+1, rest[1:]
	}
	r.mu.Lock()
	defer r.mu.Unlock()
	if r.topics == nil {
		r.topics = make(map[uint16]int)
	}
	r.topics[id] = n
}

// answered checks the body of a SUBACK: MQTT 3.1.1, section 3.9.
func (r *requests) answered(body []byte) error {
	if len(body) < 2 {
		return fmt.Errorf("answer to a subscription ends after %d bytes", len(body))
	}
	id, results := binary.BigEndian.Uint16(body), len(body)-2
	r.mu.Lock()
	defer r.mu.Unlock()
	asked, ok := r.topics[id]
	switch {
	case !ok:
		return fmt.Errorf("answer to subscription %d, which was not asked; is this an MQTT broker?", id)
	case results != asked:
		return fmt.Errorf("answer to subscription %d has %d results for %d topics; is this an MQTT broker?", id, results, asked)
	}
	delete(r.topics, id)
	return nil
}
