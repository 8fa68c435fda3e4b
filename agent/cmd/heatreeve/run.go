package main

import (
	"context"
	"log/slog"
	"net"

	"heatreeve/agent"
)

func runAgent(ctx context.Context, c *call) error {
	file := c.flags.String("site", "", "site `FILE` in YAML")
	data := c.flags.String("data", "", "`DIR` that holds the history; made when it is not there")
	listen := c.flags.String("listen", defaultListen, "`ADDR` of metrics and health, host:port")
	if err := c.parse(0, ""); err != nil {
		return err
	}
	if *file == "" || *data == "" {
		return wrongf("heatreeve run: --site and --data must be given; see heatreeve run --help")
	}
	if _, _, err := net.SplitHostPort(*listen); err != nil {
		return wrongf("heatreeve run: --listen %q: %w; write host:port", *listen, err)
	}
	s, err := load(*file)
	if err != nil {
		return err
	}
	a, err := agent.New(s, agent.Options{Data: *data, Listen: *listen, Version: version, Log: slog.New(slog.NewTextHandler(c.stderr, nil))})
	if err != nil {
		return usageError{err}
	}
	return a.Run(ctx)
}
