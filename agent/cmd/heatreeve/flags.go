package main

import (
	"errors"
	"flag"
	"fmt"
	"slices"
	"strings"

	"heatreeve/agent"
	"heatreeve/thermo/unit/near"
)

// parse reads the options. Operands must be exactly as many as wanted; what names
// them in the error. Help is printed on request and answered with flag.ErrHelp.
func (c *call) parse(wanted int, what string) error {
	if err := c.parseOptions(); err != nil {
		return err
	}
	return c.expect(wanted, what)
}

// parseOptions reads the options wherever they stand, before or after the operands,
// which it gathers. What follows a bare -- is an operand.
func (c *call) parseOptions() error {
	rest, last := c.args, []string(nil)
	if i := slices.Index(rest, "--"); i >= 0 {
		rest, last = rest[:i], rest[i+1:]
	}
	for len(rest) > 0 {
		err := c.flags.Parse(rest)
		switch {
		case errors.Is(err, flag.ErrHelp):
			c.help()
			return err
		case err != nil:
			return wrongf("heatreeve %s: %s; see heatreeve %s --help", c.name, c.unknownOption(err), c.name)
		}
		if rest = c.flags.Args(); len(rest) > 0 {
			c.operands, rest = append(c.operands, rest[0]), rest[1:]
		}
	}
	c.operands = append(c.operands, last...)
	return nil
}

// unknownOption tells the option that may have been meant, where err is about one that
// there is not.
func (c *call) unknownOption(err error) string {
	name, ok := strings.CutPrefix(err.Error(), "flag provided but not defined: -")
	if text, bad := strings.CutSuffix(err.Error(), "for flag -for: parse error"); bad {
		return text + "for --for: write a duration, such as 90m or 8h, a day as 24h"
	}
	if !ok {
		return err.Error()
	}
	var all []string
	c.flags.VisitAll(func(f *flag.Flag) { all = append(all, f.Name) })
	name = strings.TrimPrefix(name, "-")
	text := fmt.Sprintf("unknown option --%s", name)
	if guess := intended(name, all); len(guess) > 0 {
		return text + "; near: --" + strings.Join(guess, ", --")
	}
	return text + "; known: --" + strings.Join(all, ", --")
}

// intended are the known words of which one is the beginning, or where there is none those
// a few keystrokes away.
func intended(word string, known []string) []string {
	begun := slices.DeleteFunc(slices.Clone(known), func(k string) bool { return word == "" || !strings.HasPrefix(k, word) })
	if len(begun) > 0 {
		return begun
	}
	return near.Names(word, known)
}

// given are the options on the command line, but for those named.
func (c *call) given(but ...string) []string {
	var all []string
	c.flags.Visit(func(f *flag.Flag) {
		if !slices.Contains(but, f.Name) {
			all = append(all, "--"+f.Name)
		}
	})
	return all
}

// expect holds the operands to their number.
func (c *call) expect(wanted int, what string) error {
	switch {
	case len(c.operands) < wanted:
		return wrongf("heatreeve %s: %s is missing; usage: %s", c.name, what, c.usage())
	case len(c.operands) > wanted && wanted > 0:
		return wrongf("heatreeve %s: unexpected %q; words that belong together stand in quotes; usage: %s", c.name, c.operands[wanted], c.usage())
	case len(c.operands) > wanted:
		return wrongf("heatreeve %s: unexpected %q; usage: %s", c.name, c.operands[0], c.usage())
	}
	return nil
}

func (c *call) help() {
	fmt.Fprintf(c.stdout, "%s\n\n%s.\n", c.usageLines("", "    "), strings.ToUpper(c.about[:1])+c.about[1:])
	if c.more != "" {
		fmt.Fprintf(c.stdout, "\n%s", c.more)
	}
	first := true
	c.flags.VisitAll(func(f *flag.Flag) {
		if first {
			fmt.Fprint(c.stdout, "\nOptions:\n")
			first = false
		}
		name, text := flag.UnquoteUsage(f)
		if f.DefValue != "" && f.DefValue != "0s" && f.DefValue != "false" {
			text += " (default " + f.DefValue + ")"
		}
		fmt.Fprintf(c.stdout, "  %s\n%s\n", strings.TrimSpace("--"+f.Name+" "+name), indented(text, "        "))
	})
	fmt.Fprintf(c.stdout, "\n%s\n", agent.Safety)
}
