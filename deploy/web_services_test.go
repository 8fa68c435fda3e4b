//go:build services

package deploy

import (
	"crypto/tls"
	"fmt"
	"heatreeve/ingest/authority"
	"io"
	"net/http"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"golang.org/x/crypto/bcrypt"
)

// TestPrometheusScrapesBehindAPassword puts the files together: the service as the drop-in starts it, for all addresses,
// with the web configuration, and Prometheus with the lines that the scrape configuration has as a comment. Who has no
// password is refused, and the command line needs none.
func TestPrometheusScrapesBehindAPassword(t *testing.T) {
	dir := t.TempDir()
	const password = "an invented one"
	hash, err := bcrypt.GenerateFromPassword([]byte(password), bcrypt.MinCost)
	if err != nil {
		t.Fatal(err)
	}
	authority.New(t, dir, ".crt").Issue(t, "web", "127.0.0.1")
	port := freePort(t)
	scrape := moved(t, scrapeBehindAPassword(t), "127.0.0.1:9617", "127.0.0.1:"+port, "interval: 15s", "interval: 1s", "timeout: 10s", "timeout: 1s",
		"plant-ca.crt", "ca.crt", "gateway.plant.example", "127.0.0.1")
	for file, text := range map[string]string{
		"site.yaml":           fmt.Sprintf(site, "url: mqtt://127.0.0.1:"+freePort(t)),
		"web.yaml":            regexp.MustCompile(`(?m)^  prometheus: .*$`).ReplaceAllLiteralString(read(t, "web/web.yaml"), "  prometheus: "+string(hash)),
		"prometheus.yml":      scrape,
		"heatreeve.rules.yml": read(t, "prometheus/heatreeve.rules.yml"),
		"heatreeve-password":  password + "\n",
	} {
		if err := os.WriteFile(filepath.Join(dir, file), []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
	}
	must(t, "promtool", "check", "web-config", filepath.Join(dir, "web.yaml"))
	must(t, "promtool", "check", "config", filepath.Join(dir, "prometheus.yml"))

	starts := parseUnit(t, read(t, "systemd/heatreeve.service.d/web.conf"))["Service.ExecStart"]
	line := strings.Join(strings.Fields(starts[1]), "\n")
	args := strings.Split(moved(t, line, "/usr/bin/heatreeve", native(t), "/etc/heatreeve/site.yaml", filepath.Join(dir, "site.yaml"),
		"${STATE_DIRECTORY}", filepath.Join(dir, "state"), "${CREDENTIALS_DIRECTORY}", dir, ":9617", ":"+port), "\n")
	agent := start(t, exec.Command(args[0], args[1:]...))
	agent.listening(t, "127.0.0.1:"+port)
	checkRefusal(t, "127.0.0.1:"+port)

	address := "127.0.0.1:" + freePort(t)
	server := start(t, exec.Command(program(t, "prometheus"), "--config.file="+filepath.Join(dir, "prometheus.yml"),
		"--storage.tsdb.path="+filepath.Join(dir, "data"), "--web.listen-address="+address))
	server.eventually(t, func() error {
		var data struct {
			Result []struct{ Metric map[string]string }
		}
		err := ask(address, "/api/v1/query?query=heatreeve_build_info", &data)
		if err == nil && len(data.Result) != 1 {
			err = fmt.Errorf("scraped %+v", data)
		}
		return err
	})
	agent.eventually(t, func() error {
		out, err := output(t, native(t), "warnings", "--data", filepath.Join(dir, "state"))
		if err != nil {
			err = fmt.Errorf("%w: %s", err, out)
		}
		return err
	})
}

// checkRefusal asks without TLS, and by TLS without a password.
func checkRefusal(t *testing.T, address string) {
	t.Helper()
	transport := &http.Transport{TLSClientConfig: &tls.Config{InsecureSkipVerify: true}}
	defer transport.CloseIdleConnections()
	for url, want := range map[string]int{"http://%s/metrics": 400, "https://%s/metrics": 401, "https://%s/": 401, "https://%s/healthz": 401} {
		r, err := (&http.Client{Transport: transport}).Get(fmt.Sprintf(url, address))
		if err != nil {
			t.Fatal(err)
		}
		body, err := io.ReadAll(r.Body)
		r.Body.Close()
		if err != nil || r.StatusCode != want || strings.Contains(string(body), "heatreeve_") {
			t.Errorf("%s: %d %s, %v", url, r.StatusCode, body, err)
		}
	}
}

// TestSystemdReadsTheDropIn has systemd read it beside the unit.
func TestSystemdReadsTheDropIn(t *testing.T) {
	text := read(t, "systemd/heatreeve.service.d/web.conf")
	for _, tt := range []struct {
		text string
		good bool
	}{
		{moved(t, text, "/usr/bin/heatreeve", "/bin/true"), true},
		{moved(t, text, "/usr/bin/heatreeve", "/bin/true", "LoadCredential=web.yaml", "LoadCredentials=web.yaml"), false},
	} {
		path := writeUnit(t)
		if err := os.Mkdir(path+".d", 0o755); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(filepath.Join(path+".d", "web.conf"), []byte(tt.text), 0o644); err != nil {
			t.Fatal(err)
		}
		if out := verifyUnit(t, path); (out == "") != tt.good {
			t.Errorf("systemd-analyze verify: %q; good: %v", out, tt.good)
		}
	}
}
