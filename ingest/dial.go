package ingest

import (
	"context"
	"crypto/tls"
	"crypto/x509"
	"fmt"
	"net"
	"os"
)

// dial opens a connection to the broker, with TLS where the address asks for
// it. Certificate files are read anew, and proxy variables of the environment
// are left aside: a gateway's service talks to the broker it was told.
func (s *Session) dial(ctx context.Context) (net.Conn, error) {
	ctx, cancel := context.WithTimeout(ctx, s.o.ConnectTimeout)
	defer cancel()
	var plain net.Dialer
	raw, err := plain.DialContext(ctx, "tcp", s.broker.address())
	if err != nil {
		return nil, err
	}
	c, err := s.wrap(ctx, raw)
	if err != nil {
		_ = raw.Close()
		return nil, err
	}
	return c, nil
}

// wrap puts what the address asks for around a connection.
func (s *Session) wrap(ctx context.Context, c net.Conn) (net.Conn, error) {
	if s.broker.tls {
		secure, err := s.handshake(ctx, c)
		if err != nil {
			return nil, fmt.Errorf("tls: %w", err)
		}
		c = secure
	}
	if s.broker.socket {
		return upgrade(ctx, c, s.broker)
	}
	return c, nil
}

func (s *Session) handshake(ctx context.Context, raw net.Conn) (net.Conn, error) {
	config, err := s.o.tlsConfig(s.broker.host)
	if err != nil {
		return nil, err
	}
	secure := tls.Client(raw, config)
	if err := secure.HandshakeContext(ctx); err != nil {
		return nil, err
	}
	return secure, nil
}

func readPool(path string) (*x509.CertPool, error) {
	pem, err := os.ReadFile(path)
	if err != nil {
		return nil, fmt.Errorf("certificates of the authority: %w", err)
	}
	pool := x509.NewCertPool()
	if !pool.AppendCertsFromPEM(pem) {
		return nil, fmt.Errorf("certificates of the authority: %q holds none in PEM form", path)
	}
	return pool, nil
}
