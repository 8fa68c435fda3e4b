package ingest

import (
	"strings"
	"testing"
)

// The examples of MQTT 3.1.1, sections 4.7.1 and 4.7.2.
func TestFiltersCoverTopics(t *testing.T) {
	for _, tt := range []struct {
		filter, topic string
		want          bool
	}{
		{"sport/tennis/player1/#", "sport/tennis/player1", true},
		{"sport/tennis/player1/#", "sport/tennis/player1/ranking", true},
		{"sport/tennis/player1/#", "sport/tennis/player1/score/wimbledon", true},
		{"sport/#", "sport", true},
		{"#", "a/b", true},
		{"sport/tennis/+", "sport/tennis/player1", true},
		{"sport/tennis/+", "sport/tennis/player1/ranking", false},
		{"sport/+", "sport", false},
		{"sport/+", "sport/", true},
		{"+/+", "/finance", true},
		{"/+", "/finance", true},
		{"+", "/finance", false},
		{"#", "$SYS/uptime", false},
		{"+/monitor/Clients", "$SYS/monitor/Clients", false},
		{"$SYS/#", "$SYS/monitor/Clients", true},
		{"a/b", "a/b", true},
		{"a/b", "a/B", false},
	} {
		if got := covers(tt.filter, tt.topic); got != tt.want {
			t.Errorf("%q covers %q: %t, want %t", tt.filter, tt.topic, got, tt.want)
		}
	}
}

func TestFiltersOverlap(t *testing.T) {
	for _, tt := range []struct {
		a, b string
		want bool
	}{
		{"a/#", "a", true}, {"a/#", "a/b/c", true}, {"a/+", "a/b", true}, {"a/+/c", "a/b/+", true}, {"#", "x/+", true},
		{"a/+", "a", false}, {"a/+", "a/b/c", false}, {"a/#", "b/#", false}, {"+/x", "+/y", false}, {"a/+/c", "a/b/d", false},
	} {
		if overlap(tt.a, tt.b) != tt.want || overlap(tt.b, tt.a) != tt.want {
			t.Errorf("%q and %q: overlap %t, %t; want %t", tt.a, tt.b, overlap(tt.a, tt.b), overlap(tt.b, tt.a), tt.want)
		}
	}
}

func TestWrongFilters(t *testing.T) {
	for want, filters := range map[string][]string{
		"covers no topic":    {"plant/b"},
		"overlap":            {"plant/#", "plant/+"},
		"for a whole level":  {"plant/a+"},
		"all below":          {"#/a"},
		"must be UTF-8":      {"plant/\xff/+"},
		"shared":             {"$share/g/plant/a"},
		"the topic is empty": {""},
	} {
		_, err := New([]Tag{number("a")}, Options{URL: "mqtt://127.0.0.1", ClientID: "x", Subscribe: filters})
		if err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%q: %v; want it to say %q", filters, err, want)
		}
	}
}

func TestWildcardsInPlaceOfTopics(t *testing.T) {
	server, url := inProcess(t)
	tags := []Tag{number("a"), number("x/b"), number("x/c"), number("y/z/d")}
	before, _, stop := start(t, tags, Options{URL: url}) // subscribed one by one
	ready(t, before)
	stop()
	s, log, _ := start(t, tags, Options{URL: url, Subscribe: []string{"plant/x/+", "plant/y/#"}})
	ready(t, s)
	if len(s.topics) != 3 {
		t.Errorf("%d subscriptions; want two filters and a topic", len(s.topics))
	}
	for _, topic := range []string{"plant/x/nobody", "plant/a", "plant/x/b", "plant/x/c", "plant/y/z/d"} {
		if err := server.Publish(topic, []byte("1"), false, 1); err != nil {
			t.Fatal(err)
		}
	}
	batch := collect(t, s, len(tags))
	if len(batch) != len(tags) { // each once, though the broker's session had the topics
		t.Errorf("%d readings; want %d", len(batch), len(tags))
	}
	if got := s.Stats().UnknownTopic; got != 1 {
		t.Errorf("%d messages on unknown topics; want 1", got)
	}
	if got := log.count("leaving topics"); got != 0 {
		t.Errorf("unsubscribed %d times from what a filter covers", got)
	}
	if _, ok := server.Topics.Subscribers("plant/x/b").Subscriptions[t.Name()]; !ok {
		t.Error("the broker has no subscription for plant/x/b")
	}
}

// A tag that the site no longer has leaves a subscription in the broker's session, which
// ends with the first message on its topic.
func TestTopicsOfRemovedTagsAreLeft(t *testing.T) {
	server, url := inProcess(t)
	before, _, stop := start(t, []Tag{number("a"), number("old/b")}, Options{URL: url, Subscribe: []string{"plant/old/#"}})
	ready(t, before)
	stop()
	s, _, _ := start(t, []Tag{number("a")}, Options{URL: url})
	ready(t, s)
	if err := server.Publish("plant/old/b", []byte("1"), false, 1); err != nil {
		t.Fatal(err)
	}
	eventually(t, "unsubscribed", func() bool {
		_, still := server.Topics.Subscribers("plant/old/b").Subscriptions[t.Name()]
		return !still
	})
	if _, ok := server.Topics.Subscribers("plant/a").Subscriptions[t.Name()]; !ok {
		t.Error("the subscription of the tag that stays is gone")
	}
	if got := s.Stats().UnknownTopic; got != 1 {
		t.Errorf("%d messages on unknown topics; want 1", got)
	}
	eventually(t, "the message is acknowledged", func() bool { return held(server, t.Name()) == 0 })
}

func TestStraysAreBounded(t *testing.T) {
	s := newStrays()
	s.note(strings.Repeat("t", longestStray+1))
	for _, impossible := range []string{"", "a/#", "a/+/b", "a\x00", "a\xff"} {
		s.note(impossible)
	}
	if got := s.take(); len(got) != 0 {
		t.Errorf("a topic of %d bytes gave %d filters", longestStray+1, len(got))
	}
	for i := range 100_000 {
		s.note(strings.Repeat("x", i%100) + string(rune('a'+i%26)) + strings.Repeat("y", i/1000))
	}
	if got := len(s.known); got > mostStrays+longestStray+2 {
		t.Errorf("%d filters known; want about %d", got, mostStrays)
	}
}
