package agent

import (
	"io"
	"log/slog"
	"net/http"
	"strings"
	"time"

	"github.com/prometheus/client_golang/prometheus"
	"github.com/prometheus/client_golang/prometheus/promhttp"

	"heatreeve/agent/metrics"
)

// Safety is what every face of the program says of itself.
const Safety = `Heatreeve informs. It is no safety function, interlock or alarm of record, and
no billing meter. Site codes, the plant's own protection and licensed people
come first.`

// handler serves the page, the metrics, the two answers that supervisors ask for, reports,
// explanations and exports.
func handler(page, metrics http.Handler, health *health, reports *reports, explains *explains, version string) http.Handler {
	mux := http.NewServeMux()
	mux.Handle("GET /", page)
	mux.Handle("GET /metrics", metrics)
	mux.HandleFunc("GET /healthz", faultless(health.alive))
	mux.HandleFunc("GET /readyz", faultless(health.ready))
	newAPI(page, reports, explains, health, version).mount(mux)
	return mux
}

// metricsHandler serves the loads and tags, and what the registry has of the agent itself.
func metricsHandler(reg *prometheus.Registry, c *metrics.Collector, log *slog.Logger) http.Handler {
	return promhttp.HandlerFor(c.Beside(reg), promhttp.HandlerOpts{
		Registry:            reg,
		ErrorLog:            slog.NewLogLogger(log.Handler(), slog.LevelError),
		ErrorHandling:       promhttp.ContinueOnError,
		MaxRequestsInFlight: 3,
		Timeout:             8 * time.Second,
	})
}

// faultless turns a list of what is wrong into 200 or 503, a line a fault.
func faultless(faults func() []string) http.HandlerFunc {
	return func(w http.ResponseWriter, _ *http.Request) {
		wrong := faults()
		if len(wrong) == 0 {
			io.WriteString(w, "ok\n")
			return
		}
		http.Error(w, strings.Join(wrong, "\n"), http.StatusServiceUnavailable)
	}
}
