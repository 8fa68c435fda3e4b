// Command heatreeve turns a plant's MQTT temperature, flow and pressure tags into
// live sensible heat loads.
package main

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"io"
	"os"
	"os/signal"
	"runtime/debug"
	"strings"
	"syscall"

	"heatreeve/agent"
	"heatreeve/agent/site"
)

// Exit statuses.
const (
	exitGood   = 0
	exitFailed = 1
	exitWrong  = 2 // wrong usage, or a wrong file
	exitStands = 3 // a warning stands
)

// growth is by how many per cent the memory in use grows before it is swept: half of what Go
// takes, since the box is small and the agent's time is mostly not its own. GOGC says otherwise.
const growth = 50

func main() {
	if os.Getenv("GOGC") == "" {
		debug.SetGCPercent(growth)
	}
	os.Exit(run(context.Background(), os.Args[1:], os.Stdout, os.Stderr))
}

// command is one word of the command line.
type command struct {
	name    string
	operand string // as in the usage line
	about   string
	more    string // what else its help says, or ""
	run     func(ctx context.Context, c *call) error
}

var commands = []command{
	{"run", "--site FILE --data DIR [--listen ADDR] [--web-config FILE] [--openly]", "run the agent on a plant", "", runAgent},
	{"check", "FILE [--live] [--for DURATION]", "check a site file and tell every fault in it", checkHelp, runCheck},
	{"survey", "--broker URL [--for DURATION] [--filter TOPICS] [--draft FILE] [--format table|json] [--most N] [--username NAME] [--password-file FILE|--password-env VARIABLE] [--ca FILE] [--certificate FILE --key FILE] [--server-name NAME]", "find out what a broker carries, and draft a site file", surveyHelp, runSurvey},
	{"demo", "[--listen ADDR] [--web-config FILE] [--openly] [--data DIR] [--for DURATION] [--speed N]", "run the agent on an invented plant with a broker of its own", "", runDemo},
	{"report", "--data DIR --from DATE [--to DATE] [--by hour|day|month] [--load NAME] [--demand LENGTH] [--shares] [--format table|csv|json] [--zone NAME] [--site FILE]", "tell the heat of every load by hour, day or month", reportHelp, runReport},
	{"explain", "LOAD --data DIR [--at TIME] [--zone NAME] [--json]", "tell the working of one figure, line by line", explainHelp, runExplain},
	{"learn", "--site FILE --data DIR --load NAME --against TAG[,TAG] [--from DATE] [--to DATE] [--by DURATION] [--habit none|day|week] [--straight] [--zone NAME]", "learn what a load does, and print it for the site file", learnHelp, runLearn},
	{"export", "--data DIR --tag NAME|--load NAME [--by minute|hour] [--from DATE] [--to DATE] [--format csv|json|parquet] [--zone NAME] [--progress]", "give out the readings of a tag, or the minutes or hours of a load", exportHelp, runExport},
	{"warnings", "--data DIR [--format table|json]", "tell what the agent warns of now", warningsHelp, runWarnings},
	{"acknowledge", "SUBJECT --data DIR --by NAME --reason TEXT [--kind KIND]", "acknowledge the warnings on a load or exchanger", markHelp, runAcknowledge},
	{"shelve", "SUBJECT --data DIR --by NAME --reason TEXT [--kind KIND] [--until TIME|--for DURATION|--end]", "shelve warnings on a load or exchanger for a time", markHelp, runShelve},
	{"events", "--data DIR [--from DATE] [--to DATE] [--kind KIND] [--subject NAME|--load NAME] [--format table|csv|json] [--zone NAME]", "tell what happened beside the accounts", eventsHelp, runEvents},
	{"salvage", "--data DIR [--into DIR]", "save what can be read of a damaged history to a new one", salvageHelp, runSalvage},
	{"properties", "FLUID --temperature T[,T2,...] [--pressure P] [--barometer P] [--json] | --list [--json]", "tell the properties of a fluid", fluidHelp, runProperties},
	{"duty", "FLUID --flow F --from T1 --to T2 [--pressure P] [--outlet-pressure P] [--barometer P] [--meter-at inlet|outlet] [--json]", "work one heat duty, with its working", fluidHelp + dutyHelp, runDuty},
	{"version", "", "tell the version", "", runVersion},
}

