package main

import (
	"fmt"
	"heatreeve/agent/answer"
	"io"
)

// reportEvents lists what happened beside the accounts.
func reportEvents(w io.Writer, all []answer.Event) {
	if len(all) == 0 {
		return
	}
	fmt.Fprintln(w, "\nWhat happened:")
	for i := range all {
		fmt.Fprintln(w, set("  ", "      ", fields(eventLine(&all[i]))))
	}
}

func eventLine(e *answer.Event) string {
	line := clockTime(e.At)
	switch {
	case e.Until == nil:
		line += " on"
	case e.Until.After(e.At):
		line += " to " + clockTime(*e.Until)
	}
	if line += ", " + e.Kind; e.Subject != "" {
		line += " of " + e.Subject
	}
	return line + ": " + e.Text
}
