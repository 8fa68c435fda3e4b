package ingest

import "testing"

// delivered is a message as the client library hands it over.
type delivered struct {
	topic   string
	payload []byte
}

func (m *delivered) Duplicate() bool   { return false }
func (m *delivered) Qos() byte         { return 1 }
func (m *delivered) Retained() bool    { return false }
func (m *delivered) Topic() string     { return m.topic }
func (m *delivered) MessageID() uint16 { return 1 }
func (m *delivered) Payload() []byte   { return m.payload }
func (m *delivered) Ack()              {}

// BenchmarkReceive is what a message costs after the client library: decoding,
// counting, holding, and its share of a Take and an Ack for each thousand.
func BenchmarkReceive(b *testing.B) {
	c := payloads()["number"]
	s, err := New(c.tags, Options{URL: "mqtt://127.0.0.1", ClientID: "bench"})
	if err != nil {
		b.Fatal(err)
	}
	m := &delivered{c.tags[0].Topic, c.payload}
	var batch []Received
	n := 0
	b.ReportAllocs()
	for b.Loop() {
		s.receive(b.Context(), m)
		if n++; n%1000 == 0 {
			batch = s.Take(batch[:0])
			s.Ack(batch)
		}
	}
	if got := s.Stats().Tags[0].Accepted; got < uint64(n) {
		b.Fatalf("%d of %d accepted", got, n)
	}
}
