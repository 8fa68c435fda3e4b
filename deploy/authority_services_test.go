//go:build services

package deploy

import (
	"crypto"
	"crypto/ecdsa"
	"crypto/elliptic"
	"crypto/rand"
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

// authority signs certificates for one test; they and their keys lie in dir.
type authority struct {
	dir  string
	cert *x509.Certificate
	key  crypto.Signer
}

// newAuthority makes an authority and writes its ca.crt.
func newAuthority(t *testing.T, dir string) authority {
	t.Helper()
	template := certificate(t, "authority")
	template.IsCA, template.BasicConstraintsValid, template.KeyUsage = true, true, x509.KeyUsageCertSign
	a := authority{dir: dir, cert: template}
	a.key = a.sign(t, template, "ca")
	return a
}

// issue writes name.crt and name.key, good for 127.0.0.1 and for a client.
func (a authority) issue(t *testing.T, name string) {
	t.Helper()
	template := certificate(t, name)
	template.IPAddresses = []net.IP{net.IPv4(127, 0, 0, 1)}
	template.ExtKeyUsage = []x509.ExtKeyUsage{x509.ExtKeyUsageServerAuth, x509.ExtKeyUsageClientAuth}
	a.sign(t, template, name)
}

func certificate(t *testing.T, name string) *x509.Certificate {
	t.Helper()
	serial, err := rand.Int(rand.Reader, big.NewInt(1<<62))
	if err != nil {
		t.Fatal(err)
	}
	now := time.Now()
	return &x509.Certificate{SerialNumber: serial, Subject: pkix.Name{CommonName: name}, NotBefore: now.Add(-time.Hour), NotAfter: now.Add(time.Hour)}
}

// sign makes a key for the template and signs it with the authority's key, or with its own when there is none yet.
func (a authority) sign(t *testing.T, template *x509.Certificate, name string) crypto.Signer {
	t.Helper()
	key, err := ecdsa.GenerateKey(elliptic.P256(), rand.Reader)
	if err != nil {
		t.Fatal(err)
	}
	signer := a.key
	if signer == nil {
		signer = key
	}
	cert, err := x509.CreateCertificate(rand.Reader, template, a.cert, key.Public(), signer)
	if err != nil {
		t.Fatal(err)
	}
	private, err := x509.MarshalPKCS8PrivateKey(key)
	if err != nil {
		t.Fatal(err)
	}
	a.write(t, name+".crt", &pem.Block{Type: "CERTIFICATE", Bytes: cert})
	a.write(t, name+".key", &pem.Block{Type: "PRIVATE KEY", Bytes: private})
	return key
}

func (a authority) write(t *testing.T, file string, block *pem.Block) {
	t.Helper()
	if err := os.WriteFile(filepath.Join(a.dir, file), pem.EncodeToMemory(block), 0o600); err != nil {
		t.Fatal(err)
	}
}
