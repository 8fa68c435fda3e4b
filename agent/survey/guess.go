package survey

import (
	"fmt"
	"regexp"
	"slices"
	"strconv"
	"strings"

	"heatreeve/thermo/unit"
)

// Guess is what a signal probably measures.
type Guess struct {
	Quantity string `json:"quantity,omitempty"` // "" where nothing tells
	Unit     string `json:"unit,omitempty"`     // as a site file writes it; "" where nothing tells
	// Sure tells that the unit was read and not guessed.
	Sure bool `json:"sure"`
	// Counts tells that it is a register that counts up.
	Counts bool   `json:"counts,omitempty"`
	Why    string `json:"why,omitempty"`

	dimension unit.Dimension // 0 where nothing tells
}

// tells are the dimensions that a load can use; those of registers at the end.
var tells = []unit.Dimension{unit.Temperature, unit.Pressure, unit.MassFlow, unit.VolumeFlow, unit.MolarFlow, unit.Ratio, unit.Power,
	unit.Mass, unit.Volume, unit.Amount, unit.Energy}

// registers are the dimensions of what a meter counts.
var registers = []unit.Dimension{unit.Mass, unit.Volume, unit.Amount, unit.Energy}

// guess judges by what the payload says, then by the unit in a name, then by the letters
// of an instrument's tag, then by words, each with the values as a check.
func guess(s *Signal) Guess {
	if s.Truth {
		return Guess{Quantity: "state", Unit: "%", Sure: true, Why: "a state, for running or bypass of a load, which read true as 100 %"}
	}
	g := Guess{}
	if s.Says != "" {
		g = said(s)
	} else {
		g = fromNames(s)
	}
	if g.dimension != 0 {
		g.Quantity = g.dimension.String()
	}
	if g.dimension == unit.Temperature && g.Unit == "" && s.Says == "" {
		g.scale(s)
	}
	switch {
	case s.Rising && (g.dimension == 0 || slices.Contains(registers, g.dimension)):
		g.Counts = true
		g.because("it only rises")
	case g.dimension == unit.Energy:
		g.Counts = true // what else a plant would publish as one is no input of a load
	}
	return g
}

// said judges by the unit that the payload names. Where that is none that a load can use, as
// of a signal in mA, names tell the quantity, and neither they nor the values its unit.
func said(s *Signal) Guess {
	says := fmt.Sprintf("the payload says %q", s.Says)
	if s.Metric != "" {
		says = fmt.Sprintf("its property %q says %q", s.Unit, s.Says)
	}
	if u, err := unit.LookupAs(s.Says, tells...); err == nil {
		return Guess{Unit: u.Symbol, Sure: true, dimension: u.Dimension, Why: says + datum(u, s.Says)}
	}
	if u, err := unit.LookupAs(suffixes[strings.ToLower(strings.ReplaceAll(s.Says, " ", ""))], tells...); err == nil {
		return Guess{Unit: u.Symbol, dimension: u.Dimension, Why: fmt.Sprintf("%s, taken for %s%s", says, u.Symbol, datum(u, s.Says))}
	}
	g := fromNames(s)
	g.Unit, g.Sure = "", false
	why := g.Why
	g.Why = says + ", which is no unit of what a load uses"
	if why != "" {
		g.because(why)
	}
	return g
}

func (g *Guess) because(why string) {
	if g.Why != "" {
		g.Why += "; "
	}
	g.Why += why
}

// datum is what a reason says of a pressure whose unit, as it is written, leaves open what it
// counts from: a site file takes it for absolute.
func datum(u unit.Unit, text string) string {
	if gauge, err := unit.LookupAs(u.Symbol+"g", unit.Pressure); err == nil && gauge.Gauge && u.Dimension == unit.Pressure && len(plain(text)) <= len(u.Symbol) {
		return fmt.Sprintf(", taken as absolute: if it is gauge, write %s", gauge.Symbol)
	}
	return ""
}

// scale tells the unit of a temperature by its numbers, where they leave one only.
func (g *Guess) scale(s *Signal) {
	switch span := number(s.Min) + " to " + number(s.Max); {
	case s.Min >= -50 && s.Max <= 200:
		g.Unit = "°C"
		if s.Max > 100 {
			span += " fits °C of something under pressure, and °F as well"
			g.because(span)
			break
		}
		g.because(span + " fits °C")
	case s.Min >= 223 && s.Max <= 473:
		g.Unit = "K"
		g.because(span + " fits K; it may be °F or °C of something hot as well")
	default:
		g.because(span + " tells no scale")
	}
}

// fromNames judges by the member's name and the levels of the topic, the nearest first.
func fromNames(s *Signal) Guess {
	var g Guess
	for _, name := range names(s) {
		name, inside, bracketed := inBrackets(name)
		if bracketed && g.Unit == "" && (g.dimension == 0 || g.dimension == inside.Dimension) {
			g.Unit, g.dimension, g.Sure = inside.Symbol, inside.Dimension, true
			g.because(fmt.Sprintf("the unit in brackets behind %q", name))
		}
		words := split(name)
		if u, text, ok := unitIn(words); ok && g.Unit == "" && (g.dimension == 0 || g.dimension == u.Dimension) {
			g.Unit, g.dimension, g.Sure = u.Symbol, u.Dimension, true
			g.because(fmt.Sprintf("the name %q ends in %q%s", name, text, datum(u, text)))
		}
		if g.dimension != 0 {
			continue
		}
		if d, ok := byLetters(name); ok {
			g.dimension, g.Counts = d.of, d.of == unit.Volume
			g.because(fmt.Sprintf("%s begins the tag of %s", d.letters, d.says))
		} else if d, word, ok := byWord(words); ok {
			g.dimension = d
			g.because(fmt.Sprintf("the word %q", word))
		}
	}
	return g
}

