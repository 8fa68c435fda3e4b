package agent

import (
	"crypto/rand"
	"errors"
	"fmt"
	"io/fs"
	"net"
	"net/netip"
	"os"
	"path/filepath"
	"strings"
	"syscall"
)

// addressFile, in the data folder, tells where the agent that runs on it answers its own
// command line.
const addressFile = "agent.address"

// mostAddress bounds what is read of it, in bytes.
const mostAddress = 1 << 10

// address is where an agent answers, and which run of it that is: another one may
// have come to listen there since.
type address struct {
	hostPort, run string
	key           string // proves that who has it can read the folder
}

// newAddress is one for a run that begins.
func newAddress(at net.Addr) address { return address{at.String(), rand.Text(), rand.Text()} }

// leaveAddress writes the address for those who look for the agent, and which history it is
// for: a copy of the folder has another one.
func leaveAddress(data string, a address) error {
	history, err := identity(data)
	if err != nil {
		return fmt.Errorf("address of the agent: %w", err)
	}
	path := filepath.Join(data, addressFile)
	temp := path + ".new"
	if err := os.WriteFile(temp, []byte(a.hostPort+"\n"+a.run+"\n"+history+"\n"+a.key+"\n"), 0o640); err != nil {
		return fmt.Errorf("address of the agent: %w", err)
	}
	return os.Rename(temp, path)
}

// identity tells the history in data from any other on this machine, copies too.
func identity(data string) (string, error) {
	info, err := os.Stat(filepath.Join(data, HistoryFile))
	if err != nil {
		return "", err
	}
	s, ok := info.Sys().(*syscall.Stat_t)
	if !ok {
		return "", fmt.Errorf("%s: the system tells no device and number of it", HistoryFile)
	}
	return fmt.Sprintf("device %d file %d", s.Dev, s.Ino), nil
}

// forgetAddress removes the address, should there be one.
func forgetAddress(data string) error {
	if err := os.Remove(filepath.Join(data, addressFile)); err != nil && !errors.Is(err, fs.ErrNotExist) {
		return fmt.Errorf("address of the agent: %w", err)
	}
	return nil
}

// findAddress reads the address that an agent has left. The error says why there is none, or
// why it is not to be asked: it must be of this history, and stay within this machine, for the
// key goes there.
func findAddress(data string) (address, error) {
	path := filepath.Join(data, addressFile)
	text, err := readSome(path)
	if errors.Is(err, fs.ErrNotExist) {
		return address{}, fmt.Errorf("no %s in %q tells where it answers", addressFile, data)
	}
	if err != nil {
		return address{}, err
	}
	lines := strings.Split(text, "\n")
	if len(lines) != 5 || lines[1] == "" || lines[3] == "" {
		return address{}, fmt.Errorf("%s is no address of an agent, or of an older one that is to be started anew", path)
	}
	history, err := identity(data)
	switch {
	case err != nil:
		return address{}, err
	case history != lines[2]:
		return address{}, fmt.Errorf("%s is of another history, as in a copy of a folder", path)
	}
	at, err := netip.ParseAddrPort(lines[0])
	if err != nil {
		return address{}, fmt.Errorf("%s: %w", path, err)
	}
	if !at.Addr().IsLoopback() {
		return address{}, fmt.Errorf("%s: %s is not within this machine", path, at.Addr())
	}
	return address{at.String(), lines[1], lines[3]}, nil
}

// readSome reads a regular file that is no longer than an address.
func readSome(path string) (string, error) {
	info, err := os.Stat(path)
	switch {
	case err != nil:
		return "", err
	case !info.Mode().IsRegular() || info.Size() > mostAddress:
		return "", fmt.Errorf("%s is no address of an agent", path)
	}
	text, err := os.ReadFile(path)
	return string(text), err
}
