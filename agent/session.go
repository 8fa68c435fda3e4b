package agent

import (
	"crypto/tls"
	"fmt"

	"github.com/coreos/go-systemd/v22/daemon"

	"heatreeve/agent/site"
	"heatreeve/ingest"
)

// newSession prepares the session with the site's broker.
func newSession(s *site.Site, o Options) (*ingest.Session, error) {
	options := connectionOf(s.Broker)
	options.Ahead, options.Log, options.Now = s.Timing.Ahead, o.Log, o.Now
	options.Subscribe, options.Rebirths, options.Host = s.Broker.Subscribe, s.Broker.Rebirths, s.Broker.HostID
	if s.Broker.Availability != "" {
		options.Presence = ingest.Words(s.Broker.Availability, site.Online, site.Offline)
	}
	session, err := ingest.New(signalsOf(s), options)
	if err != nil {
		return nil, fmt.Errorf("broker session: %w", err)
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
