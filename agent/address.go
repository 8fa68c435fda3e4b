package agent

import (
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
)

// addressFile, in the data folder, tells where the agent that runs on it answers.
const addressFile = "agent.address"

// address is where an agent answers, and which run of it that is: another one may
// have come to listen there since.
type address struct{ hostPort, run string }

// leaveAddress writes the address for those who look for the agent.
func leaveAddress(data string, a address) error {
	path := filepath.Join(data, addressFile)
	temp := path + ".new"
	if err := os.WriteFile(temp, []byte(a.hostPort+"\n"+a.run+"\n"), 0o640); err != nil {
		return fmt.Errorf("address of the agent: %w", err)
	}
	return os.Rename(temp, path)
}

// forgetAddress removes the address, should there be one.
func forgetAddress(data string) error {
	if err := os.Remove(filepath.Join(data, addressFile)); err != nil && !errors.Is(err, fs.ErrNotExist) {
		return fmt.Errorf("address of the agent: %w", err)
	}
	return nil
}

// findAddress reads the address that an agent has left; ok is false where there is
// none.
func findAddress(data string) (a address, ok bool) {
	text, err := os.ReadFile(filepath.Join(data, addressFile))
	if err != nil {
		return address{}, false
	}
	lines := strings.Split(string(text), "\n")
	if len(lines) < 2 {
		return address{}, false
	}
	return address{lines[0], lines[1]}, true
}
