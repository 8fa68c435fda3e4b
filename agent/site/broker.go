package site

import (
	"errors"
	"fmt"
	"hash/fnv"
	"net"
	"net/url"
	"os"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"unicode"
)

// Broker is where the tags come from. It holds no secret: [Broker.Password]
// fetches the password when it is needed.
type Broker struct {
	Name                      string // "" of the main one
	URL                       string // "mqtt://host:port", "mqtts://host:port" with TLS, or "ws://host:port/path" and "wss://host:port/path"
	TLS                       bool
	ClientID                  string // fixed, so that the broker keeps the session; default "heatreeve-" and the site's name
	CAFile, CertFile, KeyFile string // PEM; relative paths are taken from the site file's directory
	ServerName                string // name in the broker's certificate, where it is not the host
	MinTLS                    string // "1.2" or "1.3"; "" for 1.2
	Username                  string
	PasswordFile, PasswordEnv string   // at most one of them
	Subscribe                 []string // filters that end in #, in place of the topics that they cover; they do not overlap
	Availability              string   // topic on which the agent shows whether it is connected; "" for none
	Rebirths                  bool     // Sparkplug edge nodes may be asked for their births
	HostID                    string   // of this Sparkplug host application; "": it is none, and only reads
	Queue                     int      // messages that the broker keeps for a client that takes none; default 1000
}

// Words of [Broker.Availability].
const (
	Online  = "online"
	Offline = "offline"
)

// defaultQueue is that of mosquitto (max_queued_messages).
const defaultQueue = 1000

// Password returns the password from the file, without line ends behind it, or
// from the environment variable, and "" when the site names neither. An error
// tells the place and never the password.
func (b Broker) Password() (string, error) {
	switch {
	case b.PasswordFile != "":
		text, err := os.ReadFile(b.PasswordFile)
		if err != nil {
			return "", fmt.Errorf("broker password: %w", err)
		}
		return strings.TrimRight(string(text), "\r\n"), nil
	case b.PasswordEnv != "":
		password, ok := os.LookupEnv(b.PasswordEnv)
		if !ok {
			return "", fmt.Errorf("broker password: environment variable %q is not set", b.PasswordEnv)
		}
		return password, nil
	}
	return "", nil
}

// broker reads one; name is "" of the main one.
func (r *reader) broker(v value, name string) Broker {
	o := v.object("broker")
	b := Broker{Name: name, ClientID: clientID(strings.TrimSpace(r.site.Name + " " + name)), Queue: defaultQueue}
	if u, ok := o.need("url", "such as mqtt://127.0.0.1:1883 or mqtts://broker.example:8883"); ok {
		b.URL, b.TLS = brokerURL(u)
	}
	o.setText("client_id", &b.ClientID)
	o.setText("server_name", &b.ServerName)
	o.setText("username", &b.Username)
	r.setPath(o, "ca", &b.CAFile)
	r.setPath(o, "certificate", &b.CertFile)
	r.setPath(o, "key", &b.KeyFile)
	r.setPath(o, "password_file", &b.PasswordFile)
	o.setVariable("password_env", &b.PasswordEnv)
	o.setVersion("min_tls", &b.MinTLS)
	o.setCount("queue", &b.Queue, 100, 10_000_000)
	if v, ok := o.get("availability"); ok {
		b.Availability = topic(v)
	}
	if v, ok := o.get("subscribe"); ok {
		b.Subscribe = filters(v)
	}
	if v, ok := o.get("commands"); ok {
		_, b.Rebirths = v.oneOf("rebirth")
	}
	if v, ok := o.get("host_id"); ok {
		b.HostID = hostID(v)
	}
	o.checkBroker(b)
	return b
}

// checkBroker looks at which keys stand beside which.
func (o object) checkBroker(b Broker) {
	for _, key := range []string{"ca", "certificate", "key", "server_name", "min_tls"} {
		if v, ok := o.get(key); ok && b.URL != "" && !b.TLS {
			v.fault("is for TLS, and the url begins with %s://; write %[1]ss:// or leave it out", scheme(b.URL))
		}
	}
	o.needs("certificate", "key")
	o.needs("key", "certificate")
	o.needs("password_file", "username")
	o.needs("password_env", "username")
	if v, ok := o.get("password_env"); ok {
		if _, both := o.get("password_file"); both {
			v.fault("stands beside password_file; keep one of them")
		}
	}
}

