package access

import (
	"context"
	"crypto/tls"
	"crypto/x509"
	"fmt"
	"log/slog"
	"net/http"
	"net/http/httptest"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"golang.org/x/crypto/bcrypt"
)

// hashed is a bcrypt hash, the cheapest that there is.
func hashed(t testing.TB, password string) string {
	t.Helper()
	h, err := bcrypt.GenerateFromPassword([]byte(password), bcrypt.MinCost)
	if err != nil {
		t.Fatal(err)
	}
	return string(h)
}

// written is a door whose file can be written anew.
type written struct {
	path string
	http.Handler
	t *testing.T
}

func newDoor(t *testing.T, text string) *written {
	t.Helper()
	d := &written{path: filepath.Join(t.TempDir(), "web.yaml"), t: t}
	d.write(text)
	began, err := Check(d.path)
	if err != nil {
		t.Fatal(err)
	}
	next := http.HandlerFunc(func(w http.ResponseWriter, _ *http.Request) { fmt.Fprint(w, "answer") })
	refuse := func(w http.ResponseWriter, _ *http.Request, status int, why string) { http.Error(w, why, status) }
	d.Handler = Door(d.path, began, next, refuse, slog.New(slog.DiscardHandler))
	return d
}

func (d *written) write(text string) {
	d.t.Helper()
	if err := os.WriteFile(d.path, []byte(text), 0o600); err != nil {
		d.t.Fatal(err)
	}
}

// ask is what somebody gets who gives name and password; "" for none.
func (d *written) ask(name, password string, changes ...func(*http.Request)) *httptest.ResponseRecorder {
	r := httptest.NewRequest(http.MethodGet, "/", nil)
	if name != "" {
		r.SetBasicAuth(name, password)
	}
	for _, change := range changes {
		change(r)
	}
	w := httptest.NewRecorder()
	d.ServeHTTP(w, r)
	return w
}

func TestPasswords(t *testing.T) {
	d := newDoor(t, "basic_auth_users: {engineer: '"+hashed(t, "right")+"', other: '"+hashed(t, "theirs")+"'}\n")
	for range 2 { // the second time from what is known
		for _, tt := range []struct {
			name, password string
			want           int
		}{
			{"engineer", "right", 200},
			{"other", "theirs", 200},
			{"engineer", "theirs", 401},
			{"engineer", "", 401},
			{"Engineer", "right", 401},
			{"nobody", "right", 401},
			{"nobody", "", 401},
			{"engineer", strings.Repeat("x", 100), 401}, // more than bcrypt takes
			{"", "", 401},
		} {
			w := d.ask(tt.name, tt.password)
			if w.Code != tt.want || (tt.want == 200) != (w.Body.String() == "answer") {
				t.Errorf("%q with %q: %d %s; want %d", tt.name, tt.password, w.Code, w.Body, tt.want)
			}
			if challenge := w.Header().Get("WWW-Authenticate"); (tt.want == 401) != strings.HasPrefix(challenge, "Basic realm=") { // RFC 7617, 2
				t.Errorf("%q with %q: challenge %q", tt.name, tt.password, challenge)
			}
		}
	}
}

