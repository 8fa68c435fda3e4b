//go:build services

package deploy

import (
	"fmt"
	"heatreeve/ingest/authority"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
	"time"

	mqtt "github.com/eclipse/paho.mqtt.golang"
)

// broker is Debian's mosquitto on the files of this folder, in a folder and on ports of its own.
type broker struct {
	*process
	dir           string
	port, portTLS string
	authority     *authority.Authority
}

const (
	agentPassword = "of the agent"
	plantPassword = "of the plant"
)

// startBroker puts the files where they belong below a temporary folder and starts mosquitto on them.
func startBroker(t *testing.T) *broker {
	t.Helper()
	b := &broker{dir: t.TempDir(), port: freePort(t), portTLS: freePort(t)}
	for _, sub := range []string{"conf.d", "certs", "lib"} {
		if err := os.Mkdir(filepath.Join(b.dir, sub), 0o755); err != nil {
			t.Fatal(err)
		}
	}
	b.authority = authority.New(t, filepath.Join(b.dir, "certs"), ".crt")
	b.authority.Issue(t, "broker", "127.0.0.1")
	b.install(t, "mosquitto.conf", "/etc/mosquitto/", b.dir+"/", "/var/lib/mosquitto/", b.dir+"/lib/",
		"listener 1883 ", "listener "+b.port+" ", "log_dest syslog", "log_dest stderr"+asUser())
	b.install(t, "conf.d/heatreeve-tls.conf", "/etc/mosquitto/", b.dir+"/", "listener 8883", "listener "+b.portTLS+" 127.0.0.1")
	b.install(t, "heatreeve.acl")
	passwords := filepath.Join(b.dir, "heatreeve.passwd")
	must(t, "mosquitto_passwd", "-b", "-c", passwords, "heatreeve", agentPassword)
	must(t, "mosquitto_passwd", "-b", passwords, "plant", plantPassword)
	b.run(t)
	return b
}

// asUser keeps mosquitto from giving up root for a user who cannot enter the temporary folder.
func asUser() string {
	if os.Geteuid() == 0 {
		return "\nuser root"
	}
	return ""
}

func (b *broker) install(t *testing.T, file string, pairs ...string) {
	t.Helper()
	text := moved(t, read(t, "mosquitto/"+file), pairs...)
	if err := os.WriteFile(filepath.Join(b.dir, file), []byte(text), 0o644); err != nil {
		t.Fatal(err)
	}
}

func (b *broker) run(t *testing.T) {
	t.Helper()
	b.process = start(t, exec.Command(program(t, "mosquitto"), "-c", filepath.Join(b.dir, "mosquitto.conf")))
	b.listening(t, "127.0.0.1:"+b.port)
	b.listening(t, "127.0.0.1:"+b.portTLS)
}

// as is the start of the arguments of mosquitto_pub and mosquitto_sub under a name.
func (b *broker) as(user, password string, args ...string) []string {
	return append([]string{"-h", "127.0.0.1", "-p", b.port, "-q", "1", "-u", user, "-P", password}, args...)
}

func (b *broker) plant(args ...string) []string { return b.as("plant", plantPassword, args...) }
func (b *broker) agent(args ...string) []string { return b.as("heatreeve", agentPassword, args...) }

func TestBrokerLetsEachDoItsPart(t *testing.T) {
	b := startBroker(t)
	must(t, "mosquitto_pub", b.plant("-r", "-t", "creamery/hw/TT-201", "-m", "81.5")...)
	if got := must(t, "mosquitto_sub", b.agent("-t", "creamery/#", "-C", "1", "-W", "20", "-v")...); got != "creamery/hw/TT-201 81.5\n" {
		t.Errorf("the agent reads %q", got)
	}
}

// TestBrokerDropsWhatIsNotAllowed lets a message that must go nowhere precede one that must arrive, both retained: a
// reader of both topics, in that order, would get the first one first.
func TestBrokerDropsWhatIsNotAllowed(t *testing.T) {
	b := startBroker(t)
	large := filepath.Join(b.dir, "large")
	if err := os.WriteFile(large, make([]byte, 65537), 0o644); err != nil {
		t.Fatal(err)
	}
	for _, tt := range []struct {
		name, topic string
		publish     []string
	}{
		{"the agent writes to the plant", "creamery/hw/TT-202", b.agent("-m", "999")},
		{"a message over the size limit", "creamery/hw/TT-203", b.plant("-f", large)},
	} {
		// Refused or dropped: what the publisher is told differs between versions and does not matter here.
		out, _ := output(t, "mosquitto_pub", append(tt.publish, "-r", "-t", tt.topic)...)
		t.Logf("%s: %q", tt.name, out)
		must(t, "mosquitto_pub", b.plant("-r", "-t", "creamery/hw/TT-204", "-m", "80")...)
		got := must(t, "mosquitto_sub", b.agent("-t", tt.topic, "-t", "creamery/hw/TT-204", "-C", "1", "-W", "20", "-F", "%t %l")...)
		if got != "creamery/hw/TT-204 2\n" {
			t.Errorf("%s: the agent got %q", tt.name, got)
		}
	}
	if err := os.WriteFile(large, make([]byte, 65536), 0o644); err != nil {
		t.Fatal(err)
	}
	must(t, "mosquitto_pub", b.plant("-f", large, "-r", "-t", "creamery/hw/TT-203")...)
	if got := must(t, "mosquitto_sub", b.agent("-t", "creamery/hw/TT-203", "-C", "1", "-W", "20", "-F", "%l")...); got != "65536\n" {
		t.Errorf("a message of just the size limit arrives with %q bytes", got)
	}
}

