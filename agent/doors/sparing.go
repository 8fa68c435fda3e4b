package doors

import (
	"context"
	"log/slog"
	"strings"
	"sync"
	"time"
)

// sparing passes on warnings and errors, one of a kind each while, so that who asks wrongly over
// and over does not fill the log. How many were held back stands in the next one.
type sparing struct {
	slog.Handler
	every time.Duration

	mu   *sync.Mutex
	told map[string]lastTold // by kind; mu guards it
}

type lastTold struct {
	at   time.Time
	held int
}

// newSparing tells to h.
func newSparing(h slog.Handler, every time.Duration) *sparing {
	return &sparing{h, every, new(sync.Mutex), map[string]lastTold{}}
}

// Enabled implements [slog.Handler].
func (s *sparing) Enabled(ctx context.Context, level slog.Level) bool {
	return level >= slog.LevelWarn && s.Handler.Enabled(ctx, level)
}

// Handle implements [slog.Handler].
func (s *sparing) Handle(ctx context.Context, r slog.Record) error {
	held, ok := s.turn(r)
	if !ok {
		return nil
	}
	if held > 0 {
		r = r.Clone()
		r.AddAttrs(slog.Int("and_held_back", held))
	}
	return s.Handler.Handle(ctx, r)
}

// WithAttrs implements [slog.Handler].
func (s *sparing) WithAttrs(attrs []slog.Attr) slog.Handler {
	return &sparing{s.Handler.WithAttrs(attrs), s.every, s.mu, s.told}
}

// WithGroup implements [slog.Handler].
func (s *sparing) WithGroup(name string) slog.Handler {
	return &sparing{s.Handler.WithGroup(name), s.every, s.mu, s.told}
}

// turn tells whether a record is to be told, and how many of its kind were not.
func (s *sparing) turn(r slog.Record) (held int, ok bool) {
	kind := kindOf(r.Message)
	s.mu.Lock()
	defer s.mu.Unlock()
	t, known := s.told[kind]
	if known && r.Time.Sub(t.at) < s.every {
		t.held++
		s.told[kind] = t
		return 0, false
	}
	s.told[kind] = lastTold{at: r.Time}
	return t.held, true
}

// kindOf is how a message begins: what follows tells who has asked.
func kindOf(message string) string {
	words := strings.SplitN(message, " ", 3)
	return strings.Join(words[:min(2, len(words))], " ")
}
