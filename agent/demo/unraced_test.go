//go:build !race

package demo

// raced tells that the race detector slows the tests down.
const raced = false
