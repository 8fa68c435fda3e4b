package agent

import (
	"context"
	"net/http"

	"heatreeve/agent/answer"
)

// atATime bounds how many queries of a kind there are: one in the making or on its way, and
// those that wait for their turn.
const atATime = 4

// turn lets one at a time through, while some wait.
type turn struct {
	one, all chan struct{} // hold one for the query whose turn it is, and one a query
	full     string        // what is said where no more may wait
}

func newTurn(most int, full string) turn {
	return turn{make(chan struct{}, 1), make(chan struct{}, most), full}
}

// taken waits for the turn until ctx ends, or answers that there is none.
func (t turn) taken(ctx context.Context, w http.ResponseWriter) bool {
	select {
	case t.all <- struct{}{}:
	default:
		answer.Refuse(w, http.StatusServiceUnavailable, t.full)
		return false
	}
	select {
	case t.one <- struct{}{}:
		return true
	case <-ctx.Done():
		<-t.all
		answer.Refuse(w, http.StatusServiceUnavailable, "others took all the time; try again in a while")
		return false
	}
}

// free gives it back.
func (t turn) free() { <-t.one; <-t.all }
