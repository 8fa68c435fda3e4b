package agent

import (
	"math"
	"net/url"
	"slices"
	"time"

	"heatreeve/agent/account"
	"heatreeve/agent/answer"
)

// Selection says what of a history is to be exported: the readings of a tag, or the minute
// or hour records of a load.
type Selection struct {
	Tag, Load string // one of the two
	By        string // minute or hour, of a load; empty is minute
	// From and To are instants as [account.Instant] reads them; empty is as far as the
	// history goes. To is not in the export any more.
	From, To string
	Zone     string // IANA name of the time zone of From and To; empty for the site's
	Format   string // csv, json or parquet; empty is csv
}

// values are the parameters of s as the agent's page takes them.
func (s Selection) values() url.Values {
	v := url.Values{}
	for name, field := range s.fields() {
		if *field != "" {
			v.Set(name, *field)
		}
	}
	return v
}

func (s *Selection) fields() map[string]*string {
	return map[string]*string{"tag": &s.Tag, "load": &s.Load, "by": &s.By, "from": &s.From, "to": &s.To, "zone": &s.Zone, "format": &s.Format}
}

// selectionOf reads the parameters back.
func selectionOf(v url.Values) (s Selection, err error) {
	fields := s.fields()
	for name, texts := range v {
		switch field := fields[name]; {
		case field == nil:
			return s, answer.Wrongf("%s is no parameter; known: tag, load, by, from, to, zone, format", name)
		case len(texts) != 1:
			return s, answer.Wrongf("%s is given %d times", name, len(texts))
		default:
			*field = texts[0]
		}
	}
	return s, nil
}

// check looks at what does not depend on the history.
func (s *Selection) check() error {
	switch {
	case s.Tag == "" && s.Load == "":
		return answer.Wrongf("tag or load must be given")
	case s.Tag != "" && s.Load != "":
		return answer.Wrongf("tag %q and load %q: an export is of one of them", s.Tag, s.Load)
	case s.Tag != "" && s.By != "":
		return answer.Wrongf("by %q: readings are exported one by one; only the records of a load are by minute or by hour", s.By)
	case !slices.Contains([]string{"", ofMinute, ofHour}, s.By):
		return answer.Wrongf("by %q: allowed are minute, hour", s.By)
	case !slices.Contains([]string{"", "csv", "json", parquetFormat}, s.Format):
		return answer.Wrongf("format %q: allowed are csv, json, parquet", s.Format)
	}
	return nil
}

// What an export is of.
const (
	ofReading = "reading"
	ofMinute  = "minute"
	ofHour    = "hour"
)

func (s *Selection) of() string {
	switch {
	case s.Tag != "":
		return ofReading
	case s.By == ofHour:
		return ofHour
	}
	return ofMinute
}

// span is the time that is asked for, own being the zone of the history.
func (s *Selection) span(own *time.Location) (from, to int64, err error) {
	from, to = math.MinInt64, math.MaxInt64
	if s.From == "" && s.To == "" && s.Zone == "" {
		return from, to, nil
	}
	zone, err := placeOf(s.Zone, own)
	if err != nil {
		return from, to, err
	}
	if s.From != "" {
		if from, err = account.Instant(s.From, zone); err != nil {
			return from, to, answer.Wrongf("from %v", err)
		}
	}
	if s.To != "" {
		if to, err = account.Instant(s.To, zone); err != nil {
			return from, to, answer.Wrongf("to %v", err)
		}
	}
	if from >= to {
		return from, to, answer.Wrongf("to %s is not after from %s; it is the end, and not in the export itself: for one day write the next", s.To, s.From)
	}
	return from, to, nil
}