// needs says that one key makes no sense without the other.
func (o object) needs(key, other string) {
	v, ok := o.get(key)
	if _, there := o.get(other); ok && !there {
		v.fault("stands without %s; give both or neither", other)
	}
}

// schemes are those of a broker's address, with the port that IANA registered.
var schemes = map[string]struct {
	port        string
	tls, socket bool // encrypted; MQTT in a websocket, which has a path
}{
	"mqtt": {port: "1883"}, "mqtts": {port: "8883", tls: true},
	"ws": {port: "80", socket: true}, "wss": {port: "443", tls: true, socket: true},
}

func scheme(address string) string { s, _, _ := strings.Cut(address, "://"); return s }

// brokerURL checks the address. Faults do not quote it, for it may hold a
// password.
func brokerURL(v value) (address string, tls bool) {
	s, ok := v.text()
	if !ok {
		return "", false
	}
	if strings.Contains(s, "@") {
		v.fault("must carry no user or password; use username with password_file or password_env")
		return "", false
	}
	const forms = "mqtt://host:port, or mqtts://host:port for TLS; in a websocket ws://host:port/path or wss://host:port/path"
	u, err := url.Parse(s)
	known, ok := schemes[scheme(s)]
	switch {
	case err != nil || u.Host == "" || !ok:
		v.fault("%q is no address of a broker; allowed: %s", clip(s), forms)
		return "", false
	case !known.socket && u.Path != "" && u.Path != "/" || u.RawQuery != "" || u.Fragment != "":
		v.fault("%q goes on behind host and port; allowed: %s", clip(s), forms)
		return "", false
	}
	host, port, err := hostPort(u, known.port)
	if err != nil {
		v.fault("%q: %v", clip(s), err)
		return "", false
	}
	address = u.Scheme + "://" + net.JoinHostPort(host, port)
	if known.socket {
		address += u.EscapedPath()
	}
	return address, known.tls
}

func hostPort(u *url.URL, usual string) (host, port string, err error) {
	host, port = u.Hostname(), u.Port()
	if host == "" || strings.ContainsFunc(host, unicode.IsSpace) {
		return "", "", errors.New("the host is missing or has a space")
	}
	if port == "" {
		port = usual
	}
	if n, err := strconv.Atoi(port); err != nil || n < 1 || n > 65535 {
		return "", "", errors.New("the port is no number from 1 to 65535")
	}
	return host, port, nil
}

// clientID is the site's name in letters and digits that any broker takes. A
// name with nothing of the kind is told apart by its hash.
func clientID(site string) string {
	words := strings.FieldsFunc(strings.ToLower(site), func(r rune) bool {
		return (r < 'a' || r > 'z') && (r < '0' || r > '9')
	})
	if len(words) == 0 {
		h := fnv.New32a()
		h.Write([]byte(site))
		return fmt.Sprintf("heatreeve-%08x", h.Sum32())
	}
	return "heatreeve-" + strings.Join(words, "-")
}

// setText overwrites a default where the key is there and right.
func (o object) setText(key string, to *string) {
	v, ok := o.get(key)
	if !ok {
		return
	}
	const most = 256
	s, ok := v.text()
	switch {
	case !ok:
	case len(s) > most || strings.ContainsFunc(s, unprintable):
		v.fault("want at most %d bytes of printable characters", most)
	default:
		*to = s
	}
}

// setPath reads a path and takes a relative one from the site file's directory.
func (r *reader) setPath(o object, key string, to *string) {
	v, ok := o.get(key)
	if !ok {
		return
	}
	s, ok := v.text()
	switch {
	case !ok:
	case strings.ContainsFunc(s, unicode.IsControl):
		v.fault("the path has a control character")
	case filepath.IsAbs(s):
		*to = s
	default:
		*to = filepath.Join(filepath.Dir(r.file), s)
	}
}

var variable = regexp.MustCompile(`^[A-Za-z_][A-Za-z0-9_]*$`)

// setVariable reads the name of an environment variable. Its fault does not
// quote the text: someone may have put the password there.
func (o object) setVariable(key string, to *string) {
	v, ok := o.get(key)
	if !ok {
		return
	}
	s, ok := v.text()
	switch {
	case !ok:
	case !variable.MatchString(s):
		v.fault("is no name of an environment variable: letters, digits and _")
	default:
		*to = s
	}
}
