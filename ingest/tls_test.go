package ingest

import (
	"crypto/tls"
	"encoding/pem"
	"heatreeve/ingest/authority"
	"os"
	"strings"
	"testing"
)

// plantAuthority has issued what a broker and a client need.
func plantAuthority(t *testing.T) *authority.Authority {
	t.Helper()
	a := authority.New(t, t.TempDir(), ".pem")
	a.Issue(t, "broker", "broker.plant")
	a.Issue(t, "client")
	return a
}

// checkTLS holds a session to what a broker on address allows that wants client
// certificates of a.
func checkTLS(t *testing.T, a *authority.Authority, url string) {
	good := Options{URL: url, CAFile: a.Path("ca.pem"), CertFile: a.Path("client.pem"), KeyFile: a.Path("client.key"), ServerName: "broker.plant"}
	other := authority.New(t, t.TempDir(), ".pem")
	for name, tt := range map[string]struct {
		spoil func(*Options)
		want  string // in the error; "": connects
	}{
		"all right":             {func(*Options) {}, ""},
		"other server name":     {func(o *Options) { o.ServerName = "other.plant" }, "other.plant"},
		"address as the name":   {func(o *Options) { o.ServerName = "" }, "the certificate is for broker.plant: give that as server_name"},
		"other authority":       {func(o *Options) { o.CAFile = other.Path("ca.pem") }, "give the certificates of its authority as ca"},
		"system's authorities":  {func(o *Options) { o.CAFile = "" }, "unknown authority"},
		"no client certificate": {func(o *Options) { o.CertFile, o.KeyFile = "", "" }, "certificate"},
	} {
		t.Run(name, func(t *testing.T) {
			o := good
			tt.spoil(&o)
			s, _, _ := start(t, []Tag{number("a")}, o)
			if tt.want == "" {
				ready(t, s)
				return
			}
			eventually(t, "a failure", func() bool { return s.Stats().Failures > 0 })
			if st := s.Stats(); st.Connected || !strings.Contains(st.LastError, tt.want) {
				t.Errorf("stats %+v; want an error with %q", st, tt.want)
			}
		})
	}
}

func TestTLS(t *testing.T) {
	a := plantAuthority(t)
	pair, err := tls.LoadX509KeyPair(a.Path("broker.pem"), a.Path("broker.key"))
	if err != nil {
		t.Fatal(err)
	}
	pool, err := readPool(a.Path("ca.pem"))
	if err != nil {
		t.Fatal(err)
	}
	_, address := serve(t, &tls.Config{Certificates: []tls.Certificate{pair}, ClientCAs: pool, ClientAuth: tls.RequireAndVerifyClientCert})
	checkTLS(t, a, "mqtts://"+address)
}

// A broker that speaks TLS 1.2 at most is refused where 1.3 is the least.
func TestLeastTLS(t *testing.T) {
	a := plantAuthority(t)
	pair, err := tls.LoadX509KeyPair(a.Path("broker.pem"), a.Path("broker.key"))
	if err != nil {
		t.Fatal(err)
	}
	for most, want := range map[uint16]bool{tls.VersionTLS12: false, tls.VersionTLS13: true} {
		_, address := serve(t, &tls.Config{Certificates: []tls.Certificate{pair}, MaxVersion: most})
		s, _, stop := start(t, []Tag{number("a")}, Options{URL: "mqtts://" + address, CAFile: a.Path("ca.pem"), ServerName: "broker.plant", MinTLS: tls.VersionTLS13})
		eventually(t, "an outcome", func() bool { st := s.Stats(); return st.Failures > 0 || st.Connected })
		if st := s.Stats(); st.Connected != want || !want && !strings.Contains(st.LastError, "protocol version") {
			t.Errorf("broker with %s: %+v; want connected %t", tls.VersionName(most), st, want)
		}
		stop()
	}
}

