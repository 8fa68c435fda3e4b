package agent

import (
	"crypto/tls"
	"fmt"

	"github.com/coreos/go-systemd/v22/daemon"

	"heatreeve/agent/site"
	"heatreeve/ingest"
)

// newSession prepares the session with one of the site's brokers.
func newSession(s *site.Site, b site.Broker, tags []ingest.Tag, o Options, reached chan struct{}) (*ingest.Session, error) {
	options := connectionOf(b)
	options.Ahead, options.Log, options.Now, options.Reached = s.Timing.Ahead, o.Log, o.Now, reached
	options.Subscribe, options.Rebirths, options.Host = b.Subscribe, b.Rebirths, b.HostID
	if b.Availability != "" {
		options.Presence = ingest.Words(b.Availability, site.Online, site.Offline)
	}
	options.Outbox = max(ingest.DefaultOutbox, 8*len(s.Loads)) // each result has room, and each warning
	session, err := ingest.New(tags, options)
	if err != nil {
		return nil, fmt.Errorf("session with %s: %w", b.Called(), err)
	}
	return session, nil
}

// connectionOf is what leads to a broker.
func connectionOf(b site.Broker) ingest.Options {
	o := ingest.Options{
		URL: b.URL, ClientID: b.ClientID, Username: b.Username,
		CAFile: b.CAFile, CertFile: b.CertFile, KeyFile: b.KeyFile, ServerName: b.ServerName,
	}
	if b.MinTLS == "1.3" {
		o.MinTLS = tls.VersionTLS13
	}
	if b.PasswordFile != "" || b.PasswordEnv != "" {
		o.Password = b.Password
	}
	return o
}

// notify tells a service manager about the agent's state, where there is one; it
// has no way to be told of a failure, and the watchdog will see one.
func notify(state string) { _, _ = daemon.SdNotify(false, state) }
