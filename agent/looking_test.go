package agent

import (
	"bytes"
	"context"
	"crypto/tls"
	"io"
	"log/slog"
	"net"
	"net/http"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/answer"
	"heatreeve/agent/demo"
	"heatreeve/agent/doors"
	"heatreeve/ingest/authority"

	"golang.org/x/crypto/bcrypt"
)

// shown is an agent on the demo's plant that is looked at.
type shown struct {
	agent *Agent
	at    net.Addr
	data  string
}

// show starts one; it ends with the test, without an error.
func show(t *testing.T, config string) *shown {
	t.Helper()
	d, err := demo.Start(demo.Options{Speed: 60, Seed: 1})
	if err != nil {
		t.Fatal(err)
	}
	ready := make(chan net.Addr, 1)
	s := &shown{data: t.TempDir()}
	file := filepath.Join(s.data, "web.yaml")
	if err := os.WriteFile(file, []byte(config), 0o600); err != nil {
		t.Fatal(err)
	}
	if s.agent, err = New(d.Site, Options{
		Data: s.data, Listen: "127.0.0.1:0", Version: "test", Log: slog.New(slog.DiscardHandler), Now: d.Clock.Now,
		WebConfig: file, Ready: func(at net.Addr) { ready <- at },
	}); err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithCancel(t.Context())
	ended := make(chan error, 1)
	go func() { ended <- s.agent.Run(ctx) }()
	t.Cleanup(func() {
		cancel()
		if err := <-ended; err != nil {
			t.Error(err)
		}
		d.Close()
	})
	select {
	case s.at = <-ready:
	case err := <-ended:
		ended <- nil
		t.Fatal(err)
	}
	return s
}

// look asks for a path, with or without a password; "" stands for none.
func (s *shown) look(t *testing.T, c *tls.Config, path, password string) (*http.Response, string, error) {
	t.Helper()
	req, err := http.NewRequestWithContext(t.Context(), http.MethodGet, s.agent.URL(s.at)+path, nil)
	if err != nil {
		t.Fatal(err)
	}
	if password != "" {
		req.SetBasicAuth("engineer", password)
	}
	transport := &http.Transport{TLSClientConfig: c, ForceAttemptHTTP2: true}
	defer transport.CloseIdleConnections()
	resp, err := (&http.Client{Transport: transport, Timeout: 20 * time.Second}).Do(req)
	if err != nil {
		return nil, "", err
	}
	defer resp.Body.Close()
	body, err := io.ReadAll(resp.Body)
	return resp, string(body), err
}

// lookedAt are a path of each kind: the metrics, the page, and what programs ask.
var lookedAt = []string{"/metrics", "/", "/healthz", reportPath + "?from=2020-01-01", warningsPath}

// With a web configuration all that is shown is behind certificate and password, while the
// command line needs neither.
func TestBehindTLSAndAPassword(t *testing.T) {
	a := authority.New(t, t.TempDir(), ".pem")
	a.Issue(t, "agent", "127.0.0.1")
	hash, err := bcrypt.GenerateFromPassword([]byte("right"), bcrypt.MinCost)
	if err != nil {
		t.Fatal(err)
	}
	s := show(t, "tls_server_config: {cert_file: "+a.Path("agent.pem")+", key_file: "+a.Path("agent.key")+"}\nbasic_auth_users: {engineer: '"+string(hash)+"'}\n")
	trusts := a.Client(t, "")
	for _, path := range lookedAt {
		for password, want := range map[string]int{"": 401, "wrong": 401, "right": 200} {
			resp, body, err := s.look(t, trusts, path, password)
			if err != nil {
				t.Fatal(err)
			}
			if resp.StatusCode != want && !(password == "right" && resp.StatusCode == http.StatusNotFound && strings.Contains(body, "holds no record")) {
				t.Errorf("%s with password %q: %d %.80s; want %d", path, password, resp.StatusCode, body, want)
			}
			if resp.TLS == nil || resp.TLS.Version < tls.VersionTLS12 || resp.ProtoMajor != 2 {
				t.Errorf("%s came by %s, %+v", path, resp.Proto, resp.TLS)
			}
			checkBounds(t, resp.Header)
		}
	}
	if _, _, err := s.look(t, authority.New(t, t.TempDir(), ".pem").Client(t, ""), "/", "right"); err == nil || !strings.Contains(err.Error(), "unknown authority") {
		t.Errorf("by another authority: %v", err)
	}
	before := peer(t, s, trusts)
	a.Issue(t, "agent", "127.0.0.1")
	if after := peer(t, s, trusts); bytes.Equal(before, after) {
		t.Error("the certificate that was renewed is not shown")
	}
	plain, err := http.Get("http://" + s.at.String() + "/metrics")
	if err != nil || plain.StatusCode != http.StatusBadRequest {
		t.Errorf("without TLS: %+v, %v", plain, err)
	}
	plain.Body.Close()
	checkCommandLine(t, s.data)
}