func TestBrokerRefusesStrangers(t *testing.T) {
	b := startBroker(t)
	noName := []string{"-h", "127.0.0.1", "-p", b.port}
	for name, args := range map[string][]string{
		"wrong password":     b.as("heatreeve", plantPassword),
		"unknown name":       b.as("stranger", agentPassword),
		"neither of the two": noName,
	} {
		out, err := output(t, "mosquitto_pub", append(args, "-t", "creamery/hw/TT-201", "-m", "1")...)
		if err == nil || !strings.Contains(out, "not authorised") {
			t.Errorf("%s: %v, %q; want a refusal", name, err, out)
		}
	}
}

func TestBrokerAsksForCertificates(t *testing.T) {
	b := startBroker(t)
	b.authority.Issue(t, "client")
	certs := filepath.Join(b.dir, "certs")
	with := func(args ...string) []string {
		all := b.plant("--cafile", filepath.Join(certs, "ca.crt"), "-t", "creamery/hw/TT-201", "-m", "1")
		for i, a := range all {
			if a == b.port {
				all[i] = b.portTLS
			}
		}
		return append(all, args...)
	}
	must(t, "mosquitto_pub", with("--cert", filepath.Join(certs, "client.crt"), "--key", filepath.Join(certs, "client.key"))...)
	if out, err := output(t, "mosquitto_pub", with()...); err == nil {
		t.Errorf("a client without a certificate is let in: %q", out)
	}
	other := authority.New(t, t.TempDir(), ".crt")
	other.Issue(t, "client")
	if out, err := output(t, "mosquitto_pub", with("--cert", other.Path("client.crt"), "--key", other.Path("client.key"))...); err == nil {
		t.Errorf("a certificate of another authority is let in: %q", out)
	}
}

// subscriber is a client as the agent is one: a session that lasts, and nothing acknowledged but by the handler.
func (b *broker) subscriber(t *testing.T, handler mqtt.MessageHandler) mqtt.Client {
	t.Helper()
	o := mqtt.NewClientOptions().AddBroker("mqtt://127.0.0.1:" + b.port).SetClientID("heatreeve-test").
		SetUsername("heatreeve").SetPassword(agentPassword).SetCleanSession(false).SetAutoAckDisabled(true).
		SetAutoReconnect(false)
	o.SetDefaultPublishHandler(handler)
	c := mqtt.NewClient(o)
	settle(t, c.Connect())
	settle(t, c.Subscribe("creamery/#", 1, nil))
	return c
}

func settle(t *testing.T, token mqtt.Token) {
	t.Helper()
	if !token.WaitTimeout(patience) || token.Error() != nil {
		t.Fatalf("broker: %v", token.Error())
	}
}

// publish sends the numbers 0 to n-1 as the plant.
func (b *broker) publish(t *testing.T, n int) {
	t.Helper()
	var lines strings.Builder
	for i := range n {
		fmt.Fprintln(&lines, i)
	}
	cmd := exec.CommandContext(within(t), program(t, "mosquitto_pub"), b.plant("-t", "creamery/hw/FT-201", "-l")...)
	cmd.Stdin = strings.NewReader(lines.String())
	if out, err := cmd.CombinedOutput(); err != nil {
		t.Fatalf("mosquitto_pub: %v\n%s", err, out)
	}
}

// receive wants the numbers 0 to n-1 in order.
func receive(t *testing.T, got <-chan string, n int) {
	t.Helper()
	end := time.After(patience)
	for i := range n {
		select {
		case m := <-got:
			if m != fmt.Sprint(i) {
				t.Fatalf("message %d is %q", i, m)
			}
		case <-end:
			t.Fatalf("message %d of %d did not come within %v", i, n, patience)
		}
	}
}

// TestBrokerBearsLateAcknowledgement holds 900 messages unconfirmed, as one commit of the agent may.
func TestBrokerBearsLateAcknowledgement(t *testing.T) {
	b := startBroker(t)
	got := make(chan string, 1000)
	c := b.subscriber(t, func(_ mqtt.Client, m mqtt.Message) { got <- string(m.Payload()) })
	defer c.Disconnect(100)
	b.publish(t, 900)
	receive(t, got, 900)
}

// TestBrokerKeepsReadingsThroughARestart sends three times mosquitto's default queue to an absent agent, and stops and
// starts the broker before the agent is back.
func TestBrokerKeepsReadingsThroughARestart(t *testing.T) {
	b := startBroker(t)
	got := make(chan string, 4000)
	keep := func(_ mqtt.Client, m mqtt.Message) {
		got <- string(m.Payload())
		m.Ack()
	}
	b.subscriber(t, keep).Disconnect(100)
	b.publish(t, 3000)
	b.stop(t)
	b.run(t)
	c := b.subscriber(t, keep)
	defer c.Disconnect(100)
	receive(t, got, 3000)
}
