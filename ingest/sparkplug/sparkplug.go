// Package sparkplug reads the Sparkplug B namespace of a broker (Eclipse Sparkplug 3.0):
// topics, payloads in protocol buffers, and what the messages of an edge node mean in
// their order, from its birth to its death.
//
// It has no clock and no socket: arrival instants, in Unix nanoseconds, come with the
// messages. [Space] keeps what the births have told and turns each message into
// [Reading]s of the metrics that its user wants. What comes is taken to be hostile:
// lengths, counts, and the room that names and aliases take are bounded, nested
// values are passed over unread, and a message is used as a whole or not at all.
//
// Field numbers, datatypes and rules are those of the text of Sparkplug 3.0 (Eclipse, state
// of February 2024); the chapters that comments name are from memory.
//
// A subscriber by this package reads, and does no more unless told to: it is a host
// application in the standard's sense only where it publishes its [State] too.
package sparkplug

// MaxPayload is the longest payload that is read, in bytes. The figure is our own: a
// metric of a birth has some 60 bytes, so there is room for 15,000 of them.
const MaxPayload = 1 << 20

// longestName bounds the name of a metric, in bytes; the figure is our own.
const longestName = 1024
