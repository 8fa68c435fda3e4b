package doors

import (
	"net"
	"net/http"
	"net/http/httptest"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"heatreeve/agent/access"
	"heatreeve/agent/answer"
	"heatreeve/ingest/authority"
)

// hashed is the bcrypt hash of "x", of the least cost.
const hashed = "$2a$04$b6TCJQskaDgiCa96fp3aHOP7WK2tuIWcDPqx7helT2HrY4LJEwc8O"

func webFile(t testing.TB, text string) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), "web.yaml")
	if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

func check(o Options) error {
	_, err := NewGuard(o)
	return err
}

// Beyond the loopback nobody is let in who is not asked, unless told so; what is wrong with a
// web configuration is told by its place.
func TestWhoMayLook(t *testing.T) {
	a := authority.New(t, t.TempDir(), ".pem")
	a.Issue(t, "agent", "127.0.0.1")
	users := "basic_auth_users: {engineer: '" + hashed + "'}\n"
	server := "tls_server_config: {cert_file: " + a.Path("agent.pem") + ", key_file: " + a.Path("agent.key")
	clients := server + ", client_ca_file: " + a.Path("ca.pem") + ", client_auth_type: "
	if err := os.WriteFile(a.Path("empty.pem"), nil, 0o600); err != nil {
		t.Fatal(err)
	}
	const nobody = "nobody would be asked who they are; give --web-config FILE"
	for _, tt := range []struct {
		listen, config string
		openly         bool
		says           string // "" where it is right
	}{
		{"127.0.0.1:9617", "", false, ""},
		{"127.3.2.1:0", "", false, ""},
		{"[::1]:9617", "", false, ""},
		{"LocalHost:9617", "", false, ""},
		{"[::ffff:127.0.0.1]:9617", "", false, ""},
		{":9617", "", false, nobody},
		{"0.0.0.0:9617", "", false, nobody},
		{"[::]:9617", "", false, nobody},
		{"192.0.2.7:9617", "", false, nobody}, // RFC 5737
		{"localhost.example:9617", "", false, nobody},
		{":9617", "", true, ""},
		{":9617", users, false, ""},
		{":9617", server + "}\n" + users, false, ""},
		{":9617", server + "}\n", false, nobody}, // it hides, but lets everybody in
		{":9617", server + "}\n", true, ""},
		{":9617", clients + "RequireAndVerifyClientCert}\n", false, ""},
		{":9617", clients + "RequireAnyClientCert}\n", false, `client_auth_type is "RequireAnyClientCert"; allowed are`},
		{":9617", clients + "NoClientCert}\n", false, "lets everybody in"},
		{":9617", server + ", client_auth_type: RequireAndVerifyClientCert}\n", false, "client_ca_file is missing"}, // any authority of the system
		{":9617", server + ", min_version: TLS10}\n" + users, false, `min_version is "TLS10"; allowed are TLS12 and TLS13`},
		{"127.0.0.1:9617", "basic_auth_users: {engineer: secret, other: '" + hashed + "', second: $2b$}\n", false, `basic_auth_users: what stands for "engineer", "second" is no bcrypt hash`},
		{"127.0.0.1:9617", "basic_auth_user: {}\n", false, "line 1: field basic_auth_user not found"},
		{"127.0.0.1:9617", "http_server_config: {headers: {Server: x}}\n", false, "line 1: field http_server_config not found"},
		{"127.0.0.1:9617", "tls_server_config: {cert_file: nowhere.pem, key_file: nowhere.key}\n", false, "nowhere.pem"},
		{"127.0.0.1:9617", "tls_server_config: {min_version: TLS13}\n", false, "tls_server_config: cert_file is missing"},
		{"127.0.0.1:9617", "tls_server_config: {cert_file: " + a.Path("agent.pem") + "}\n", false, "tls_server_config: key_file is missing"},
		{"127.0.0.1:9617", server + ", client_ca_file: " + a.Path("empty.pem") + ", client_auth_type: RequireAndVerifyClientCert}\n", false, "client_ca_file holds no certificate"},
		{"9617", "", false, `--listen "9617": missing port in address; write host:port`},
	} {
		o := Options{Listen: tt.listen, Openly: tt.openly}
		if tt.config != "" {
			o.WebConfig = webFile(t, tt.config)
		}
		err := check(o)
		if (err == nil) != (tt.says == "") || err != nil && !strings.Contains(err.Error(), tt.says) {
			t.Errorf("%+v: %v, want ...%q...", tt, err, tt.says)
		}
		if err != nil && tt.config != "" && tt.says != nobody && !strings.Contains(err.Error(), o.WebConfig) {
			t.Errorf("%v does not name the file", err)
		}
	}
	if err := check(Options{Listen: "127.0.0.1:0", WebConfig: a.Path("nowhere.yaml")}); err == nil || !strings.Contains(err.Error(), "nowhere.yaml") {
		t.Errorf("no file: %v", err)
	}
}

