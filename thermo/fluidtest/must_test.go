package fluidtest

import (
	"strconv"
	"testing"
)

func TestMust(t *testing.T) {
	if got := Must(strconv.Atoi("300"))(t); got != 300 {
		t.Errorf("%d, want 300", got)
	}
	said := ending(func(t testing.TB) { Must(strconv.Atoi("3oo"))(t) })
	if want := `strconv.Atoi: parsing "3oo": invalid syntax`; said != want {
		t.Errorf("ended with %q, want %q", said, want)
	}
}
