// Package page is the page that the agent serves: the sheet of all loads, the sheet of one, and
// the account. Everything in it is embedded; nothing is fetched from elsewhere.
//
// What is on a page is in its address: the place in time, the choice of loads and the units, so
// that a link can be sent. Without script the sheet of loads and the account are whole, but
// stand still. All text of figures is made here ([shown]), so that the script has no digits of
// its own: it puts what the event stream says in its place.
//
// What a page looks like stands in *.qtpl, which are compiled to Go: x is what is shown,
// {%s escapes a text for HTML, {%u one within an address as well, {%= takes in another view.
package page

//go:generate go tool qtc -skipLineComments

import (
	"encoding/hex"
	"fmt"
	"io"
	"net/http"
	"net/url"
	"strings"
	"sync/atomic"

	"heatreeve/agent/shown"
)

// Page answers for everything but the JSON interface and what supervisors ask for.
type Page struct {
	Source
	Options
	usual    shown.Units // of the site
	mux      *http.ServeMux
	feed     feed
	streams  atomic.Int64 // that are open
	ribbons  ribbons
	accounts chan struct{} // holds one while an account is in the making
}

// New returns the page of a site.
func New(source Source, o Options) *Page {
	p := &Page{Source: source, Options: o, usual: o.Site.Shown, accounts: make(chan struct{}, 1)}
	p.feed.init()
	p.ribbons.init()
	p.mux = http.NewServeMux()
	p.mux.HandleFunc("GET /", p.lost)
	p.mux.HandleFunc("GET /{$}", p.sheet)
	p.mux.HandleFunc("GET /loads/{load}", p.oneLoad)
	p.mux.HandleFunc("GET /account", p.account)
	p.mux.HandleFunc("GET /account.csv", p.accountCSV)
	p.mux.HandleFunc("GET /ribbons", p.ribbonPaths)
	p.mux.HandleFunc("GET /ribbon.svg", p.ribbonImage)
	p.mux.HandleFunc("GET /api/v1/stream", p.stream)
	p.mux.Handle("GET /assets/", assets())
	return p
}

func (p *Page) ServeHTTP(w http.ResponseWriter, r *http.Request) { p.mux.ServeHTTP(w, r) }

// lost answers at an address that is none of a page.
func (p *Page) lost(w http.ResponseWriter, r *http.Request) {
	f := p.frameOf(r, "Not found")
	f.Script, f.Fault = nil, fmt.Sprintf("There is no page at %q.", r.URL.Path)
	send(w, r, http.StatusNotFound, lostView(&f))
}

// frame is what all pages have around their content.
type frame struct {
	Title, Site  string
	Here         string // path of this page
	Safety       string
	Version      string
	Plan         string // tells one site file, and one version of the program, from another
	Units        shown.Units
	Choices      []shown.Choice
	Kept         []field // of the address, that the form of the units keeps
	unitValues   url.Values
	Script, Look []string // names of assets
	Fault        string   // what of the address is wrong
}

// field is a parameter in a form.
type field struct{ Name, Value string }

// frameOf reads the units from the address; what of it is wrong is told on the page, which
// then has the usual ones. kept names the parameters that a change of units keeps.
func (p *Page) frameOf(r *http.Request, title string, kept ...string) frame {
	v := r.URL.Query()
	f := frame{
		Title: title, Site: p.Site.Name, Here: r.URL.EscapedPath(), Safety: spaced(p.Safety), Version: p.Version, Plan: p.plan(),
		Look: []string{"sheet.css"}, Script: []string{"sheet.js"},
	}
	var err error
	if f.Units, err = shown.Choose(v, p.usual); err != nil {
		f.Fault = err.Error()
	}
	f.Choices, f.unitValues = f.Units.Choices(), f.Units.Values(p.usual)
	for _, name := range kept {
		for _, value := range v[name] {
			f.Kept = append(f.Kept, field{name, value})
		}
	}
	return f
}

// plan tells the site file and the program by which a page was made.
func (p *Page) plan() string { return hex.EncodeToString(p.Site.Digest[:6]) + "-" + p.Version }

// Link leads to a path with parameters, name and value by turns, and keeps the units.
func (f *frame) Link(path string, parameters ...string) string {
	v := url.Values{}
	for name, values := range f.unitValues {
		v[name] = values
	}
	for i := 0; i+1 < len(parameters); i += 2 {
		if parameters[i+1] != "" {
			v.Add(parameters[i], parameters[i+1])
		}
	}
	if len(v) == 0 {
		return path
	}
	return path + "?" + v.Encode()
}

// LoadLink leads to the sheet of a load.
func (f *frame) LoadLink(load string, parameters ...string) string {
	return f.Link("/loads/"+url.PathEscape(load), parameters...)
}

// spaced sets a text that has lines in one.
func spaced(text string) string { return strings.Join(strings.Fields(text), " ") }

// send writes a page.
func send(w http.ResponseWriter, r *http.Request, status int, body string) {
	w.Header().Set("Cache-Control", "no-store")
	if status == http.StatusOK {
		Answer(w, r, "text/html; charset=utf-8", []byte(body))
		return
	}
	w.Header().Set("Content-Type", "text/html; charset=utf-8")
	w.WriteHeader(status)
	_, _ = io.WriteString(w, body) // who asked has gone
}

// UnitFields are the parameters of the units, for a form that keeps them.
func (f *frame) UnitFields() (all []field) {
	for _, c := range f.Choices {
		if value := f.unitValues.Get(c.Name); value != "" {
			all = append(all, field{c.Name, value})
		}
	}
	return all
}