// What everybody may ask is answered with bounds for the browser, to GET and HEAD alone, and
// without passwords by the names of the loopback alone.
func TestFrontOfAll(t *testing.T) {
	said := http.HandlerFunc(func(w http.ResponseWriter, _ *http.Request) { w.Write([]byte("answer")) })
	asks := &Guard{terms: access.Terms{Password: true}}
	for _, tt := range []struct {
		guard        *Guard
		method, host string
		want         int
	}{
		{&Guard{}, "GET", "127.0.0.1:9617", 200},
		{&Guard{}, "HEAD", "127.0.0.1", 200},
		{&Guard{}, "GET", "localhost:9617", 200},
		{&Guard{}, "GET", "LOCALHOST", 200},
		{&Guard{}, "GET", "[::1]:9617", 200},
		{&Guard{}, "GET", "[::1]", 200},
		{&Guard{}, "GET", "heat.example:9617", 421}, // a name that somebody may lead here
		{&Guard{}, "GET", "localhost.example", 421},
		{&Guard{}, "GET", "127.0.0.1.example:80", 421},
		{&Guard{}, "GET", "192.0.2.7:9617", 421},
		{&Guard{}, "GET", "0.0.0.0:9617", 421},
		{&Guard{}, "GET", "", 421},
		{&Guard{openly: true}, "GET", "heat.example:9617", 200},
		{asks, "GET", "heat.example:9617", 200},
		{&Guard{}, "POST", "127.0.0.1:9617", 405},
		{asks, "PUT", "heat.example", 405},
		{&Guard{openly: true}, "OPTIONS", "heat.example", 405},
		{&Guard{}, "TRACE", "127.0.0.1:9617", 405},
	} {
		r := httptest.NewRequest(tt.method, "/", nil)
		r.Host = tt.host
		w := httptest.NewRecorder()
		tt.guard.front(said).ServeHTTP(w, r)
		if w.Code != tt.want {
			t.Errorf("%s of %q by %+v: %d %s, want %d", tt.method, tt.host, tt.guard, w.Code, w.Body, tt.want)
		}
		if w.Code == 421 && !strings.Contains(w.Body.String(), "--web-config") {
			t.Errorf("%s does not say what to do", w.Body)
		}
		checkBounds(t, w.Header())
		if w.Code < 400 {
			continue
		}
		r.URL.Path, w = answer.Path+"report", httptest.NewRecorder()
		tt.guard.front(said).ServeHTTP(w, r)
		if w.Code != tt.want || w.Header().Get("Content-Type") != answer.ProblemType {
			t.Errorf("%s of the API at %q: %d %v", tt.method, tt.host, w.Code, w.Header())
		}
		checkBounds(t, w.Header())
	}
}

// checkBounds looks at what each answer says to browsers.
func checkBounds(t *testing.T, h http.Header) {
	t.Helper()
	for name, want := range map[string]string{
		"Content-Security-Policy":      "default-src 'none'; script-src 'self'; style-src 'self'; img-src 'self'; connect-src 'self'; form-action 'self'; base-uri 'none'; frame-ancestors 'none'",
		"X-Content-Type-Options":       "nosniff",
		"Referrer-Policy":              "no-referrer",
		"Cross-Origin-Resource-Policy": "same-origin",
		"Cross-Origin-Opener-Policy":   "same-origin",
	} {
		if got := h.Values(name); len(got) != 1 || got[0] != want {
			t.Errorf("%s: %q, want %q", name, got, want)
		}
	}
	if h.Get("Set-Cookie") != "" || h.Get(RunHeader) != "" {
		t.Errorf("%v", h)
	}
}

func TestWhereToLook(t *testing.T) {
	for _, tt := range []struct {
		tls      bool
		at, want string
	}{
		{false, "127.0.0.1:9617", "http://127.0.0.1:9617"},
		{true, "[::1]:80", "https://[::1]:80"},
		{true, "[::]:9617", "https://localhost:9617"},
		{false, "0.0.0.0:9617", "http://localhost:9617"},
	} {
		at, err := net.ResolveTCPAddr("tcp", tt.at)
		if err != nil {
			t.Fatal(err)
		}
		g := &Guard{terms: access.Terms{TLS: tt.tls}}
		if got := g.URL(at); got != tt.want {
			t.Errorf("%s: %s, want %s", tt.at, got, tt.want)
		}
	}
}
