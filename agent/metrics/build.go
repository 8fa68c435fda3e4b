package metrics

import (
	"runtime"
	"runtime/debug"

	"github.com/prometheus/client_golang/prometheus"
)

// BuildInfo returns the constant heatreeve_build_info metric of this program.
func BuildInfo(version string) prometheus.Collector {
	g := prometheus.NewGauge(prometheus.GaugeOpts{
		Name:        "heatreeve_build_info",
		Help:        "A constant 1, labelled with what was built.",
		ConstLabels: prometheus.Labels{"version": version, "revision": revision(), "goversion": runtime.Version(), "arch": runtime.GOARCH},
	})
	g.Set(1)
	return g
}

// revision returns the commit that the program was built from, where the
// toolchain recorded it.
func revision() string {
	info, ok := debug.ReadBuildInfo()
	if !ok {
		return "unknown"
	}
	for _, s := range info.Settings {
		if s.Key == "vcs.revision" {
			return s.Value
		}
	}
	return "unknown"
}

// CommitSeconds returns the histogram of how long commits of the history take; its
// classic buckets reach from a fast disk (1 ms) to a flash card that stalls (10 s).
func CommitSeconds() prometheus.Histogram {
	return prometheus.NewHistogram(prometheus.HistogramOpts{
		Name:    "heatreeve_history_commit_seconds",
		Help:    "How long commits of the history to disk take.",
		Buckets: []float64{0.001, 0.003, 0.01, 0.03, 0.1, 0.3, 1, 3, 10},
	})
}
