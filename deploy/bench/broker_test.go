package bench

import (
	"fmt"
	"net"
	"os"
	"os/exec"
	"path/filepath"
	"testing"
)

// mosquitto starts a broker that keeps as much for each client as it can, and returns its
// address. It writes its store once in half an hour, as Debian's does.
func mosquitto(b *testing.B) (address string) {
	b.Helper()
	path, err := exec.LookPath("mosquitto")
	if err != nil {
		path = "/usr/sbin/mosquitto" // not on everyone's PATH
	}
	address = freeAddress(b)
	_, port, _ := net.SplitHostPort(address)
	config := filepath.Join(b.TempDir(), "mosquitto.conf")
	text := fmt.Sprintf("listener %s 127.0.0.1\nallow_anonymous true\nmax_inflight_messages 65000\nmax_queued_messages 65000\n", port)
	if err := os.WriteFile(config, []byte(text), 0o600); err != nil {
		b.Fatal(err)
	}
	if _, err := os.Stat(path); err != nil {
		b.Fatal("mosquitto is not installed; on Debian: apt-get install mosquitto")
	}
	launch(b, path, "-c", config)
	eventually(b, "mosquitto listens", func() bool {
		c, err := net.Dial("tcp", address)
		return err == nil && c.Close() == nil
	})
	return address
}
