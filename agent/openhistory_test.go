package agent

import (
	"context"
	"errors"
	"log/slog"
	"path/filepath"
	"strings"
	"testing"

	"heatreeve/store"
)

// warnings hands on the warnings of a log.
type warnings struct {
	slog.Handler
	warned chan string
}

func (h warnings) Handle(_ context.Context, r slog.Record) error {
	if r.Level == slog.LevelWarn {
		h.warned <- r.Message
	}
	return nil
}

func (h warnings) Enabled(context.Context, slog.Level) bool { return true }

// A start waits for readers, says so, and goes on when they have gone; it ends when it is
// asked to, and where another agent runs.
func TestStartWhileTheHistoryIsRead(t *testing.T) {
	t.Parallel()
	path := filepath.Join(t.TempDir(), HistoryFile)
	if err := keep(t, path, store.Options{}, 60, ramp, "ramp").Close(); err != nil {
		t.Fatal(err)
	}
	reader, err := store.OpenReadOnly(path)
	if err != nil {
		t.Fatal(err)
	}
	h := warnings{slog.DiscardHandler, make(chan string, 9)}
	o := store.Options{Log: slog.New(h)}
	ctx, cancel := context.WithCancel(t.Context())
	defer cancel()
	go func() {
		if text := <-h.warned; !strings.Contains(text, "is being read") {
			t.Errorf("told %q", text)
		}
		cancel()
		<-h.warned
		if err := reader.Close(); err != nil {
			t.Error(err)
		}
	}()
	if db, err := openHistory(ctx, path, o); db != nil || !errors.Is(err, context.Canceled) {
		t.Errorf("asked to stop: %v", err)
	}
	db, err := openHistory(t.Context(), path, o)
	if err != nil {
		t.Fatal(err)
	}
	defer db.Close()
	if _, err := openHistory(t.Context(), path, o); !errors.Is(err, store.ErrLocked) {
		t.Errorf("a second agent: %v", err)
	}
}
