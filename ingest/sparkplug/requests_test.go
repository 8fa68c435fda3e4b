package sparkplug

import (
	"fmt"
	"testing"
)

func TestRequestsAreRare(t *testing.T) {
	r := NewRequests(func() float64 { return 0.5 })
	r.Ask(nodeN, 0)
	r.Ask(nodeN, second)
	if got := r.Due(3*second - 1); len(got) != 0 {
		t.Errorf("asked at once: %v", got)
	}
	if got := r.Due(3 * second); len(got) != 1 || got[0] != nodeN {
		t.Errorf("asked %v after 3 s, want the node", got)
	}
	r.Ask(nodeN, 4*second)
	if got := r.Due(48*second - 1); len(got) != 0 {
		t.Errorf("asked again within 45 s: %v", got)
	}
	if got := r.Due(48 * second); len(got) != 1 {
		t.Errorf("asked %v after 45 s", got)
	}
	r.Ask(nodeN, 100*second)
	r.Cancel(nodeN)
	if got := r.Due(1000 * second); len(got) != 0 {
		t.Errorf("asked %v though what was missing had come", got)
	}
}

func TestRequestsSoon(t *testing.T) {
	r := NewRequests(func() float64 { return 0.25 })
	r.AskSoon(nodeN, 0)
	if early, due := r.Due(second/2-1), r.Due(second/2); len(early) != 0 || len(due) != 1 {
		t.Errorf("asked %v before half a second and %v then; want the node then", early, due)
	}
	r.AskSoon(nodeN, second)
	if early := r.Due(second/2 + 37*second); len(early) != 0 {
		t.Errorf("asked %v again within 37.5 s", early)
	}
}

func TestSpaceAsksForBirths(t *testing.T) {
	p := newPlant(t, Options{Random: func() float64 { return 0 }})
	asked := func() string {
		p.now += 3600 * second
		return fmt.Sprint(p.Space.Requests(p.now))
	}
	p.take(nodeN, NData, at(sec(1)).seq(3).with(aliased(1, 1).double(1)))
	if got := asked(); got != "[G/N]" {
		t.Errorf("data before birth: %s", got)
	}
	p.take(nodeN, NBirth, nbirth(1, 0, 2))
	if got := asked(); got != "[]" {
		t.Errorf("after the birth: %s", got)
	}
	p.take(nodeN, NData, at(sec(3)).seq(2).with(aliased(1, 3).double(1)))
	p.take(nodeN, NData, at(sec(3)).seq(1).with(aliased(1, 3).double(1)))
	if got := asked(); got != "[]" {
		t.Errorf("what was missing came: %s", got)
	}
	p.take(nodeN, NData, at(sec(3)).seq(5).with(aliased(1, 3).double(1)))
	if got := asked(); got != "[G/N]" {
		t.Errorf("a gap: %s", got)
	}
	p.AskAll(p.now)
	p.take(nodeN, NDeath, ndeath(1))
	if got := asked(); got != "[]" {
		t.Errorf("the dead: %s", got)
	}
	if c := p.Counts(); c.Requests != 2 {
		t.Errorf("counts %+v", c)
	}
	silent := newPlant(t, Options{})
	silent.AskAll(0)
	silent.take(nodeN, NData, at(sec(1)).seq(3).with(aliased(1, 1).double(1)))
	if got := silent.Space.Requests(silent.now * 2); got != nil {
		t.Errorf("asked %v, though nobody is to be", got)
	}
}

// The command as Sparkplug 3.0 has it, chapter 5: the metric by its name, of the datatype
// Boolean, and true.
func TestRebirthRequest(t *testing.T) {
	p, all := metrics(t, RebirthRequest(start*1e6))
	if len(all) != 1 || p.Timestamp != uint64(start) || p.Numbered {
		t.Fatalf("%+v, %+v", p, all)
	}
	if m := all[0]; string(m.Name) != "Node Control/Rebirth" || m.Datatype != Boolean || m.field != fieldBool || m.bits != 1 || m.Aliased {
		t.Errorf("%+v", m)
	}
}

func TestState(t *testing.T) {
	s := State{Online: true, Timestamp: start}
	if got := string(s.Payload()); got != `{"online":true,"timestamp":1700000000000}` {
		t.Errorf("payload %s", got)
	}
	if got, err := ParseState(s.Payload()); err != nil || got != s {
		t.Errorf("%+v, %v", got, err)
	}
	for _, bad := range []string{"", "ONLINE", "{}", `{"online":true}`, `{"online":"true","timestamp":1}`, `{"timestamp":1}`} {
		if got, err := ParseState([]byte(bad)); err == nil {
			t.Errorf("%q is taken for %+v", bad, got)
		}
	}
	if got := StateTopic("works"); got != "spBv1.0/STATE/works" {
		t.Errorf("topic %q", got)
	}
	for _, bad := range []string{"", "a/b", "a+", "#", "\xff"} {
		if CheckHost(bad) == nil {
			t.Errorf("%q is taken for the id of a host", bad)
		}
	}
	if err := CheckHost("Tarnholt 1"); err != nil {
		t.Error(err)
	}
}
