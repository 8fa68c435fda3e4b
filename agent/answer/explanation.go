package answer

import "net/url"

// Explanation says which figure is to be explained.
type Explanation struct {
	Load string
	At   string // instant as [account.Moment] reads it; empty for the newest figure
	Zone string // IANA name of the time zone; empty for the site's
}

func (q *Explanation) fields() map[string]*string {
	return map[string]*string{"load": &q.Load, "at": &q.At, "zone": &q.Zone}
}

// Values are the parameters of q as the agent's page takes them.
func (q Explanation) Values() url.Values {
	v := url.Values{}
	for name, field := range q.fields() {
		if *field != "" {
			v.Set(name, *field)
		}
	}
	return v
}

// ExplanationOf reads the parameters back.
func ExplanationOf(v url.Values) (q Explanation, err error) {
	fields := q.fields()
	for name, texts := range v {
		switch field := fields[name]; {
		case field == nil:
			return q, Wrongf("%s is no parameter; known: load, at, zone", name)
		case len(texts) != 1:
			return q, Wrongf("%s is given %d times", name, len(texts))
		default:
			*field = texts[0]
		}
	}
	if q.Load == "" {
		return q, Wrongf("load is missing; name the load whose figure is to be explained")
	}
	return q, nil
}
