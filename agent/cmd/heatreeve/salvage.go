package main

import (
	"context"
	"errors"
	"fmt"

	"heatreeve/agent"
)

// salvageHelp tells what is saved.
const salvageHelp = `The damaged file is only read, and stays as it is. Saved is what passes its
checksum; what is lost is told by number and time, and ends with status 1.
Batches are what single commits brought. End the agent first. To go on with what
is saved, move the damaged file away and the new one to its place. Without the
state of the accounts they go on from the registers, and the time since the last
commit is missing; reports and exports want --zone until the agent has run.
`

func runSalvage(_ context.Context, c *call) error {
	data := c.flags.String("data", "", "`DIR` that holds the damaged history, or a copy of its file")
	into := c.flags.String("into", "", "`DIR` that the new history goes to; without it, the folder "+agent.SalvageDir+" in that of the old one")
	if err := c.parse(0, ""); err != nil {
		return err
	}
	if *data == "" {
		return wrongf("heatreeve salvage: --data is missing; usage: %s", c.usage())
	}
	s, err := agent.Salvage(*data, *into)
	if err != nil {
		return err
	}
	fmt.Fprintf(c.stdout, "saved to %s\n", s.Path)
	for _, line := range s.Lines {
		fmt.Fprintln(c.stdout, line)
	}
	if !s.Whole {
		return errors.New("not all could be saved")
	}
	return nil
}
