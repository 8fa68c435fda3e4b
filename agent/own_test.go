package agent

import (
	"heatreeve/agent/doors"
	"net/http"
	"net/http/httptest"
	"strings"
)

// own serves h as an agent does to its own command line.
func own(h http.Handler) (*httptest.Server, address) {
	server := httptest.NewServer(doors.Private("R", "K", h))
	return server, address{strings.TrimPrefix(server.URL, "http://"), "R", "K"}
}
