package access

import (
	"crypto/tls"
	"crypto/x509"
	"errors"
	"fmt"
	"os"
)

// TLS is how a server listens by the file at path, which [Check] has found right: each connection
// is offered what the file says then.
func TLS(path string) *tls.Config {
	return &tls.Config{
		MinVersion: tls.VersionTLS12,
		GetConfigForClient: func(*tls.ClientHelloInfo) (*tls.Config, error) {
			f, err := read(path)
			if err == nil && f.TLS == nil {
				err = errors.New("no tls_server_config, as there was at the start")
			}
			if err != nil {
				return nil, fmt.Errorf("web configuration %q: %w", path, err)
			}
			return f.TLS.config()
		},
	}
}

// config reads the certificates.
func (s *server) config() (*tls.Config, error) {
	c := &tls.Config{MinVersion: tls.VersionTLS12, NextProtos: []string{"h2", "http/1.1"}}
	switch s.MinVersion {
	case "", "TLS12":
	case "TLS13":
		c.MinVersion = tls.VersionTLS13
	default:
		return nil, fmt.Errorf("tls_server_config: min_version is %q; allowed are TLS12 and TLS13", s.MinVersion)
	}
	for _, of := range []struct{ key, path string }{{"cert_file", s.Cert}, {"key_file", s.Key}} {
		if of.path == "" {
			return nil, fmt.Errorf("tls_server_config: %s is missing", of.key)
		}
	}
	pair, err := tls.LoadX509KeyPair(s.Cert, s.Key)
	if err != nil {
		return nil, fmt.Errorf("tls_server_config: %w", err)
	}
	c.Certificates = []tls.Certificate{pair}
	if err := s.clients(c); err != nil {
		return nil, fmt.Errorf("tls_server_config: %w", err)
	}
	return c, nil
}

// clients sets what is asked of clients.
func (s *server) clients(c *tls.Config) error {
	switch s.ClientAuth {
	case "", "NoClientCert":
		if s.ClientCA != "" {
			return fmt.Errorf("client_ca_file without client_auth_type: %s lets everybody in", wantsCertificate)
		}
		return nil
	case wantsCertificate:
	default:
		return fmt.Errorf("client_auth_type is %q; allowed are NoClientCert and %s", s.ClientAuth, wantsCertificate)
	}
	if s.ClientCA == "" {
		return errors.New("client_ca_file is missing: without it any authority that this machine knows would do")
	}
	text, err := os.ReadFile(s.ClientCA)
	if err != nil {
		return err
	}
	c.ClientAuth, c.ClientCAs = tls.RequireAndVerifyClientCert, x509.NewCertPool()
	if !c.ClientCAs.AppendCertsFromPEM(text) {
		return errors.New("client_ca_file holds no certificate")
	}
	return nil
}
