package deploy

import (
	"crypto/x509"
	"encoding/pem"
	"net/http/httptest"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"golang.org/x/crypto/bcrypt"

	"heatreeve/agent"
)

// webFiles are what the web configuration names, beside it.
var webFiles = []string{"web.crt", "web.key"}

// checkWebConfig has the agent read the web configuration with the files that it names, for an address that everybody
// reaches, and wants each password to be hashed well.
func checkWebConfig(t *testing.T, file string) {
	text := read(t, file)
	dir := t.TempDir()
	path := filepath.Join(dir, filepath.Base(file))
	if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	o := agent.Options{Listen: ":9617", WebConfig: path}
	if err := agent.CheckLooking(o); err == nil || !strings.Contains(err.Error(), webFiles[0]) {
		t.Errorf("without %s: %v", webFiles[0], err)
	}
	writeWebFiles(t, dir)
	if err := agent.CheckLooking(o); err != nil {
		t.Error(err)
	}
	var f struct {
		Server map[string]string `yaml:"tls_server_config"`
		Users  map[string]string `yaml:"basic_auth_users"`
	}
	decode(t, file, &f)
	for name, hash := range f.Users {
		// The cost that is commonly taken for a password to be slow to guess: 10, 2^10 rounds (common practice, no source).
		if cost, err := bcrypt.Cost([]byte(hash)); err != nil || cost < 10 {
			t.Errorf("%s: a hash of cost %d, %v", name, cost, err)
		}
	}
	if _, ok := f.Users["prometheus"]; !ok || len(f.Users) < 2 {
		t.Errorf("users %v; want one for Prometheus and one for people", f.Users)
	}
}

// writeWebFiles leaves a certificate and its key.
func writeWebFiles(t *testing.T, dir string) {
	t.Helper()
	s := httptest.NewTLSServer(nil)
	defer s.Close()
	pair := s.TLS.Certificates[0]
	key, err := x509.MarshalPKCS8PrivateKey(pair.PrivateKey)
	if err != nil {
		t.Fatal(err)
	}
	for i, b := range []pem.Block{{Type: "CERTIFICATE", Bytes: pair.Certificate[0]}, {Type: "PRIVATE KEY", Bytes: key}} {
		if err := os.WriteFile(filepath.Join(dir, webFiles[i]), pem.EncodeToMemory(&b), 0o600); err != nil {
			t.Fatal(err)
		}
	}
}

// checkWebDropIn wants the command of the service, but for where it listens, and all that the web configuration names
// among its credentials.
func checkWebDropIn(t *testing.T, file string) {
	u := parseUnit(t, read(t, file))
	starts := u["Service.ExecStart"]
	if len(starts) != 2 || starts[0] != "" {
		t.Fatalf("ExecStart = %q; want that of the service cleared, and one", starts)
	}
	service := parseUnit(t, read(t, "systemd/heatreeve.service")).execStart()
	want := append(service[:len(service)-1], ":9617", "--web-config", "${CREDENTIALS_DIRECTORY}/web.yaml")
	if got := strings.Fields(starts[1]); !slices.Equal(got, want) {
		t.Errorf("ExecStart = %q; want %q", got, want)
	}
	var credentials []string
	for _, name := range append([]string{"web.yaml"}, webFiles...) {
		credentials = append(credentials, name+":/etc/heatreeve/"+name)
	}
	if got := u["Service.LoadCredential"]; !slices.Equal(got, credentials) {
		t.Errorf("LoadCredential = %q; want %q", got, credentials)
	}
}

// TestScrapeBehindAPassword reads what the scrape configuration has as a comment for agents with a web configuration.
func TestScrapeBehindAPassword(t *testing.T) {
	text := scrapeBehindAPassword(t)
	for _, want := range []string{"\n    scheme: https\n", "\n    basic_auth: {username: prometheus, password_file: ", "\n    tls_config: {ca_file: "} {
		if !strings.Contains(text, want) {
			t.Errorf("no %q in\n%s", want, text)
		}
	}
}

// scrapeBehindAPassword is the scrape configuration with its last three comments in force.
func scrapeBehindAPassword(t *testing.T) string {
	t.Helper()
	text := read(t, "prometheus/prometheus.yml")
	for _, key := range []string{"scheme", "tls_config", "basic_auth"} {
		text = strings.Replace(text, "    # "+key+": ", "    "+key+": ", 1)
	}
	return text
}
