package agent

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"io"
	"log/slog"
	"net"
	"net/http"
	"strings"
	"time"

	"github.com/prometheus/client_golang/prometheus"
	"github.com/prometheus/client_golang/prometheus/promhttp"

	"heatreeve/agent/answer"
	"heatreeve/agent/loads"
	"heatreeve/agent/metrics"
	"heatreeve/agent/view"
)

// Safety is what every face of the program says of itself.
const Safety = `Heatreeve informs. It is no safety function, interlock or alarm of record, and
no billing meter. Site codes, the plant's own protection and licensed people
come first.`

// handler serves the metrics, the two answers that supervisors ask for, reports, explanations
// and exports.
func handler(metrics http.Handler, health *health, reports *reports, explains *explains) http.Handler {
	mux := http.NewServeMux()
	mux.Handle("GET /metrics", metrics)
	mux.HandleFunc("GET /healthz", faultless(health.alive))
	mux.HandleFunc("GET /readyz", faultless(health.ready))
	mux.Handle("GET "+reportPath, reports)
	mux.Handle("GET "+explainPath, explains)
	mux.Handle("GET "+exportPath, newExports(reports))
	mux.Handle("GET "+warningsPath, newBoards(reports, health))
	mux.Handle("GET "+eventsPath, newEvents(reports))
	mux.HandleFunc("GET /{$}", func(w http.ResponseWriter, _ *http.Request) {
		w.Header().Set("Content-Type", "text/plain; charset=utf-8")
		front(w, health.latest.Load(), health.now())
	})
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

// front is the page at /: the loads with what is wrong or remarkable with them, and where the
// rest is.
func front(w io.Writer, s *view.Snapshot, now time.Time) {
	if s != nil {
		fmt.Fprintf(w, "Heatreeve at %s\n\n", s.Site)
		for i := range s.Loads {
			figure, verdict := s.Current(i, now.UnixNano())
			duty := "-"
			if figure.Measured() {
				duty = fmt.Sprintf("%.1f ± %.1f kW", figure.Duty/1e3, answer.CoverageFactor*figure.Uncertainty/1e3)
			}
			line := fmt.Sprintf("%-32s %-10s %20s  %s", s.Loads[i].Name, verdict, duty, remark(&figure))
			fmt.Fprintln(w, strings.TrimRight(line, " "))
		}
		fmt.Fprint(w, "\n±: twice the standard uncertainty\n")
		frontKept(w, s)
		frontWarnings(w, s)
		fmt.Fprintln(w)
	}
	fmt.Fprintf(w, "/metrics  heat loads, energy registers and tags, for Prometheus\n/healthz  200 while the agent keeps its beat\n/readyz   200 while broker and history serve it\n/report   heat by hour, day or month as JSON, such as /report?from=2026-12-01&by=day\n/explain  the working of a figure as JSON, such as /explain?load=NAME\n/export   readings of a tag, or minutes or hours of a load, such as /export?load=NAME&from=2026-12-01&format=csv\n/warnings what stands now, with causes and marks, as JSON\n/events   what happened beside the accounts as JSON, such as /events?kind=warning\n\n%s\n", Safety)
}

// frontWarnings lists the warnings, with what was done about them.
func frontWarnings(w io.Writer, s *view.Snapshot) {
	listed := s.Warnings.Listed()
	if len(listed) > 0 {
		fmt.Fprintln(w, "\nWarnings:")
	}
	for i := range listed {
		l := &listed[i]
		state := string(l.State())
		if l.Mark != nil {
			state += " by " + l.Mark.By
		}
		if l.Shelf != nil {
			state += ", shelved until " + time.Unix(0, l.Shelf.Until).UTC().Format(time.RFC3339)
		}
		fmt.Fprintf(w, "%s, %s, %s\n", l.Subject, l.Text(time.UTC), state)
	}
}

// frontKept tells what the broker had kept of tags that have said nothing since.
func frontKept(w io.Writer, s *view.Snapshot) {
	for i := range s.Tags {
		if t := &s.Tags[i]; t.Kept != "" {
			fmt.Fprintf(w, "%s: the broker had kept %s, of an age that nobody knows; it is in no figure\n", t.Name, t.Kept)
		}
	}
}

// remark is why there is no figure, or what to bear in mind with it.
func remark(f *loads.Figure) string {
	if d := f.Doubt(); d != "" && f.Note != "" {
		return d + "; " + f.Note
	}
	return cmp.Or(f.Reason, f.Doubt(), f.Note)
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

// serve answers on l until ctx ends; it then lets requests under way finish for a
// moment.
func serve(ctx context.Context, l net.Listener, h http.Handler) error {
	server := &http.Server{
		Handler: h, ReadHeaderTimeout: 5 * time.Second, ReadTimeout: 10 * time.Second,
		WriteTimeout: 20 * time.Second, IdleTimeout: time.Minute, MaxHeaderBytes: 16 << 10,
	}
	closed := make(chan struct{})
	stop := context.AfterFunc(ctx, func() {
		defer close(closed)
		grace, cancel := context.WithTimeout(context.WithoutCancel(ctx), time.Second)
		defer cancel()
		if server.Shutdown(grace) != nil {
			server.Close()
		}
	})
	err := server.Serve(l)
	if !stop() {
		<-closed
	}
	if errors.Is(err, http.ErrServerClosed) {
		return nil
	}
	return fmt.Errorf("serve on %s: %w", l.Addr(), err)
}
