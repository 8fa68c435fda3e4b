package agent

import (
	"bytes"
	"log/slog"
	"strings"
	"testing"
)

// What comes by an alias that no birth has told is told once, with what to do about it.
func TestUnbornMetricsAreTold(t *testing.T) {
	for _, tt := range []struct {
		f    intake
		want string
	}{
		{intake{name: "boiler house"}, "let it ask with commands: rebirth"},
		{intake{rebirths: true}, "births are asked for"},
	} {
		var out bytes.Buffer
		log := slog.New(slog.NewTextHandler(&out, nil))
		if tt.f.tellUnborn(log); out.Len() != 0 {
			t.Errorf("nothing came, and it tells %s", out.String())
		}
		for n := range uint64(3) {
			tt.f.stats.Sparkplug.UnknownAlias = n + 1
			tt.f.tellUnborn(log)
		}
		text := out.String()
		if strings.Count(text, "level=WARN") != 1 || !strings.Contains(text, tt.want) || !strings.Contains(text, tt.f.name) {
			t.Errorf("%s, want %q once", text, tt.want)
		}
	}
}