func TestOldTLSIsRefused(t *testing.T) {
	a := plantAuthority(t)
	pair, err := tls.LoadX509KeyPair(a.Path("broker.pem"), a.Path("broker.key"))
	if err != nil {
		t.Fatal(err)
	}
	_, address := serve(t, &tls.Config{Certificates: []tls.Certificate{pair}, MinVersion: tls.VersionTLS10, MaxVersion: tls.VersionTLS11})
	s, _, _ := start(t, []Tag{number("a")}, Options{URL: "mqtts://" + address, CAFile: a.Path("ca.pem"), ServerName: "broker.plant"})
	eventually(t, "a failure", func() bool { return s.Stats().Failures > 0 })
	if got := s.Stats().LastError; !strings.Contains(got, "protocol version") {
		t.Errorf("last error %q; want it to name the protocol version", got)
	}
}

// A certificate that was replaced, because it ran out, is used without a
// restart.
func TestCertificatesAreReadAtEachAttempt(t *testing.T) {
	a := plantAuthority(t)
	pair, err := tls.LoadX509KeyPair(a.Path("broker.pem"), a.Path("broker.key"))
	if err != nil {
		t.Fatal(err)
	}
	_, address := serve(t, &tls.Config{Certificates: []tls.Certificate{pair}})
	right, err := os.ReadFile(a.Path("ca.pem"))
	if err != nil {
		t.Fatal(err)
	}
	other := authority.New(t, t.TempDir(), ".pem")
	s, _, _ := start(t, []Tag{number("a")}, Options{URL: "mqtts://" + address, CAFile: other.Path("ca.pem"), ServerName: "broker.plant"})
	eventually(t, "a failure", func() bool { return s.Stats().Failures > 0 })
	if err := os.WriteFile(other.Path("ca.pem"), right, 0o600); err != nil {
		t.Fatal(err)
	}
	ready(t, s)
}

// A client certificate that the broker no longer takes is replaced without a restart:
// first its file, for a moment without the key that goes with it, then the key.
func TestClientCertificateIsReplaced(t *testing.T) {
	a := plantAuthority(t)
	pair, err := tls.LoadX509KeyPair(a.Path("broker.pem"), a.Path("broker.key"))
	if err != nil {
		t.Fatal(err)
	}
	pool, err := readPool(a.Path("ca.pem"))
	if err != nil {
		t.Fatal(err)
	}
	_, address := serve(t, &tls.Config{Certificates: []tls.Certificate{pair}, ClientCAs: pool, ClientAuth: tls.RequireAndVerifyClientCert})
	old := authority.New(t, t.TempDir(), ".pem")
	old.Issue(t, "client")
	s, _, _ := start(t, []Tag{number("a")}, Options{
		URL: "mqtts://" + address, CAFile: a.Path("ca.pem"), ServerName: "broker.plant", CertFile: old.Path("client.pem"), KeyFile: old.Path("client.key"),
	})
	eventually(t, "a failure", func() bool { return s.Stats().Failures > 0 })
	for _, file := range []string{"client.pem", "client.key"} {
		text, err := os.ReadFile(a.Path(file))
		if err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(old.Path(file), text, 0o600); err != nil {
			t.Fatal(err)
		}
		if file == "client.pem" {
			eventually(t, "a mismatch", func() bool { return strings.Contains(s.Stats().LastError, "private key does not match") })
		}
	}
	ready(t, s)
}

// A key that wants a password is told as such, with the way out.
func TestEncryptedKey(t *testing.T) {
	a := plantAuthority(t)
	secret := pem.EncodeToMemory(&pem.Block{Type: "ENCRYPTED PRIVATE KEY", Bytes: []byte("of which nothing can be read")})
	if err := os.WriteFile(a.Path("client.key"), secret, 0o600); err != nil {
		t.Fatal(err)
	}
	o := Options{URL: "mqtts://broker.plant", CAFile: a.Path("ca.pem"), CertFile: a.Path("client.pem"), KeyFile: a.Path("client.key")}
	if _, err := o.tlsConfig("broker.plant"); err == nil || !strings.Contains(err.Error(), a.Path("client.key")) || !strings.Contains(err.Error(), "is encrypted") || !strings.Contains(err.Error(), "openssl pkey") {
		t.Errorf("%v", err)
	}
}
