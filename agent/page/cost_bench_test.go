package page

import (
	"compress/gzip"
	"fmt"
	"io"
	"math/rand/v2"
	"net/http"
	"net/http/httptest"
	"runtime"
	"strings"
	"testing"

	"heatreeve/agent/view"
)

// shift gives all loads another duty, as a beat does.
func shift(source *fixed, random *rand.Rand) {
	s := *source.snapshot
	s.Loads = append([]view.Load(nil), s.Loads...)
	for i := range s.Loads {
		l := &s.Loads[i]
		l.Figure.Duty *= 1 + 0.01*random.NormFloat64()
		l.Figure.Uncertainty = 0.012 * l.Figure.Duty
	}
	s.At += 1e9
	source.snapshot = &s
}

func plantOf(b *testing.B, n int) (*Page, *fixed) {
	all := many(n)
	random := rand.New(rand.NewPCG(1, 2))
	for i := range all {
		all[i].Design = 20e3 + 1e6*random.Float64()
		all[i].Figure.Duty = all[i].Design
		all[i].Figure.Note = ""
	}
	t := new(testing.T)
	return mill(t, all...)
}

// BenchmarkStream measures the events of 1,000 loads that all change at each beat, beside the
// texts of the changed figures themselves, parted by a character each.
func BenchmarkStream(b *testing.B) {
	p, source := plantOf(b, 1000)
	key := p.usual.Key()
	p.feed.join(key)
	random := rand.New(rand.NewPCG(3, 4))
	_, number, _ := p.since(key, p.usual, 0)
	var sent, figures int
	for b.Loop() {
		before := p.feed.byUnit[key].shown
		shift(source, random)
		events, at, _ := p.since(key, p.usual, number)
		number = at
		sent += len(events)
		for i, n := range p.feed.byUnit[key].shown {
			if n.Duty != before[i].Duty {
				figures += len(n.Duty) + 1
			}
			if n.Spread != before[i].Spread {
				figures += len(n.Spread) + 1
			}
		}
	}
	b.ReportMetric(float64(sent)/float64(b.N), "B/beat")
	b.ReportMetric(float64(sent)/float64(figures), "x-figures")
}

// BenchmarkSheet measures the sheet of many loads, compressed as it goes out.
func BenchmarkSheet(b *testing.B) {
	for _, n := range []int{4, 100, 1000} {
		b.Run(fmt.Sprint(n), func(b *testing.B) {
			p, _ := plantOf(b, n)
			var size int64
			for b.Loop() {
				size = compressed(b, get(p, "/").Body)
			}
			for path := range packed() {
				if !strings.HasPrefix(path, "/assets/sheet.") && path != "/assets/icon.svg" {
					continue
				}
				size += compressed(b, get(p, path).Body)
			}
			b.ReportMetric(float64(size), "B/page")
		})
	}
}

func compressed(b *testing.B, r io.Reader) int64 {
	pr, pw := io.Pipe()
	go func() {
		z := gzip.NewWriter(pw)
		_, err := io.Copy(z, r)
		pw.CloseWithError(func() error {
			if err != nil {
				return err
			}
			return z.Close()
		}())
	}()
	n, err := io.Copy(io.Discard, pr)
	if err != nil {
		b.Fatal(err)
	}
	return n
}

// BenchmarkViewers measures what 50 who follow 1,000 loads add to the memory of the agent, and
// what a beat costs for all of them.
func BenchmarkViewers(b *testing.B) {
	const viewers = 50
	p, source := plantOf(b, 1000)
	server := httptest.NewServer(p)
	defer server.Close()
	held := func() uint64 {
		runtime.GC()
		var m runtime.MemStats
		runtime.ReadMemStats(&m)
		return m.HeapInuse + m.StackInuse
	}
	before := held()
	beaten := make(chan int, viewers*4)
	for range viewers {
		resp, err := http.Get(server.URL + "/api/v1/stream")
		if err != nil {
			b.Fatal(err)
		}
		defer resp.Body.Close()
		go func() {
			buffer := make([]byte, 64<<10)
			for {
				n, err := resp.Body.Read(buffer)
				if err != nil {
					return
				}
				beaten <- n
			}
		}()
	}
	for p.streams.Load() < viewers {
		runtime.Gosched()
	}
	random := rand.New(rand.NewPCG(3, 4))
	for b.Loop() {
		shift(source, random)
		p.Beat()
		for range viewers {
			<-beaten
		}
	}
	b.ReportMetric(float64(held()-before)/1024/viewers, "KiB/viewer")
}
