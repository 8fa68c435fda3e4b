package metrics

import "github.com/prometheus/client_golang/prometheus"

// Doors are the metrics of the addresses at which the agent listens, by their label door: public
// for everybody, private for its own command line.
type Doors struct {
	Open   *prometheus.GaugeVec
	Waited *prometheus.CounterVec
}

// NewDoors returns them, at zero.
func NewDoors() Doors {
	labels := []string{"door"}
	return Doors{
		Open: prometheus.NewGaugeVec(prometheus.GaugeOpts{
			Name: "heatreeve_connections",
			Help: "Connections that are open now.",
		}, labels),
		Waited: prometheus.NewCounterVec(prometheus.CounterOpts{
			Name: "heatreeve_connections_waited_total",
			Help: "Connections that had to wait since as many were open as there may be.",
		}, labels),
	}
}

// Describe implements [prometheus.Collector].
func (d Doors) Describe(ch chan<- *prometheus.Desc) {
	d.Open.Describe(ch)
	d.Waited.Describe(ch)
}

// Collect implements [prometheus.Collector].
func (d Doors) Collect(ch chan<- prometheus.Metric) {
	d.Open.Collect(ch)
	d.Waited.Collect(ch)
}
