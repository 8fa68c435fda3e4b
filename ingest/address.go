package ingest

import (
	"errors"
	"fmt"
	"net"
	"net/url"
	"strconv"
)

// broker is the address of one, checked.
type broker struct {
	scheme, host, port string
	path               string // of a websocket, "/" at least
	tls, socket        bool   // encrypted; MQTT in a websocket
}

func (b broker) String() string { return b.scheme + "://" + b.address() + b.path }

func (b broker) address() string { return net.JoinHostPort(b.host, b.port) }

// schemes are those of a broker's address, with the ports that IANA registered.
var schemes = map[string]struct {
	port        string
	tls, socket bool
}{
	"mqtt": {port: "1883"}, "mqtts": {port: "8883", tls: true},
	"ws": {port: "80", socket: true}, "wss": {port: "443", tls: true, socket: true},
}

const schemeForms = "mqtt:// and, with TLS, mqtts://; in a websocket ws:// and wss://"

// parseBroker never repeats what it could not read: it may hold a password.
func parseBroker(raw string) (broker, error) {
	u, err := url.Parse(raw)
	if err != nil {
		var inner *url.Error
		if errors.As(err, &inner) {
			err = inner.Err
		}
		return broker{}, fmt.Errorf("broker address: %w; write mqtt://host:port or mqtts://host:port", err)
	}
	known, ok := schemes[u.Scheme]
	if !ok {
		return broker{}, fmt.Errorf("broker address: scheme %q; allowed are %s", u.Scheme, schemeForms)
	}
	b := broker{scheme: u.Scheme, host: u.Hostname(), port: u.Port(), tls: known.tls, socket: known.socket}
	if b.port == "" {
		b.port = known.port
	}
	if u.User != nil {
		return broker{}, errors.New("broker address: user name and password do not belong in it, where logs would show them; give them apart")
	}
	if b.host == "" {
		return broker{}, fmt.Errorf("broker address %q: the host is missing", raw)
	}
	if n, err := strconv.ParseUint(b.port, 10, 16); err != nil || n == 0 {
		return broker{}, fmt.Errorf("broker address %q: port %q; allowed are 1 to 65535", raw, b.port)
	}
	if u.RawQuery != "" || u.Fragment != "" || !b.socket && u.Path != "" && u.Path != "/" {
		return broker{}, fmt.Errorf("broker address %q: nothing may follow the port, but the path of a websocket", raw)
	}
	if b.socket {
		b.path = u.EscapedPath()
		if b.path == "" {
			b.path = "/"
		}
	}
	return b, nil
}
