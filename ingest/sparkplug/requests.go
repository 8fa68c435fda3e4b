package sparkplug

import (
	"cmp"
	"slices"

	"google.golang.org/protobuf/encoding/protowire"
)

// The pauses of [Requests], ns. Each is lengthened by chance up to the double, so that
// many subscribers that miss the same message do not ask at one time.
const (
	patience = 2_000_000_000  // before asking: what is missing may still come
	interval = 30_000_000_000 // between two requests to one node
)

// Requests says when edge nodes are asked for their births again.
type Requests struct {
	random func() float64 // from 0 to 1
	due    map[Source]int64
	asked  map[Source]int64
}

// NewRequests returns an empty plan; random gives numbers from 0 to below 1.
func NewRequests(random func() float64) *Requests {
	return &Requests{random: random, due: make(map[Source]int64), asked: make(map[Source]int64)}
}

// Ask plans a request to a node, if there is none yet, for when what is missing has had its
// time to come.
func (r *Requests) Ask(node Source, now int64) { r.plan(node, now, patience) }

// AskSoon plans a request to a node of which nothing is known that could still come.
func (r *Requests) AskSoon(node Source, now int64) { r.plan(node, now, 0) }

func (r *Requests) plan(node Source, now, wait int64) {
	if _, planned := r.due[node]; planned {
		return
	}
	at := now + wait + int64(r.random()*patience)
	if last, ok := r.asked[node]; ok {
		at = max(at, last+r.lengthened(interval))
	}
	r.due[node] = at
}

func (r *Requests) lengthened(pause int64) int64 {
	return pause + int64(r.random()*float64(pause))
}

// Cancel drops the request: what was missing has come.
func (r *Requests) Cancel(node Source) { delete(r.due, node) }

// Due returns the nodes that are to be asked now, and takes them to have been.
func (r *Requests) Due(now int64) []Source {
	var nodes []Source
	for node, at := range r.due {
		if at <= now {
			nodes = append(nodes, node)
			delete(r.due, node)
			r.asked[node] = now
		}
	}
	slices.SortFunc(nodes, func(a, b Source) int {
		return cmp.Or(cmp.Compare(a.Group, b.Group), cmp.Compare(a.Node, b.Node))
	})
	return nodes
}

// rebirth is the metric by which a node is told to be born again: Sparkplug 3.0, chapter 5.
const rebirth = "Node Control/Rebirth"

// RebirthRequest returns the payload of an [NCommand] that asks a node for its births; it
// is published with QoS 0, not retained. at is in Unix nanoseconds.
func RebirthRequest(at int64) []byte {
	ms := uint64(at / 1e6)
	metric := protowire.AppendTag(nil, metricName, protowire.BytesType)
	metric = protowire.AppendString(metric, rebirth)
	metric = protowire.AppendTag(metric, metricTimestamp, protowire.VarintType)
	metric = protowire.AppendVarint(metric, ms)
	metric = protowire.AppendTag(metric, metricDatatype, protowire.VarintType)
	metric = protowire.AppendVarint(metric, uint64(Boolean))
	metric = protowire.AppendTag(metric, protowire.Number(fieldBool), protowire.VarintType)
	metric = protowire.AppendVarint(metric, 1)
	payload := protowire.AppendTag(nil, payloadTimestamp, protowire.VarintType)
	payload = protowire.AppendVarint(payload, ms)
	payload = protowire.AppendTag(payload, payloadMetrics, protowire.BytesType)
	return protowire.AppendBytes(payload, metric)
}
