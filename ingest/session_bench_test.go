package ingest

import "testing"

// nobody takes acknowledgements.
type nobody struct{}

func (nobody) acknowledge([]byte) {}

// BenchmarkReceive is what a message costs once it is read: decoding,
// counting, holding, and its share of a Take and an Ack for each thousand.
func BenchmarkReceive(b *testing.B) {
	c := payloads()["number"]
	s, err := New(c.tags, Options{URL: "mqtt://127.0.0.1", ClientID: "bench"})
	if err != nil {
		b.Fatal(err)
	}
	m := &delivery{topic: []byte(c.tags[0].Topic), payload: c.payload, qos: 1, id: 1}
	var batch []Received
	n := 0
	b.ReportAllocs()
	for b.Loop() {
		m.id++
		s.receive(b.Context(), nobody{}, m)
		if n++; n%1000 == 0 {
			batch = s.Take(batch[:0])
			s.Ack(batch)
		}
	}
	if got := s.Stats().Tags[0].Accepted; got < uint64(n) {
		b.Fatalf("%d of %d accepted", got, n)
	}
}
