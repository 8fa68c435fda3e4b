package demo

import "testing"

// A percent sign does not begin a line.
func TestWrapKeepsPercentWithItsNumber(t *testing.T) {
	got := wrap("conductance is 25 % below", 17)
	if len(got) != 2 || got[0] != "conductance is" || got[1] != "25 % below" {
		t.Errorf("got %q", got)
	}
}
