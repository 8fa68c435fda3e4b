package agent

import (
	"path/filepath"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/warn"
	"heatreeve/ingest"
	"heatreeve/store"
)

// feedFlow feeds what feed does with another flow, so that the load is short or holds.
func feedFlow(l *ledger, from, until int64, flow float64) {
	for s := from; s < until; s++ {
		at := clock.UnixNano() + s*sec
		var in []ingest.Reading
		if s%10 == 0 {
			in = []ingest.Reading{
				{Tag: 0, At: at, Value: 353, Stamped: true},
				{Tag: 1, At: at, Value: 330, Stamped: true},
				{Tag: 2, At: at, Value: flow, Stamped: true},
			}
		}
		l.beat(in, at-5*sec)
	}
}

// A warning is one event from its begin to its end, written at once and again with its end,
// wherever the process is killed; its state comes back, and is closed for good by the end.
func TestWarningIsOneEventThroughKills(t *testing.T) {
	path, s := filepath.Join(t.TempDir(), "h.db"), parsed(t, benchSite)
	var told []string
	for i, cut := range []int64{300, 450, 600, 900, 1800} {
		l, kill := open(t, s, path, store.Options{})
		from := int64(0)
		if through := l.accounts.engine.Through(); through > 0 {
			from = (through-clock.UnixNano())/sec + 5
		}
		for at := from; at < cut; at += 30 { // commits between, and nothing after the last
			flow := 1.4
			if at >= 600 {
				flow = 2
			}
			feedFlow(l, at, at+30, flow)
			if err := l.commit(clock, false); err != nil {
				t.Fatal(err)
			}
		}
		all := ofKind(toldEvents(t, l), eventWarning)
		if len(all) != 1 {
			t.Fatalf("run %d: %q, want one warning", i, all)
		}
		told = append(told, all[0])
		if _, over := strings.CutPrefix(all[0], "warning: short, ended"); over != (cut > 900) {
			t.Errorf("run %d: %q", i, all)
		}
		if listed := l.board.Listed(); len(listed) != 1 || (listed[0].State() == warn.Returned) != (cut > 900) {
			t.Errorf("run %d: %+v", i, listed)
		}
		feedFlow(l, cut, cut+20, 2) // is lost with the process
		kill()
	}
	if !strings.Contains(told[0], "below what is expected when it was raised; since ") || !strings.Contains(told[4], "at the greatest 30") {
		t.Errorf("%q", told)
	}
}

// Marks put on a file that no agent has open are there for the next agent, with the beats
// that were committed after the last checkpoint.
func TestMarksWithoutAnAgent(t *testing.T) {
	dir := t.TempDir()
	path, s := filepath.Join(dir, HistoryFile), parsed(t, benchSite)
	l, kill := open(t, s, path, store.Options{})
	feedFlow(l, 0, 400, 1.4)
	if err := l.commit(clock, false); err != nil {
		t.Fatal(err)
	}
	feedFlow(l, 400, 460, 1.4)
	if err := l.commit(clock, false); err != nil {
		t.Fatal(err)
	}
	want := l.registers()
	kill()
	order := Order{Do: Acknowledge, Subject: "main", By: "J. Marsh", Reason: "the pump is being changed"}
	if d, err := Put(t.Context(), dir, order); err != nil || len(d.Lines) != 1 || d.Lines[0] != "acknowledged main: short, by J. Marsh: the pump is being changed" {
		t.Fatalf("%+v, %v", d, err)
	}
	if _, err := Put(t.Context(), dir, order); err == nil || !strings.Contains(err.Error(), "short of main (acknowledged)") {
		t.Errorf("twice: %v", err)
	}
	order.Do, order.For = Shelve, 2*time.Hour
	if d, err := Put(t.Context(), dir, order); err != nil || len(d.Lines) != 3 {
		t.Errorf("shelves %+v, %v", d, err)
	}
	order.Do, order.Kind = Unshelve, "over"
	if d, err := Put(t.Context(), dir, order); err != nil || len(d.Lines) != 1 {
		t.Errorf("unshelved %+v, %v", d, err)
	}
	standing, err := Warnings(t.Context(), dir)
	if err != nil || len(standing.Warnings) != 1 || standing.Warnings[0].State != warn.Acknowledged || len(standing.Shelves) != 2 {
		t.Fatalf("%+v, %v", standing, err)
	}
	l, kill = open(t, s, path, store.Options{})
	defer kill()
	if got := l.registers(); got[0] != want[0] {
		t.Errorf("registers %+v, want %+v", got[0], want[0])
	}
	if e := l.board.Listed()[0]; e.State() != warn.Acknowledged || e.Mark.By != "J. Marsh" || e.Shelf == nil {
		t.Errorf("%+v", e)
	}
	all := toldEvents(t, l)
	if len(ofKind(all, eventShelved)) != 3 || len(ofKind(all, eventUnshelved)) != 1 || len(ofKind(all, eventAcknowledged)) != 1 || len(ofKind(all, eventWarning)) != 1 {
		t.Errorf("%q", all)
	}
}

// What is wrong with an order is told with what there is, and changes nothing.
func TestWrongOrders(t *testing.T) {
	dir := t.TempDir()
	l, kill := open(t, parsed(t, benchSite), filepath.Join(dir, HistoryFile), store.Options{})
	feedFlow(l, 0, 60, 2)
	if err := l.commit(clock, true); err != nil {
		t.Fatal(err)
	}
	kill()
	good := Order{Do: Shelve, Subject: "main", By: "a", Reason: "b"}
	for want, change := range map[string]func(*Order){
		`did you mean "main"?`:       func(o *Order) { o.Subject = "mains" },
		"there are short, over":      func(o *Order) { o.Kind = "fouling" },
		"one of them tells the end":  func(o *Order) { o.Until, o.For = "2099-01-01T00:00", time.Hour },
		"720h":                       func(o *Order) { o.For = 31 * 24 * time.Hour },
		"not after now":              func(o *Order) { o.For = -time.Hour },
		"until":                      func(o *Order) { o.Until = "soon" },
		"by is missing":              func(o *Order) { o.By = "" },
		"allowed are acknowledge":    func(o *Order) { o.Do = "hide" },
		`no warning on "main" is un`: func(o *Order) { o.Do = Acknowledge },
		`is shelved`:                 func(o *Order) { o.Do = Unshelve },
	} {
		o := good
		change(&o)
		if _, err := Put(t.Context(), dir, o); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%+v: %v, want %q", o, err, want)
		}
	}
	s, err := Warnings(t.Context(), dir)
	if err != nil || len(s.Shelves) != 0 {
		t.Errorf("%+v, %v", s, err)
	}
	if o, err := orderOf(good.values()); err != nil || o != good {
		t.Errorf("%+v came back as %+v, %v", good, o, err)
	}
}