// names are what may tell about a signal: its member, unless that is such as "value", and
// the levels of its topic, from the last one on.
func names(s *Signal) []string {
	var all []string
	if s.Metric != "" {
		all = levels(s.Metric)
		slices.Reverse(all)
	}
	for p := s.Value; p != ""; p = parent(p) {
		if k := key(p); !slices.Contains(valueWords, plain(k)) {
			all = append(all, withoutValue(k))
		}
	}
	of := levels(s.Topic)
	slices.Reverse(of)
	return append(all, of[:min(3, len(of))]...)
}

// split parts a name into words in small letters: at signs, and where a small letter
// meets a capital one.
func split(name string) []string {
	var spaced strings.Builder
	var before rune
	for _, r := range name {
		if before >= 'a' && before <= 'z' && r >= 'A' && r <= 'Z' {
			spaced.WriteByte(' ')
		}
		spaced.WriteRune(r)
		before = r
	}
	return strings.FieldsFunc(strings.ToLower(spaced.String()), func(r rune) bool { return strings.ContainsRune("_-. /:", r) })
}

// suffixes are the spellings of units that names end in, where signs cannot stand.
var suffixes = map[string]string{
	"degc": "°C", "celsius": "°C", "degf": "°F", "fahrenheit": "°F", "kelvin": "K", "degk": "K",
	"m3h": "m3/h", "m3/h": "m3/h", "m3hr": "m3/h", "cmh": "m3/h", "lpm": "L/min", "lmin": "L/min", "lps": "L/s", "ls": "L/s", "lph": "L/h", "lh": "L/h",
	"gpm": "gpm", "kgs": "kg/s", "kgh": "kg/h", "kghr": "kg/h", "th": "t/h", "nm3h": "Nm3/h",
	"bar": "bar", "barg": "barg", "bara": "bara", "mbar": "mbar", "kpa": "kPa", "mpa": "MPa", "psi": "psi", "psig": "psig", "psia": "psia",
	"kw": "kW", "mw": "MW", "kwh": "kWh", "mwh": "MWh", "gj": "GJ", "m3": "m3", "pct": "%", "percent": "%",
}

// unitIn is the unit that the words of a name end in.
func unitIn(words []string) (u unit.Unit, text string, ok bool) {
	if len(words) < 2 {
		return u, "", false
	}
	for n := 1; n <= 2 && n < len(words); n++ { // "kg_h" as well as "kgh"
		text = strings.Join(words[len(words)-n:], "")
		symbol, known := suffixes[text]
		if !known {
			continue
		}
		if u, err := unit.LookupAs(symbol, tells...); err == nil {
			return u, text, true
		}
	}
	return u, "", false
}

// letters of ISA-5.1 (from memory): the first one names what is measured.
type letters struct {
	letters string
	of      unit.Dimension
	says    string
}

var instrument = regexp.MustCompile(`^([A-Z]{1,4})[-_ .]?[0-9]{1,6}[A-Z]?$`)

// functions are the letters that may follow the first in the tag of something that
// measures: element, indicator, transmitter, recorder, controller's input, totalizer, yard.
const functions = "EITRCQYXA"

func byLetters(name string) (l letters, ok bool) {
	m := instrument.FindStringSubmatch(strings.ToUpper(name))
	if m == nil {
		return l, false
	}
	code := m[1]
	first, rest := code[:1], code[1:]
	if strings.HasPrefix(code, "PD") || strings.HasPrefix(code, "TD") {
		return l, false // differences are no input of a load
	}
	if strings.HasPrefix(code, "FQ") {
		return letters{"FQ", unit.Volume, "a flow that is summed up"}, true
	}
	if rest == "" || strings.Trim(rest, functions) != "" {
		return l, false
	}
	switch first {
	case "T":
		return letters{code, unit.Temperature, "a temperature"}, true
	case "F":
		return letters{code, unit.VolumeFlow, "a flow"}, true
	case "P":
		return letters{code, unit.Pressure, "a pressure"}, true
	}
	return l, false
}

// spoken are words of names, and what they name.
var spoken = map[string]unit.Dimension{
	"temp": unit.Temperature, "temperature": unit.Temperature, "temperatures": unit.Temperature,
	"flow": unit.VolumeFlow, "flowrate": unit.VolumeFlow, "massflow": unit.MassFlow, "volumeflow": unit.VolumeFlow,
	"pressure": unit.Pressure, "press": unit.Pressure,
	"humidity": unit.Ratio, "rh": unit.Ratio,
	"power": unit.Power, "energy": unit.Energy, "heat": unit.Energy, "volume": unit.Volume,
}

func byWord(words []string) (unit.Dimension, string, bool) {
	for _, w := range slices.Backward(words) {
		if d, ok := spoken[strings.TrimRight(w, "0123456789")]; ok {
			return d, w, true
		}
	}
	return 0, "", false
}

// number writes x with the digits that it needs, at most six.
func number(x float64) string { return strconv.FormatFloat(x, 'g', 6, 64) }
