// Package authority is a certificate authority for the tests of those who connect by TLS.
package authority

import (
	"crypto/ecdsa"
	"crypto/elliptic"
	"crypto/rand"
	"crypto/tls"
	"crypto/x509"
	"crypto/x509/pkix"
	"encoding/pem"
	"math/big"
	"net"
	"os"
	"path/filepath"
	"testing"
	"time"
)

// Authority has its certificate in a folder as "ca" with its extension, and beside it a
// certificate and a key, "name.key", for each name that it has issued one for.
type Authority struct {
	dir, ext string
	cert     *x509.Certificate
	key      *ecdsa.PrivateKey
}

// New is an authority in dir whose certificates have names that end in ext, such as ".pem".
// They are good for an hour before and after now.
func New(t testing.TB, dir, ext string) *Authority {
	t.Helper()
	a := &Authority{dir: dir, ext: ext, cert: template(t, "test authority")}
	a.cert.IsCA, a.cert.BasicConstraintsValid, a.cert.KeyUsage = true, true, x509.KeyUsageCertSign
	a.key = newKey(t)
	der := a.sign(t, a.cert, a.key)
	cert, err := x509.ParseCertificate(der)
	if err != nil {
		t.Fatal(err)
	}
	a.cert = cert
	a.write(t, "ca"+ext, "CERTIFICATE", der)
	return a
}

// Path is that of a file in the folder.
func (a *Authority) Path(name string) string { return filepath.Join(a.dir, name) }

// Issue makes a certificate and its key for a client of that name, and for a server that is found
// by the hosts, which are addresses or names.
func (a *Authority) Issue(t testing.TB, name string, hosts ...string) {
	t.Helper()
	cert, key := template(t, name), newKey(t)
	cert.ExtKeyUsage = []x509.ExtKeyUsage{x509.ExtKeyUsageServerAuth, x509.ExtKeyUsageClientAuth}
	for _, host := range hosts {
		if ip := net.ParseIP(host); ip != nil {
			cert.IPAddresses = append(cert.IPAddresses, ip)
		} else {
			cert.DNSNames = append(cert.DNSNames, host)
		}
	}
	secret, err := x509.MarshalPKCS8PrivateKey(key)
	if err != nil {
		t.Fatal(err)
	}
	a.write(t, name+a.ext, "CERTIFICATE", a.sign(t, cert, key))
	a.write(t, name+".key", "PRIVATE KEY", secret)
}

// Client is the TLS of one who trusts a, and shows a certificate by name; "" for none.
func (a *Authority) Client(t testing.TB, name string) *tls.Config {
	t.Helper()
	c := &tls.Config{RootCAs: x509.NewCertPool()}
	c.RootCAs.AddCert(a.cert)
	if name != "" {
		pair, err := tls.LoadX509KeyPair(a.Path(name+a.ext), a.Path(name+".key"))
		if err != nil {
			t.Fatal(err)
		}
		c.Certificates = []tls.Certificate{pair}
	}
	return c
}

func template(t testing.TB, name string) *x509.Certificate {
	t.Helper()
	serial, err := rand.Int(rand.Reader, big.NewInt(1<<62))
	if err != nil {
		t.Fatal(err)
	}
	now := time.Now()
	return &x509.Certificate{SerialNumber: serial, Subject: pkix.Name{CommonName: name}, NotBefore: now.Add(-time.Hour), NotAfter: now.Add(time.Hour)}
}

func newKey(t testing.TB) *ecdsa.PrivateKey {
	t.Helper()
	key, err := ecdsa.GenerateKey(elliptic.P256(), rand.Reader)
	if err != nil {
		t.Fatal(err)
	}
	return key
}

func (a *Authority) sign(t testing.TB, cert *x509.Certificate, key *ecdsa.PrivateKey) []byte {
	t.Helper()
	der, err := x509.CreateCertificate(rand.Reader, cert, a.cert, key.Public(), a.key)
	if err != nil {
		t.Fatal(err)
	}
	return der
}

func (a *Authority) write(t testing.TB, name, kind string, der []byte) {
	t.Helper()
	if err := os.WriteFile(a.Path(name), pem.EncodeToMemory(&pem.Block{Type: kind, Bytes: der}), 0o600); err != nil {
		t.Fatal(err)
	}
}
