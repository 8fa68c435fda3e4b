package ingest

import (
	"bytes"
	"crypto/tls"
	"errors"
	"fmt"
	"log/slog"
	"os"
	"time"

	"heatreeve/ingest/sparkplug"
)

// Defaults of [Options].
const (
	DefaultBuffer     = 65536
	DefaultOutbox     = 4096
	DefaultMaxBackoff = 30 * time.Second
	// DefaultKeepAlive with DefaultPingTimeout finds a dead link within 12.5 s, as the
	// library rounds them: before a silence of 15 s is taken for one of the plant.
	DefaultKeepAlive      = 5 * time.Second
	DefaultPingTimeout    = 5 * time.Second
	DefaultConnectTimeout = 10 * time.Second
)

// Options of a [Session]. URL and ClientID must be given.
type Options struct {
	// URL is mqtt://host:port, or mqtts://host:port for TLS. In a websocket it is
	// ws://host:port/path or wss://host:port/path. Without a port 1883, 8883, 80 and
	// 443 are taken.
	URL string
	// ClientID names the session at the broker. It must stay the same from
	// start to start, and no other client may use it.
	ClientID string

	Username string
	// Password is asked at every attempt to connect, so that it may change;
	// nil: none.
	Password func() (string, error)

	// CAFile holds the certificates (PEM) that the broker's must be signed by;
	// "": those of the system. All files are read at every attempt.
	CAFile string
	// CertFile and KeyFile (PEM) are this client's certificate; both or none.
	CertFile, KeyFile string
	// ServerName is the name that the broker's certificate must carry; "": the
	// host of the URL.
	ServerName string
	// MinTLS is the least version that is spoken; 0: TLS 1.2.
	MinTLS uint16

	// Subscribe are filters with wildcards, in place of the topics that they cover.
	// They must not overlap.
	Subscribe []string

	Ahead  time.Duration // see [NewDecoder]
	Buffer int           // readings held until taken; 0: DefaultBuffer

	// Transient sessions leave nothing at the broker, and get nothing that came while
	// they were away: those of a command that listens for a while. The first attempt to
	// connect is not repeated.
	Transient bool
	// Rebirths says that Sparkplug edge nodes may be asked for their births, where these
	// are missing. Without it nothing is sent to them.
	Rebirths bool
	// Host is the id of this Sparkplug host application. Its STATE is then the presence, and
	// the broker keeps nothing for it while it is away, as the standard wants; "": it is none.
	Host string

	Presence *Presence // nil: none, and no will
	Outbox   int       // messages held until published; 0: DefaultOutbox

	MaxBackoff     time.Duration // longest pause between two attempts; 0: DefaultMaxBackoff
	KeepAlive      time.Duration // silence before the broker is probed, whole seconds; 0: DefaultKeepAlive
	PingTimeout    time.Duration // wait for the probe's answer; 0: DefaultPingTimeout
	ConnectTimeout time.Duration // for an attempt, and for any write; 0: DefaultConnectTimeout

	// Reached is told when so many messages wait as [Session.TellAt] was given, or more. It has
	// one slot, in which its one receiver finds the last time only, and several sessions may
	// share it. nil: nobody is told.
	Reached chan struct{}

	Log *slog.Logger     // nil: silent
	Now func() time.Time // the arrival clock; nil: time.Now
}

// withDefaults fills in what was left out and returns every fault, joined.
func (o Options) withDefaults() (Options, error) {
	o.Buffer = orDefault(o.Buffer, DefaultBuffer)
	o.Outbox = orDefault(o.Outbox, DefaultOutbox)
	o.MaxBackoff = orDefault(o.MaxBackoff, DefaultMaxBackoff)
	o.KeepAlive = orDefault(o.KeepAlive, DefaultKeepAlive)
	o.PingTimeout = orDefault(o.PingTimeout, DefaultPingTimeout)
	o.ConnectTimeout = orDefault(o.ConnectTimeout, DefaultConnectTimeout)
	if o.Log == nil {
		o.Log = slog.New(slog.DiscardHandler)
	}
	if o.Now == nil {
		o.Now = time.Now
	}
	var faults []error
	b, err := parseBroker(o.URL)
	if err != nil {
		faults = append(faults, err)
	}
	if o.ClientID == "" {
		faults = append(faults, errors.New("the client id is empty; give one that stays the same, such as the site's name"))
	}
	if o.Password != nil && o.Username == "" {
		faults = append(faults, errors.New("a password without a user name"))
	}
	if o.Host != "" {
		if err := sparkplug.CheckHost(o.Host); err != nil {
			faults = append(faults, err)
		}
		if o.Presence != nil {
			faults = append(faults, fmt.Errorf("host %q and a presence on %q: a connection has one will, and the host's STATE is it", o.Host, o.Presence.Topic))
		}
		o.Presence = HostPresence(o.Host)
	}
	if err := o.Presence.check(); err != nil {
		faults = append(faults, err)
	}
	if o.Buffer < 0 || o.Outbox < 0 || o.MaxBackoff < 0 || o.PingTimeout < 0 || o.ConnectTimeout < 0 {
		faults = append(faults, errors.New("buffers and times must not be negative"))
	}
	if o.KeepAlive < time.Second || o.KeepAlive > 65535*time.Second {
		faults = append(faults, fmt.Errorf("keep-alive %v; allowed are 1 s to 65535 s", o.KeepAlive))
	}
	files := o.CAFile != "" || o.CertFile != "" || o.KeyFile != "" || o.ServerName != "" || o.MinTLS != 0
	if err == nil && files && !b.tls {
		faults = append(faults, fmt.Errorf("certificates are given, but %s is not encrypted; use mqtts:// or wss://", b))
	}
	if _, err := o.tlsConfig(b.host); err != nil {
		faults = append(faults, err)
	}
	return o, errors.Join(faults...)
}

func orDefault[T int | time.Duration](given, normal T) T {
	if given == 0 {
		return normal
	}
	return given
}

// tlsConfig reads the certificate files.
func (o Options) tlsConfig(host string) (*tls.Config, error) {
	c := &tls.Config{MinVersion: max(tls.VersionTLS12, o.MinTLS), ServerName: o.ServerName}
	if c.ServerName == "" {
		c.ServerName = host
	}
	if o.CAFile != "" {
		pool, err := readPool(o.CAFile)
		if err != nil {
			return nil, err
		}
		c.RootCAs = pool
	}
	if o.CertFile == "" && o.KeyFile == "" {
		return c, nil
	}
	if o.CertFile == "" || o.KeyFile == "" {
		return nil, errors.New("client certificate: its file and its key file must both be given, or neither")
	}
	pair, err := tls.LoadX509KeyPair(o.CertFile, o.KeyFile)
	switch {
	case err != nil && encrypted(o.KeyFile):
		return nil, fmt.Errorf("client certificate %q: its key %q is encrypted, and no password of a key is known here; write it without one, as openssl pkey -in OLD -out NEW does, readable by the agent alone", o.CertFile, o.KeyFile)
	case err != nil:
		return nil, fmt.Errorf("client certificate %q with key %q: %w", o.CertFile, o.KeyFile, err)
	}
	c.Certificates = []tls.Certificate{pair}
	return c, nil
}

// encrypted tells whether a file holds a key in PEM form that only a password opens (RFC 7468,
// section 11; RFC 1421, section 4.6.1.1).
func encrypted(file string) bool {
	text, err := os.ReadFile(file)
	return err == nil && (bytes.Contains(text, []byte("BEGIN ENCRYPTED PRIVATE KEY")) || bytes.Contains(text, []byte("Proc-Type: 4,ENCRYPTED")))
}
