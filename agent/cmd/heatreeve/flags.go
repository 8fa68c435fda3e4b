package main

import (
	"errors"
	"flag"
	"fmt"
	"strings"

	"heatreeve/agent"
)

// defaultListen keeps metrics on the machine unless told otherwise.
const defaultListen = "127.0.0.1:9617"

// parse reads the options. Operands must be exactly as many as wanted; what names
// them in the error. Help is printed on request and answered with flag.ErrHelp.
func (c *call) parse(wanted int, what string) error {
	err := c.flags.Parse(c.args)
	switch {
	case errors.Is(err, flag.ErrHelp):
		c.help()
		return err
	case err != nil:
		return wrongf("heatreeve %s: %w; see heatreeve %s --help", c.name, err, c.name)
	case c.flags.NArg() < wanted:
		return wrongf("heatreeve %s: %s is missing; usage: heatreeve %s %s", c.name, what, c.name, c.operand)
	case c.flags.NArg() > wanted:
		return wrongf("heatreeve %s: unexpected %q; usage: heatreeve %s %s", c.name, c.flags.Arg(wanted), c.name, c.operand)
	}
	return nil
}

func (c *call) help() {
	fmt.Fprintf(c.stdout, "%s\n\n%s.\n", c.usage(), strings.ToUpper(c.about[:1])+c.about[1:])
	first := true
	c.flags.VisitAll(func(f *flag.Flag) {
		if first {
			fmt.Fprint(c.stdout, "\nOptions:\n")
			first = false
		}
		name, text := flag.UnquoteUsage(f)
		fmt.Fprintf(c.stdout, "  --%s %s\n        %s", f.Name, name, text)
		if f.DefValue != "" && f.DefValue != "0s" {
			fmt.Fprintf(c.stdout, " (default %s)", f.DefValue)
		}
		fmt.Fprintln(c.stdout)
	})
	fmt.Fprintf(c.stdout, "\n%s\n", agent.Safety)
}
