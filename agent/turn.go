package agent

import "net/http"

// turn lets one at a time through; it is made with room for one.
type turn chan struct{}

// taken takes the turn, or answers that it is another's, as busy says.
func (t turn) taken(w http.ResponseWriter, busy string) bool {
	select {
	case t <- struct{}{}:
		return true
	default:
		http.Error(w, busy, http.StatusServiceUnavailable)
		return false
	}
}

// free gives it back.
func (t turn) free() { <-t }
