package page

import (
	"context"
	"encoding/json"
	"fmt"
	"net/http"
	"sync"
	"time"
)

const (
	// ribbonsAtOnce bounds the loads of one request, and ribbonsKept those that are kept drawn.
	ribbonsAtOnce = 50
	ribbonsKept   = 500
)

// ribbons keeps those that were drawn, each for its minute.
type ribbons struct {
	mu   sync.Mutex
	kept map[string]keptRibbon
}

type keptRibbon struct {
	through int64 // minute
	*ribbon
}

func (k *ribbons) init() { k.kept = make(map[string]keptRibbon) }

// ribbon returns that of a load to the minute that is accounted for.
func (p *Page) ribbon(ctx context.Context, load string) (*ribbon, error) {
	s := p.Snapshot()
	if s == nil || p.loadIndex(load) < 0 {
		return nil, fmt.Errorf("there is no load %q", load)
	}
	through := time.Unix(0, s.At).In(p.Site.Zone)
	minute := through.Unix() / 60
	k := &p.ribbons
	k.mu.Lock()
	was, ok := k.kept[load]
	k.mu.Unlock()
	if ok && was.through == minute {
		return was.ribbon, nil
	}
	x, err := p.ribbonOf(ctx, load, through)
	if err != nil {
		return nil, err
	}
	k.mu.Lock()
	defer k.mu.Unlock()
	for name := range k.kept {
		if len(k.kept) < ribbonsKept {
			break
		}
		delete(k.kept, name) // any: it can be drawn again
	}
	k.kept[load] = keptRibbon{minute, x}
	return x, nil
}

// ribbonPaths answers with the ribbons of the loads that are asked for, by name. One that
// cannot be drawn is left out.
func (p *Page) ribbonPaths(w http.ResponseWriter, r *http.Request) {
	loads := r.URL.Query()["load"]
	if len(loads) > ribbonsAtOnce {
		http.Error(w, fmt.Sprintf("%d loads are asked for; at most %d at once", len(loads), ribbonsAtOnce), http.StatusBadRequest)
		return
	}
	ctx, cancel := context.WithTimeout(r.Context(), sheetWait)
	defer cancel()
	all := make(map[string]*ribbon, len(loads))
	for _, load := range loads {
		if x, err := p.ribbon(ctx, load); err == nil {
			all[load] = x
		}
	}
	body, _ := json.Marshal(all) // of texts
	Answer(w, r, "application/json", body)
}

// ribbonImage is a ribbon for those who have no script.
func (p *Page) ribbonImage(w http.ResponseWriter, r *http.Request) {
	x, err := p.ribbon(r.Context(), r.URL.Query().Get("load"))
	if err != nil {
		http.Error(w, err.Error(), http.StatusNotFound)
		return
	}
	Answer(w, r, "image/svg+xml", []byte(ribbonImageView(x)))
}
