package agent

import (
	"fmt"

	"github.com/coreos/go-systemd/v22/daemon"

	"heatreeve/agent/site"
	"heatreeve/ingest"
)

// newSession prepares the session with the site's broker.
func newSession(s *site.Site, o Options) (*ingest.Session, error) {
	b := s.Broker
	options := ingest.Options{
		URL: b.URL, ClientID: b.ClientID, Username: b.Username,
		CAFile: b.CAFile, CertFile: b.CertFile, KeyFile: b.KeyFile, ServerName: b.ServerName,
		Ahead: s.Timing.Ahead, Log: o.Log, Now: o.Now,
	}
	if b.PasswordFile != "" || b.PasswordEnv != "" {
		options.Password = b.Password
	}
	session, err := ingest.New(signalsOf(s), options)
	if err != nil {
		return nil, fmt.Errorf("broker session: %w", err)
	}
	return session, nil
}

// notify tells a service manager about the agent's state, where there is one; it
// has no way to be told of a failure, and the watchdog will see one.
func notify(state string) { _, _ = daemon.SdNotify(false, state) }
