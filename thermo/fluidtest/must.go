package fluidtest

import "testing"

// Must is what a call returned, for the test it is then given to: an error ends that.
func Must[V any](v V, err error) func(t testing.TB) V {
	return func(t testing.TB) V {
		t.Helper()
		if err != nil {
			t.Fatal(err)
		}
		return v
	}
}