// peer is the certificate that the agent shows of itself.
func peer(t *testing.T, s *shown, c *tls.Config) []byte {
	t.Helper()
	resp, _, err := s.look(t, c, "/healthz", "right")
	if err != nil {
		t.Fatal(err)
	}
	return resp.TLS.PeerCertificates[0].Raw
}

// Clients that show a certificate of the authority need no password, and others are not heard.
func TestBehindCertificatesOfClients(t *testing.T) {
	a, other := authority.New(t, t.TempDir(), ".pem"), authority.New(t, t.TempDir(), ".pem")
	a.Issue(t, "agent", "127.0.0.1")
	a.Issue(t, "prometheus")
	other.Issue(t, "stranger")
	s := show(t, "tls_server_config: {cert_file: "+a.Path("agent.pem")+", key_file: "+a.Path("agent.key")+", client_ca_file: "+a.Path("ca.pem")+", client_auth_type: RequireAndVerifyClientCert}\n")
	if resp, _, err := s.look(t, a.Client(t, "prometheus"), "/metrics", ""); err != nil || resp.StatusCode != 200 {
		t.Errorf("%+v, %v", resp, err)
	}
	stranger := a.Client(t, "")
	stranger.Certificates = other.Client(t, "stranger").Certificates
	for what, c := range map[string]*tls.Config{"none": a.Client(t, ""), "another's": stranger} {
		if resp, _, err := s.look(t, c, "/metrics", ""); err == nil {
			t.Errorf("%s: %+v, %v", what, resp, err)
		}
	}
	checkCommandLine(t, s.data)
}

// checkCommandLine has an agent answer what the command line asks.
func checkCommandLine(t *testing.T, data string) {
	t.Helper()
	ctx := t.Context()
	done, err := Put(ctx, data, Order{Do: Shelve, Subject: "hot-water", Kind: "short", By: "J. Marsh", Reason: "wash"})
	if err != nil || len(done.Lines) != 1 {
		t.Errorf("shelve: %+v, %v", done, err)
	}
	// A demo that has just begun has no account; that it says so is an answer too.
	asks := map[string]func() error{
		"report":  func() error { _, err := Inquire(ctx, data, answer.Query{From: "2020-01-01", By: "month"}); return err },
		"explain": func() error { _, err := Explain(ctx, data, answer.Explanation{Load: "hot-water"}); return err },
		"export": func() error {
			return Extract(ctx, data, Selection{Tag: "TT-201"}, new(bytes.Buffer), func(Progress) {})
		},
		"events":   func() error { _, err := Happened(ctx, data, answer.EventQuery{Kind: "shelved"}); return err },
		"warnings": func() error { _, err := Warnings(ctx, data); return err },
	}
	for what, ask := range asks {
		if err := ask(); err != nil && !strings.Contains(err.Error(), "holds no record") {
			t.Errorf("%s: %v", what, err)
		}
	}
}

// checkBounds looks at what each answer says to browsers.
func checkBounds(t *testing.T, h http.Header) {
	t.Helper()
	for name, want := range doors.Bounds() {
		if got := h.Values(name); len(got) != 1 || got[0] != want {
			t.Errorf("%s: %q, want %q", name, got, want)
		}
	}
	if h.Get("Set-Cookie") != "" || h.Get(doors.RunHeader) != "" {
		t.Errorf("%v", h)
	}
}
