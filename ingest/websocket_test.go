package ingest

import (
	"crypto/tls"
	"io"
	"log/slog"
	"net"
	"net/http"
	"net/http/httptest"
	"strings"
	"testing"

	"github.com/gorilla/websocket"
	mochi "github.com/mochi-mqtt/server/v2"
	"github.com/mochi-mqtt/server/v2/listeners"
)

// serveSocket is serve in a websocket.
func serveSocket(t *testing.T, config *tls.Config) (server *mochi.Server, address string) {
	t.Helper()
	l, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	address = l.Addr().String()
	if err := l.Close(); err != nil {
		t.Fatal(err)
	}
	server = mochi.New(&mochi.Options{InlineClient: true, Logger: slog.New(slog.NewTextHandler(io.Discard, nil))})
	if err := server.AddHook(new(openDoor), nil); err != nil {
		t.Fatal(err)
	}
	if err := server.AddListener(listeners.NewWebsocket(listeners.Config{ID: "w", Address: address, TLSConfig: config})); err != nil {
		t.Fatal(err)
	}
	if err := server.Serve(); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := server.Close(); err != nil {
			t.Error(err)
		}
	})
	return server, address
}

// Both ways through a websocket, to the clean end.
func TestWebsocket(t *testing.T) {
	server, address := serveSocket(t, nil)
	h := listen(t, server, presence)
	s, _, stop := start(t, []Tag{number("a")}, Options{URL: "ws://" + address + "/mqtt", Presence: Words(presence, "online", "offline")})
	ready(t, s)
	for range 300 {
		if err := server.Publish("plant/a", []byte("7"), false, 1); err != nil {
			t.Fatal(err)
		}
	}
	s.Ack(collect(t, s, 300))
	eventually(t, "acknowledgements", func() bool { return held(server, t.Name()) == 0 })
	stop()
	h.eventually(t, presence+" online", presence+" offline")
	if st := s.Stats(); st.Losses != 0 {
		t.Errorf("stats %+v; want no loss", st)
	}
}

func TestWebsocketWithTLS(t *testing.T) {
	a := plantAuthority(t)
	pair, err := tls.LoadX509KeyPair(a.Path("broker.pem"), a.Path("broker.key"))
	if err != nil {
		t.Fatal(err)
	}
	pool, err := readPool(a.Path("ca.pem"))
	if err != nil {
		t.Fatal(err)
	}
	_, address := serveSocket(t, &tls.Config{Certificates: []tls.Certificate{pair}, ClientCAs: pool, ClientAuth: tls.RequireAndVerifyClientCert})
	checkTLS(t, a, "wss://"+address)
}

// What is no websocket, or not one for MQTT, is told apart.
func TestWrongWebsockets(t *testing.T) {
	for name, tt := range map[string]struct {
		handler http.HandlerFunc
		want    string
	}{
		"a page":          {func(w http.ResponseWriter, _ *http.Request) { w.WriteHeader(http.StatusOK) }, `the answer is "200 OK"`},
		"no such path":    {http.NotFound, `the answer is "404 Not Found"`},
		"not for MQTT":    {upgradeTo(), "not one for MQTT"},
		"no end":          {endless, `more than 65536 bytes`},
		"text, not bytes": {upgradeTo("mqtt"), "text message"},
	} {
		t.Run(name, func(t *testing.T) {
			web := httptest.NewServer(tt.handler)
			defer web.Close()
			s, _, stop := start(t, []Tag{number("a")}, Options{URL: strings.Replace(web.URL, "http", "ws", 1)})
			defer stop()
			eventually(t, "a failure", func() bool { return s.Stats().Failures > 0 })
			if got := s.Stats().LastError; !strings.Contains(got, tt.want) {
				t.Errorf("%q; want it to say %q", got, tt.want)
			}
		})
	}
}

// upgradeTo opens a websocket and says one text message on it.
func upgradeTo(protocols ...string) http.HandlerFunc {
	return func(w http.ResponseWriter, r *http.Request) {
		c, err := (&websocket.Upgrader{Subprotocols: protocols}).Upgrade(w, r, nil)
		if err != nil {
			return
		}
		defer c.Close()
		_ = c.WriteMessage(websocket.TextMessage, []byte("hello")) // it may have gone
		_, _, _ = c.ReadMessage()
	}
}

// endless answers with header lines for as long as somebody reads them.
func endless(w http.ResponseWriter, _ *http.Request) {
	c, _, err := http.NewResponseController(w).Hijack()
	if err != nil {
		return
	}
	defer c.Close()
	_, err = io.WriteString(c, "HTTP/1.1 101 Switching Protocols\r\n")
	for err == nil {
		_, err = io.WriteString(c, "X-More: "+strings.Repeat("x", 1000)+"\r\n")
	}
}
