package answer

import (
	"errors"
	"net/url"
	"strings"
	"testing"
)

// A query comes back from its parameters as it was, and what is wrong with them is told.
func TestSeriesQueryRoundTrip(t *testing.T) {
	for _, q := range []SeriesQuery{
		{Load: "main", From: "2026-12-01"},
		{Load: "a & b", From: "2026-12-01T06:00+01:00", To: "2026-12-02", Points: MostPoints, Zone: "Europe/Dublin"},
	} {
		if got, err := SeriesQueryOf(q.Values()); err != nil || got != q {
			t.Errorf("%+v came back as %+v, %v", q, got, err)
		}
	}
	for text, want := range map[string]string{
		"from=2026-12-01":                          "load is missing",
		"load=main":                                "from is missing",
		"load=main&from=2026-12-01&points=0":       "points \"0\": allowed are 1 to 2000",
		"load=main&from=2026-12-01&points=2001":    "points \"2001\": allowed are 1 to 2000",
		"load=main&from=2026-12-01&points=many":    "points \"many\": allowed are 1 to 2000",
		"load=main&load=other&from=2026-12-01":     "load is given 2 times",
		"load=main&from=2026-12-01&until=tomorrow": "until is no parameter; known: load, from, to, points, zone",
	} {
		v, err := url.ParseQuery(text)
		if err != nil {
			t.Fatal(err)
		}
		var wrong *QueryError
		if _, err := SeriesQueryOf(v); !errors.As(err, &wrong) || !strings.Contains(err.Error(), want) {
			t.Errorf("%s: %v, want %q", text, err, want)
		}
	}
}
