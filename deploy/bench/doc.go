// Package bench measures what the agent costs as a whole process, side by side with
// a plain use of the same libraries, and its stored readings beside those of
// another scheme. It is a module of its own, so that what only the comparisons need
// is no dependency of Heatreeve. README.md tells how to run it and what it found.
package bench
