// Package doors is where the agent listens, for everybody and for its own command line, and who
// may look there.
package doors

import (
	"fmt"
	"log/slog"
	"net"
	"net/http"
	"net/netip"
	"strings"

	"heatreeve/agent/access"
	"heatreeve/agent/answer"
)

// Options say where everybody may look, and who that is.
type Options struct {
	Listen string // "host:port"
	// WebConfig is a file of the Prometheus exporters' format that says which certificates and
	// passwords who looks must have; "" for none.
	WebConfig string
	// Openly lets others than this machine look without either, by any name of it.
	Openly bool
}

// Guard is who may look at what the agent shows, and what they may do.
type Guard struct {
	file   string // web configuration; "" for none
	terms  access.Terms
	openly bool
}

// NewGuard says what is wrong with the options, before anything is started.
func NewGuard(o Options) (*Guard, error) {
	g := &Guard{file: o.WebConfig, openly: o.Openly}
	host, _, err := net.SplitHostPort(o.Listen)
	if err != nil {
		return nil, fmt.Errorf("--listen %q: %s; write host:port", o.Listen, strings.TrimPrefix(err.Error(), "address "+o.Listen+": "))
	}
	if g.file != "" {
		if g.terms, err = access.Check(g.file); err != nil {
			return nil, err
		}
	}
	return g, g.covers(host, o.Listen)
}

// covers is an error where others than this machine could look at a host, and nobody would be
// asked.
func (g *Guard) covers(host, listen string) error {
	if g.terms.Authenticates() || g.openly || within(host) {
		return nil
	}
	return fmt.Errorf("--listen %q: others than this machine could look there, and nobody would be asked who they are; "+
		"give --web-config FILE with basic_auth_users or the certificates of clients, listen on 127.0.0.1, or let everybody look with --openly", listen)
}

// within tells whether a host is this machine's loopback.
func within(host string) bool {
	if strings.EqualFold(host, "localhost") {
		return true
	}
	at, err := netip.ParseAddr(host)
	return err == nil && at.IsLoopback()
}

// Admit looks once more at where the agent listens in truth, now that names are resolved.
func (g *Guard) Admit(d *Doors, log *slog.Logger) error {
	at := d.Public()
	host, _, err := net.SplitHostPort(at.String())
	if err != nil {
		return err
	}
	if g.terms.Password && !g.terms.TLS && !within(host) {
		log.Warn("passwords go over the network unencrypted; give the web configuration a tls_server_config", "web_config", g.file, "address", at.String())
	}
	return g.covers(host, at.String())
}

// URL is where a reader finds what listens at an address.
func (g *Guard) URL(at net.Addr) string {
	scheme, host := "http", at.String()
	if g.terms.TLS {
		scheme = "https"
	}
	if a, err := netip.ParseAddrPort(host); err == nil && a.Addr().IsUnspecified() {
		host = fmt.Sprintf("localhost:%d", a.Port())
	}
	return scheme + "://" + host
}

// policy is what a page of the agent may do in a browser: load what the agent itself serves, and
// nothing that stands within the page.
const policy = "default-src 'none'; script-src 'self'; style-src 'self'; img-src 'self'; connect-src 'self'; form-action 'self'; base-uri 'none'; frame-ancestors 'none'"

// Bounds are the headers that each answer has, by which a browser keeps a page within them.
func Bounds() map[string]string {
	return map[string]string{
		"Content-Security-Policy":      policy,
		"X-Content-Type-Options":       "nosniff",
		"Referrer-Policy":              "no-referrer",
		"Cross-Origin-Resource-Policy": "same-origin",
		"Cross-Origin-Opener-Policy":   "same-origin",
	}
}

// front stands before everything that everybody may ask, passwords included.
func (g *Guard) front(h http.Handler) http.Handler {
	return http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		for name, value := range Bounds() {
			w.Header().Set(name, value)
		}
		switch {
		case !g.openly && !g.terms.Authenticates() && !toLoopback(r.Host):
			// A page from elsewhere may have its own name lead here, to be told what its reader is told
			// (DNS rebinding); to the browser it is all one site.
			turnAway(w, r, http.StatusMisdirectedRequest, fmt.Sprintf("%q is no name of this machine's loopback: ask for http://localhost or http://127.0.0.1 with the port; "+
				"for other names, behind a proxy too, start the agent with --web-config and a password, or with --openly", r.Host))
		case r.Method != http.MethodGet && r.Method != http.MethodHead:
			w.Header().Set("Allow", "GET, HEAD")
			turnAway(w, r, http.StatusMethodNotAllowed, "here is nothing to be changed: allowed are GET and HEAD")
		default:
			h.ServeHTTP(w, r)
		}
	})
}

// turnAway says why there is no answer, to a program as a problem.
func turnAway(w http.ResponseWriter, r *http.Request, status int, why string) {
	if strings.HasPrefix(r.URL.Path, answer.Path) {
		answer.Refuse(w, status, why)
		return
	}
	http.Error(w, why, status)
}

// toLoopback tells whether a request is for the loopback by its own names.
func toLoopback(hostPort string) bool {
	host, _, err := net.SplitHostPort(hostPort)
	if err != nil {
		host = strings.TrimSuffix(strings.TrimPrefix(hostPort, "["), "]")
	}
	return within(host)
}
