package ingest

import (
	"context"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/eclipse/paho.mqtt.golang/packets"
)

func TestListenHearsKeptAndLiveMessages(t *testing.T) {
	server, url := inProcess(t)
	if err := server.Publish("a/kept", []byte("1"), true, 1); err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithCancel(t.Context())
	var mu sync.Mutex
	heard := map[string]Heard{}
	done := make(chan error, 1)
	go func() {
		done <- Listen(ctx, Options{URL: url, ClientID: "listener"}, []string{"a/#"}, func(h Heard) {
			mu.Lock()
			defer mu.Unlock()
			heard[h.Topic+"="+string(h.Payload)] = h
		})
	}()
	has := func(k string) bool {
		mu.Lock()
		defer mu.Unlock()
		_, ok := heard[k]
		return ok
	}
	eventually(t, "the kept message", func() bool { return has("a/kept=1") })
	for _, topic := range []string{"b/other", "a/live"} {
		if err := server.Publish(topic, []byte("2"), false, 1); err != nil {
			t.Fatal(err)
		}
	}
	eventually(t, "the live message", func() bool { return has("a/live=2") })
	cancel()
	if err := <-done; err != nil {
		t.Errorf("ended with %v, want none", err)
	}
	if len(heard) != 2 || !heard["a/kept=1"].Retained || heard["a/live=2"].Retained || heard["a/live=2"].At == 0 {
		t.Errorf("heard %+v", heard)
	}
	eventually(t, "no session at the broker", func() bool { _, ok := server.Clients.Get("listener"); return !ok })
}

func TestListenTellsWhyItCannot(t *testing.T) {
	refusing := stub(t, func(packets.ControlPacket) packets.ControlPacket { return connack(packets.ErrRefusedNotAuthorised) })
	denying := stub(t, func(p packets.ControlPacket) packets.ControlPacket {
		switch p := p.(type) {
		case *packets.ConnectPacket:
			return connack(packets.Accepted)
		case *packets.SubscribePacket:
			return suback(p, 0x80)
		}
		return nil
	})
	for _, tt := range []struct {
		url    string
		filter []string
		want   string
	}{
		{"mqtt://127.0.0.1:1", []string{"#"}, "refused"},
		{refusing, []string{"#"}, "check user name, password"},
		{denying, []string{"a/+/b", "c/#"}, "grants none of the topic filters a/+/b, c/#"},
		{denying, nil, "no topic filter"},
		{denying, []string{"a/#/b"}, `"a/#/b"`},
		{denying, []string{"a+/b"}, `"a+/b"`},
		{denying, []string{""}, "the topic is empty"},
		{"http://x", []string{"#"}, "scheme"},
	} {
		ctx, cancel := context.WithTimeout(t.Context(), 20*time.Second)
		err := Listen(ctx, Options{URL: tt.url, ClientID: "listener"}, tt.filter, func(Heard) { t.Error("heard something") })
		if err == nil || !strings.Contains(err.Error(), tt.want) || ctx.Err() != nil {
			t.Errorf("%s %q: %v, want %q before the time is over", tt.url, tt.filter, err, tt.want)
		}
		cancel()
	}
}
