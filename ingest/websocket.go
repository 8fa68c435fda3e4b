package ingest

import (
	"context"
	"errors"
	"fmt"
	"io"
	"net"
	"sync"
	"time"

	"github.com/gorilla/websocket"
)

// socket is a stream of bytes in the binary messages of a websocket, whose bounds mean
// nothing (MQTT 3.1.1, section 6).
type socket struct {
	*websocket.Conn
	reading sync.Mutex // the library's goroutine, and ours at the goodbye
	message io.Reader  // the one at hand; nil between two
	writing sync.Mutex // the library's goroutine, and who acknowledges
}

// upgrade asks for a websocket over a connection that stands, with TLS already where
// the broker wants it.
func upgrade(ctx context.Context, raw net.Conn, b broker) (*socket, error) {
	bounded := &handshaking{Conn: raw, left: longestAnswer}
	dialer := websocket.Dialer{
		Subprotocols:   []string{"mqtt"},
		NetDialContext: func(context.Context, string, string) (net.Conn, error) { return bounded, nil },
	}
	c, answer, err := dialer.DialContext(ctx, "ws://"+b.address()+b.path, nil)
	switch {
	case errors.Is(err, websocket.ErrBadHandshake) && answer != nil:
		return nil, fmt.Errorf("%s is no websocket: the answer is %q; check port and path", b, answer.Status)
	case err != nil:
		return nil, fmt.Errorf("websocket: %w", err)
	case c.Subprotocol() != "mqtt":
		return nil, errors.Join(fmt.Errorf("%s is a websocket, but not one for MQTT; check port and path", b), c.Close())
	}
	bounded.done = true
	return &socket{Conn: c}, nil
}

// longestAnswer bounds what a peer may say, in bytes, before its websocket stands; the
// library would take in any number of header lines.
const longestAnswer = 64 << 10

// handshaking is a connection of which little is read until it is done.
type handshaking struct {
	net.Conn
	left int
	done bool
}

func (h *handshaking) Read(p []byte) (int, error) {
	if h.done {
		return h.Conn.Read(p)
	}
	if h.left <= 0 {
		return 0, fmt.Errorf("the answer has more than %d bytes; check port and path", longestAnswer)
	}
	n, err := h.Conn.Read(p[:min(len(p), h.left)])
	h.left -= n
	return n, err
}

func (s *socket) Read(p []byte) (int, error) {
	s.reading.Lock()
	defer s.reading.Unlock()
	for {
		if s.message == nil {
			kind, r, err := s.NextReader()
			switch {
			case err != nil:
				return 0, err
			case kind != websocket.BinaryMessage:
				return 0, errors.New("a text message on the websocket, where MQTT is binary")
			}
			s.message = r
		}
		n, err := s.message.Read(p)
		if errors.Is(err, io.EOF) {
			s.message, err = nil, nil
		}
		if n > 0 || err != nil {
			return n, err
		}
	}
}

func (s *socket) Write(p []byte) (int, error) {
	s.writing.Lock()
	defer s.writing.Unlock()
	if err := s.WriteMessage(websocket.BinaryMessage, p); err != nil {
		return 0, err
	}
	return len(p), nil
}

func (s *socket) SetWriteDeadline(t time.Time) error {
	s.writing.Lock()
	defer s.writing.Unlock()
	return s.Conn.SetWriteDeadline(t)
}

func (s *socket) SetDeadline(t time.Time) error {
	return errors.Join(s.SetReadDeadline(t), s.SetWriteDeadline(t))
}

// CloseWrite says that nothing more is sent.
func (s *socket) CloseWrite() error {
	bye := websocket.FormatCloseMessage(websocket.CloseNormalClosure, "")
	return s.WriteControl(websocket.CloseMessage, bye, time.Now().Add(parted))
}
