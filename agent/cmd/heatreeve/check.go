package main

import (
	"context"
	"fmt"

	"heatreeve/agent/site"
)

func runCheck(_ context.Context, c *call) error {
	if err := c.parse(1, "the site file"); err != nil {
		return err
	}
	s, err := load(c.flags.Arg(0))
	if err != nil {
		return err
	}
	fmt.Fprintf(c.stdout, "%s: good: %q, %d tags, %d loads\n", c.flags.Arg(0), s.Name, len(s.Tags), len(s.Loads))
	for _, l := range s.Loads {
		fmt.Fprintf(c.stdout, "  %s: %s, %s\n", l.Name, l.Stream.FluidName, l.Stream.Fluid.Source())
	}
	return nil
}

// load reads a site file; whatever is wrong with it is wrong usage, not failure.
func load(path string) (*site.Site, error) {
	s, err := site.Load(path)
	if err != nil {
		return nil, usageError{err}
	}
	return s, nil
}
