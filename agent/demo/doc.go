// Package demo is an invented plant to try the agent on: a broker within the
// process, a simulated day, a client that publishes it, and a table of the loads
// for a terminal.
//
// The plant is simulated the other way round from the agent's work: duty and
// temperatures are chosen first, and the flow follows from the heat balance with
// the site's own fluid. Of the two loads that meet in an exchanger the flows and the
// inlets are chosen, and the duty and the outlets follow from what its plates pass.
// What the agent computes from the published signals can therefore be held against
// what the plant truly moves.
package demo