// call is one invocation of a command.
type call struct {
	command
	args           []string
	operands       []string // what is no option, once parsed
	stdout, stderr io.Writer
	flags          *flag.FlagSet
}

// usageError is a fault of the command line or of a file named on it.
type usageError struct{ error }

func (e usageError) Unwrap() error { return e.error }

func wrongf(format string, args ...any) error { return usageError{fmt.Errorf(format, args...)} }

// run is the program but for the exit: it returns the status.
func run(ctx context.Context, args []string, stdout, stderr io.Writer) int {
	ctx, stop := signal.NotifyContext(ctx, os.Interrupt, syscall.SIGTERM)
	defer stop()
	context.AfterFunc(ctx, stop) // after the first signal, a second one kills at once
	if len(args) == 0 {
		usage(stdout)
		return exitWrong
	}
	switch args[0] {
	case "help", "-h", "--help":
		if len(args) == 1 {
			usage(stdout)
			return exitGood
		}
		args = []string{args[1], "--help"}
	case "-v", "--version":
		args = []string{"version"}
	}
	for _, c := range commands {
		if c.name == args[0] {
			return status(c.invoke(ctx, args[1:], stdout, stderr), stderr)
		}
	}
	hint := ""
	if guess := intended(args[0], known()); len(guess) > 0 {
		hint = "; near: " + strings.Join(guess, ", ")
	}
	return status(wrongf("unknown command %q%s; known: %s, help", args[0], hint, strings.Join(known(), ", ")), stderr)
}

func known() []string {
	var all []string
	for _, c := range commands {
		all = append(all, c.name)
	}
	return all
}

func (c command) invoke(ctx context.Context, args []string, stdout, stderr io.Writer) error {
	f := flag.NewFlagSet("heatreeve "+c.name, flag.ContinueOnError)
	f.SetOutput(io.Discard)
	f.Usage = func() {}
	return c.run(ctx, &call{command: c, args: args, stdout: stdout, stderr: stderr, flags: f})
}

func status(err error, stderr io.Writer) int {
	var usage usageError
	var faults site.Faults
	switch {
	case err == nil, errors.Is(err, flag.ErrHelp):
		return exitGood
	case errors.Is(err, errStands):
		return exitStands
	case errors.As(err, &faults):
		fmt.Fprintln(stderr, faults)
		return exitWrong
	case errors.As(err, &usage):
		fmt.Fprintln(stderr, "error:", err)
		return exitWrong
	}
	fmt.Fprintln(stderr, "error:", err)
	return exitFailed
}

// usage is the command's line of usage.
func (c command) usage() string { return strings.TrimSpace("heatreeve " + c.name + " " + c.operand) }

// usageLines is usage in lines, the first behind first, the others behind indent. An option stays with
// its value.
func (c command) usageLines(first, indent string) string {
	var parts []string
	for _, word := range strings.Fields(c.usage()) {
		if last := len(parts) - 1; last > 0 && !strings.ContainsAny(word[:1], "[-|") {
			parts[last] += " " + word
			continue
		}
		parts = append(parts, word)
	}
	return set(first, indent, parts)
}

func usage(w io.Writer) {
	fmt.Fprint(w, "heatreeve turns MQTT temperature, flow and pressure tags into live sensible\nheat loads.\n\n")
	for _, c := range commands {
		fmt.Fprintf(w, "%s\n        %s\n", c.usageLines("  ", "      "), c.about)
	}
	fmt.Fprintf(w, "\n  heatreeve COMMAND --help tells the options of one.\n\nExit status: 0 good, 1 failed, 2 wrong usage or wrong file,\n3 of warnings: one stands.\n\n%s\n", agent.Safety)
}