// The file is read anew: a password that was changed is asked for, though the old one was known,
// and a file that asks for nothing any more does not open what it has closed.
func TestFileThatChanges(t *testing.T) {
	first := "basic_auth_users: {engineer: '" + hashed(t, "first") + "'}\n"
	d := newDoor(t, first)
	if w := d.ask("engineer", "first"); w.Code != 200 {
		t.Fatalf("%d %s", w.Code, w.Body)
	}
	for _, tt := range []struct {
		text, password string
		want           int
	}{
		{"basic_auth_users: {engineer: '" + hashed(t, "second") + "'}\n", "first", 401},
		{"basic_auth_users: {engineer: '" + hashed(t, "second") + "'}\n", "second", 200},
		{"basic_auth_users: {other: '" + hashed(t, "second") + "'}\n", "second", 401},
		{"{}\n", "second", 503},
		{"", "second", 503},
		{"basic_auth_users: {}\n", "second", 503},
		{"basic_auth_users: [\n", "second", 503},
		{"tls_server_config: {client_auth_type: RequireAndVerifyClientCert}\n", "second", 401}, // nobody has shown one
		{first, "first", 200},
	} {
		d.write(tt.text)
		if w := d.ask("engineer", tt.password); w.Code != tt.want {
			t.Errorf("%q: %d %s, want %d", tt.text, w.Code, w.Body, tt.want)
		}
	}
	if err := os.Remove(d.path); err != nil {
		t.Fatal(err)
	}
	if w := d.ask("engineer", "first"); w.Code != 503 {
		t.Errorf("without its file: %d %s", w.Code, w.Body)
	}
}

// Where certificates are asked for, a connection counts that has shown one, and needs the
// password beside it where there is one.
func TestCertificateAndPassword(t *testing.T) {
	d := newDoor(t, "basic_auth_users: {engineer: '"+hashed(t, "right")+"'}\n")
	d.write("tls_server_config: {client_auth_type: RequireAndVerifyClientCert}\nbasic_auth_users: {engineer: '" + hashed(t, "right") + "'}\n")
	verified := func(r *http.Request) {
		r.TLS = &tls.ConnectionState{VerifiedChains: [][]*x509.Certificate{{new(x509.Certificate)}}}
	}
	shown := func(r *http.Request) {
		r.TLS = &tls.ConnectionState{PeerCertificates: []*x509.Certificate{new(x509.Certificate)}}
	}
	for _, tt := range []struct {
		password string
		change   func(*http.Request)
		want     int
	}{
		{"right", verified, 200},
		{"wrong", verified, 401},
		{"right", shown, 401},
		{"right", func(*http.Request) {}, 401},
	} {
		if w := d.ask("engineer", tt.password, tt.change); w.Code != tt.want {
			t.Errorf("%+v: %d %s", tt, w.Code, w.Body)
		}
	}
}

// One password is hashed at a time, and nobody who is known waits for that; who has gone away
// meanwhile is not looked at.
func TestOneHashAtATime(t *testing.T) {
	d := newDoor(t, "basic_auth_users: {engineer: '"+hashed(t, "right")+"'}\n")
	if w := d.ask("engineer", "right"); w.Code != 200 {
		t.Fatalf("%d %s", w.Code, w.Body)
	}
	inner := d.Handler.(*door)
	inner.turn <- struct{}{} // somebody is at it
	if w := d.ask("engineer", "right"); w.Code != 200 {
		t.Errorf("known: %d %s", w.Code, w.Body)
	}
	gone, cancel := context.WithCancel(t.Context())
	cancel()
	if w := d.ask("engineer", "wrong", func(r *http.Request) { *r = *r.WithContext(gone) }); w.Code != 401 {
		t.Errorf("gone: %d %s", w.Code, w.Body)
	}
	<-inner.turn
	for i := range 3 {
		d.ask("nobody", fmt.Sprint(i))
	}
	if n := len(inner.known); n != 1 {
		t.Errorf("%d are kept", n)
	}
}

// A start that asks for nothing leaves everything as it is.
func TestNoDoor(t *testing.T) {
	w := httptest.NewRecorder()
	Door("nowhere.yaml", Terms{TLS: true}, http.NotFoundHandler(), nil, nil).ServeHTTP(w, httptest.NewRequest("GET", "/", nil))
	if w.Code != http.StatusNotFound {
		t.Errorf("%d", w.Code)
	}
}

// The hash that stands for no user is one, so that a wrong name costs what a wrong password does.
func TestNobodyIsAHash(t *testing.T) {
	if cost, err := bcrypt.Cost([]byte(nobody)); err != nil || cost != 10 {
		t.Errorf("cost %d, %v", cost, err)
	}
}
