package ingest

import (
	"crypto/ecdsa"
	"crypto/elliptic"
	"crypto/rand"
	"crypto/tls"
	"crypto/x509"
	"crypto/x509/pkix"
	"encoding/pem"
	"math/big"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

// authority is a certificate authority in a folder: ca.pem, and a pair of
// name.pem and name.key for each certificate it issued.
type authority struct {
	dir  string
	cert *x509.Certificate
	key  *ecdsa.PrivateKey
}

func newAuthority(t *testing.T) *authority {
	t.Helper()
	a := &authority{dir: t.TempDir()}
	template := &x509.Certificate{
		SerialNumber: big.NewInt(1), Subject: pkix.Name{CommonName: "test authority"}, IsCA: true, BasicConstraintsValid: true,
		NotBefore: time.Now().Add(-time.Hour), NotAfter: time.Now().Add(time.Hour), KeyUsage: x509.KeyUsageCertSign,
	}
	a.key = newKey(t)
	der, err := x509.CreateCertificate(rand.Reader, template, template, a.key.Public(), a.key)
	if err != nil {
		t.Fatal(err)
	}
	if a.cert, err = x509.ParseCertificate(der); err != nil {
		t.Fatal(err)
	}
	a.write(t, "ca.pem", "CERTIFICATE", der)
	return a
}

func newKey(t *testing.T) *ecdsa.PrivateKey {
	t.Helper()
	key, err := ecdsa.GenerateKey(elliptic.P256(), rand.Reader)
	if err != nil {
		t.Fatal(err)
	}
	return key
}

func (a *authority) path(name string) string { return filepath.Join(a.dir, name) }

func (a *authority) write(t *testing.T, name, kind string, der []byte) {
	t.Helper()
	text := pem.EncodeToMemory(&pem.Block{Type: kind, Bytes: der})
	if err := os.WriteFile(a.path(name), text, 0o600); err != nil {
		t.Fatal(err)
	}
}

// issue makes a certificate for the host name broker.plant, or for a client.
func (a *authority) issue(t *testing.T, name string, use x509.ExtKeyUsage) {
	t.Helper()
	key := newKey(t)
	der, err := x509.CreateCertificate(rand.Reader, &x509.Certificate{
		SerialNumber: big.NewInt(2), Subject: pkix.Name{CommonName: name}, DNSNames: []string{"broker.plant"},
		NotBefore: time.Now().Add(-time.Hour), NotAfter: time.Now().Add(time.Hour), ExtKeyUsage: []x509.ExtKeyUsage{use},
	}, a.cert, key.Public(), a.key)
	if err != nil {
		t.Fatal(err)
	}
	a.write(t, name+".pem", "CERTIFICATE", der)
	secret, err := x509.MarshalPKCS8PrivateKey(key)
	if err != nil {
		t.Fatal(err)
	}
	a.write(t, name+".key", "PRIVATE KEY", secret)
}

// plantAuthority has issued what a broker and a client need.
func plantAuthority(t *testing.T) *authority {
	t.Helper()
	a := newAuthority(t)
	a.issue(t, "broker", x509.ExtKeyUsageServerAuth)
	a.issue(t, "client", x509.ExtKeyUsageClientAuth)
	return a
}

// checkTLS holds a session to what a broker on address allows that wants client
// certificates of a.
func checkTLS(t *testing.T, a *authority, url string) {
	good := Options{URL: url, CAFile: a.path("ca.pem"), CertFile: a.path("client.pem"), KeyFile: a.path("client.key"), ServerName: "broker.plant"}
	other := newAuthority(t)
	for name, tt := range map[string]struct {
		spoil func(*Options)
		want  string // in the error; "": connects
	}{
		"all right":             {func(*Options) {}, ""},
		"other server name":     {func(o *Options) { o.ServerName = "other.plant" }, "other.plant"},
		"address as the name":   {func(o *Options) { o.ServerName = "" }, "the certificate is for broker.plant: give that as server_name"},
		"other authority":       {func(o *Options) { o.CAFile = other.path("ca.pem") }, "give the certificates of its authority as ca"},
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
	pair, err := tls.LoadX509KeyPair(a.path("broker.pem"), a.path("broker.key"))
	if err != nil {
		t.Fatal(err)
	}
	pool, err := readPool(a.path("ca.pem"))
	if err != nil {
		t.Fatal(err)
	}
	_, address := serve(t, &tls.Config{Certificates: []tls.Certificate{pair}, ClientCAs: pool, ClientAuth: tls.RequireAndVerifyClientCert})
	checkTLS(t, a, "mqtts://"+address)
}

// A broker that speaks TLS 1.2 at most is refused where 1.3 is the least.
func TestLeastTLS(t *testing.T) {
	a := plantAuthority(t)
	pair, err := tls.LoadX509KeyPair(a.path("broker.pem"), a.path("broker.key"))
	if err != nil {
		t.Fatal(err)
	}
	for most, want := range map[uint16]bool{tls.VersionTLS12: false, tls.VersionTLS13: true} {
		_, address := serve(t, &tls.Config{Certificates: []tls.Certificate{pair}, MaxVersion: most})
		s, _, stop := start(t, []Tag{number("a")}, Options{URL: "mqtts://" + address, CAFile: a.path("ca.pem"), ServerName: "broker.plant", MinTLS: tls.VersionTLS13})
		eventually(t, "an outcome", func() bool { st := s.Stats(); return st.Failures > 0 || st.Connected })
		if st := s.Stats(); st.Connected != want || !want && !strings.Contains(st.LastError, "protocol version") {
			t.Errorf("broker with %s: %+v; want connected %t", tls.VersionName(most), st, want)
		}
		stop()
	}
}

func TestOldTLSIsRefused(t *testing.T) {
	a := plantAuthority(t)
	pair, err := tls.LoadX509KeyPair(a.path("broker.pem"), a.path("broker.key"))
	if err != nil {
		t.Fatal(err)
	}
	_, address := serve(t, &tls.Config{Certificates: []tls.Certificate{pair}, MinVersion: tls.VersionTLS10, MaxVersion: tls.VersionTLS11})
	s, _, _ := start(t, []Tag{number("a")}, Options{URL: "mqtts://" + address, CAFile: a.path("ca.pem"), ServerName: "broker.plant"})
	eventually(t, "a failure", func() bool { return s.Stats().Failures > 0 })
	if got := s.Stats().LastError; !strings.Contains(got, "protocol version") {
		t.Errorf("last error %q; want it to name the protocol version", got)
	}
}

// A certificate that was replaced, because it ran out, is used without a
// restart.
func TestCertificatesAreReadAtEachAttempt(t *testing.T) {
	a := plantAuthority(t)
	pair, err := tls.LoadX509KeyPair(a.path("broker.pem"), a.path("broker.key"))
	if err != nil {
		t.Fatal(err)
	}
	_, address := serve(t, &tls.Config{Certificates: []tls.Certificate{pair}})
	right, err := os.ReadFile(a.path("ca.pem"))
	if err != nil {
		t.Fatal(err)
	}
	other := newAuthority(t)
	s, _, _ := start(t, []Tag{number("a")}, Options{URL: "mqtts://" + address, CAFile: other.path("ca.pem"), ServerName: "broker.plant"})
	eventually(t, "a failure", func() bool { return s.Stats().Failures > 0 })
	if err := os.WriteFile(other.path("ca.pem"), right, 0o600); err != nil {
		t.Fatal(err)
	}
	ready(t, s)
}

// A client certificate that the broker no longer takes is replaced without a restart:
// first its file, for a moment without the key that goes with it, then the key.
func TestClientCertificateIsReplaced(t *testing.T) {
	a := plantAuthority(t)
	pair, err := tls.LoadX509KeyPair(a.path("broker.pem"), a.path("broker.key"))
	if err != nil {
		t.Fatal(err)
	}
	pool, err := readPool(a.path("ca.pem"))
	if err != nil {
		t.Fatal(err)
	}
	_, address := serve(t, &tls.Config{Certificates: []tls.Certificate{pair}, ClientCAs: pool, ClientAuth: tls.RequireAndVerifyClientCert})
	old := newAuthority(t)
	old.issue(t, "client", x509.ExtKeyUsageClientAuth)
	s, _, _ := start(t, []Tag{number("a")}, Options{
		URL: "mqtts://" + address, CAFile: a.path("ca.pem"), ServerName: "broker.plant", CertFile: old.path("client.pem"), KeyFile: old.path("client.key"),
	})
	eventually(t, "a failure", func() bool { return s.Stats().Failures > 0 })
	for _, file := range []string{"client.pem", "client.key"} {
		text, err := os.ReadFile(a.path(file))
		if err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(old.path(file), text, 0o600); err != nil {
			t.Fatal(err)
		}
		if file == "client.pem" {
			eventually(t, "a mismatch", func() bool { return strings.Contains(s.Stats().LastError, "private key does not match") })
		}
	}
	ready(t, s)
}
