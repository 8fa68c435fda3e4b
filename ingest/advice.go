package ingest

import (
	"crypto/tls"
	"crypto/x509"
	"errors"
	"io"
	"net"
	"regexp"
	"strings"
	"syscall"
)

// withAdvice is why no connection came about, in words, with what to do where that is known.
func (b broker) withAdvice(err error) string {
	why := strings.Replace(plainly(err), "tls: tls: ", "tls: ", 1)
	if advice := b.advice(err); advice != "" {
		why += "; " + advice
	}
	return why
}

// ours is our own end of a connection in an error of package net, another port each time.
var ours = regexp.MustCompile(` \S+:\d+->`)

// plainly is an error in words that are the same for each attempt that fails the same way.
func plainly(err error) string { return ours.ReplaceAllString(err.Error(), " ") }

// advice is what to do about a connection that did not come about; "" where nothing tells.
func (b broker) advice(err error) string {
	var authority x509.UnknownAuthorityError
	var name x509.HostnameError
	var expired x509.CertificateInvalidError
	var record tls.RecordHeaderError
	var lookup *net.DNSError
	var late net.Error
	switch {
	case errors.As(err, &authority):
		return "give the certificates of its authority as ca"
	case errors.As(err, &name):
		if names := name.Certificate.DNSNames; len(names) > 0 {
			return "the certificate is for " + strings.Join(names, ", ") + ": give that as server_name"
		}
		return "the certificate names no host that fits: it wants a subject alternative name"
	case errors.As(err, &expired) && expired.Reason == x509.Expired:
		return "renew the broker's certificate, or set this machine's clock"
	case errors.As(err, &lookup):
		return "check the name of the broker's host"
	case errors.Is(err, syscall.ECONNREFUSED):
		return "check host and port, and that the broker runs and listens there"
	case errors.As(err, &late) && late.Timeout():
		return "nothing answers there in time: check host and port, the network on the way, and whether the broker hangs"
	case errors.As(err, &record), b.tls && hungUp(err):
		return "check that the port speaks TLS"
	case hungUp(err):
		return "check the port: it may want TLS, or be one for something else"
	}
	return ""
}

// hungUp tells whether the other side ended a connection before it stood. The library
// hands some errors on as text alone.
func hungUp(err error) bool {
	return errors.Is(err, syscall.ECONNRESET) || errors.Is(err, io.EOF) || errors.Is(err, io.ErrUnexpectedEOF) ||
		strings.HasSuffix(err.Error(), "connection reset by peer") || strings.HasSuffix(err.Error(), "EOF")
}
