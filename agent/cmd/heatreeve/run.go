package main

import (
	"context"
	"log/slog"

	"heatreeve/agent"
)

func runAgent(ctx context.Context, c *call) error {
	file := c.flags.String("site", "", "site `FILE` in YAML")
	data := c.flags.String("data", "", "`DIR` that holds the history; made when it is not there")
	looking := c.lookingOptions()
	if err := c.parse(0, ""); err != nil {
		return err
	}
	if *file == "" || *data == "" {
		return wrongf("heatreeve run: --site and --data must be given; see heatreeve run --help")
	}
	o, err := looking.options(c.name)
	if err != nil {
		return err
	}
	s, err := load(*file)
	if err != nil {
		return err
	}
	o.Data, o.Version, o.Log = *data, version, slog.New(slog.NewTextHandler(c.stderr, nil))
	a, err := agent.New(s, o)
	if err != nil {
		return usageError{err}
	}
	return a.Run(ctx)
}
