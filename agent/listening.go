package agent

import (
	"fmt"
	"net"
)

// doors are where the agent listens: for everybody at the address it was given, and for its own
// command line at one that only the address file tells.
type doors struct {
	public, private net.Listener
}

// openDoors opens both.
func openDoors(public string) (*doors, error) {
	all, err := net.Listen("tcp", public)
	if err != nil {
		return nil, fmt.Errorf("listen on %q: %w", public, err)
	}
	own, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		all.Close()
		return nil, fmt.Errorf("listen for the command line: %w", err)
	}
	return &doors{all, own}, nil
}

// close closes what is still open.
func (d *doors) close() {
	d.public.Close()
	d.private.Close()
}
