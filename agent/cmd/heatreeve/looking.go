package main

import (
	"fmt"

	"heatreeve/agent"
)

// defaultListen keeps what there is to see on the machine unless told otherwise.
const defaultListen = "127.0.0.1:9617"

// looking are the options of who may look at a running agent.
type looking struct {
	listen, webConfig string
	openly            bool
}

func (c *call) lookingOptions() *looking {
	l := new(looking)
	c.flags.StringVar(&l.listen, "listen", defaultListen, "`ADDR` of the pages and metrics, host:port")
	c.flags.StringVar(&l.webConfig, "web-config", "", "`FILE` in YAML with certificate and passwords for all that is shown, in the format of Prometheus exporters")
	c.flags.BoolVar(&l.openly, "openly", false, "let everybody look who reaches --listen, without a password and by any name")
	return l
}

// options are those of an agent, checked before anything starts.
func (l *looking) options(command string) (agent.Options, error) {
	o := agent.Options{Listen: l.listen, WebConfig: l.webConfig, Openly: l.openly}
	if err := agent.CheckLooking(o); err != nil {
		return o, usageError{fmt.Errorf("heatreeve %s: %w", command, err)}
	}
	return o, nil
}
