package named

import (
	"fmt"
	"regexp"
	"strings"
	"unicode"
	"unicode/utf8"

	"heatreeve/thermo"
	"heatreeve/thermo/unit"
)

// reading is a name taken apart: the word, and the strength beside it as it is written.
type reading struct {
	*word
	tail string
}

// read finds the word of a name that stands alone, before its strength or behind it.
func read(name string) (reading, bool) {
	name = gravity.ReplaceAllString(strings.TrimSpace(name), "$1 °API")
	if w, ok := pure(name); ok {
		return reading{w, ""}, true
	}
	if w, ok := strong(name); ok {
		return reading{w, ""}, true
	}
	for i, r := range name {
		if !unicode.IsDigit(r) && !isSign(r, name[:i], name[i:]) {
			continue
		}
		if w, ok := strong(name[:i]); ok {
			return reading{w, unjoin(unwrap(name[i:]))}, true
		}
	}
	return readBehind(name)
}

// readBehind reads a name that begins with its strength, "30 % propylene glycol". An API
// gravity alone is that of a petroleum.
func readBehind(name string) (reading, bool) {
	if name == "" || !strings.ContainsAny(name[:1], "0123456789+-.") {
		return reading{}, false
	}
	for i, r := range name {
		if unicode.IsLetter(r) {
			if w, ok := strong(name[i:]); ok {
				return reading{w, unjoin(of.ReplaceAllString(name[:i], ""))}, true
			}
		}
	}
	if s, err := petroleumStrength(name); err == nil && s.api {
		return reading{index().strong["petroleum"], name}, true
	}
	return reading{}, false
}

// pure finds a word that stands alone, though its name may tell the phase as well.
func pure(name string) (*word, bool) {
	key, plain := fold(name), index().plain
	if w, ok := plain[key]; ok {
		return w, true
	}
	bare, liquid := strings.CutSuffix(key, "liquid")
	if w, ok := plain["liquid"+bare]; ok && liquid {
		return w.called(w.name), true
	}
	bare, gas := strings.CutSuffix(strings.TrimPrefix(key, "gaseous"), "gas")
	if w, ok := plain[bare]; ok && (gas || bare != key) && w.gas {
		return w.called(w.name), true
	}
	return nil, false
}

// strong finds a word that wants a strength, though its name may tell the water as well.
func strong(name string) (*word, bool) {
	key := strings.TrimRight(fold(name), ",;:(")
	if w, ok := index().strong[key]; ok {
		return w, true
	}
	for _, prefix := range []string{"aqueous", "aqua", ""} {
		for _, suffix := range []string{"inwater", "/water", "water", "solution", "brine", ""} {
			bare, before := strings.CutPrefix(key, prefix)
			bare, behind := strings.CutSuffix(bare, suffix)
			if w, ok := index().strong[bare]; ok && before && behind && w.solution {
				return w, true
			}
		}
	}
	return nil, false
}

// readSet finds a fluid of one composition that stands beside a quantity all the same. A
// bare number may be that of an alloy.
func readSet(name string) (f thermo.Fluid, tail string, ok bool) {
	for _, cut := range strengths.FindAllStringIndex(name, -1) {
		if last, _ := utf8.DecodeLastRuneInString(strings.TrimSpace(name[cut[0]:cut[1]])); unicode.IsDigit(last) {
			continue
		}
		bare := strings.TrimRight(strings.TrimSpace(name[:cut[0]]+name[cut[1]:]), ",;:(")
		if w, ok := pure(bare); ok {
			f, err := w.make(strength{})
			return f, strings.TrimSpace(name[cut[0]:cut[1]]), err == nil
		}
		if f, ok := families(bare); ok {
			return f, strings.TrimSpace(name[cut[0]:cut[1]]), true
		}
	}
	return nil, "", false
}

// strengths matches what may be a strength within a name, or a state.
var strengths = regexp.MustCompile(`(?i)(?:(?:\bat\s+|@\s*)?[+−-]?\d[\d.,/]*)\s*(?:(?:vol|mass|wt|weight)\w*[\s.-]*)?` +
	`(?:%(?:[\s-]*(?:by\s+)?(?:vol(?:ume)?|mass|wt|weight|fat|[wvm]/[wvm])\b)?|‰|k?g/(?:kg|l|cm3|m3)\b|kg/m³|°?\s?API\b|°[CF]|K\b|bar[ag]?\b|[kM]?Pag?\b|psi[ag]?\b)?`)

var at = regexp.MustCompile(`(?i)^(?:at\s+|@\s*)`)

// refuse says why a fluid of one composition does not go with the quantity beside it.
func refuse(f thermo.Fluid, tail string) error {
	if _, err := unit.ParseFold(at.ReplaceAllString(tail, ""), unit.Temperature, unit.Pressure); err == nil {
		return fmt.Errorf("%q is no part of a fluid's name: %q is the fluid, and its temperature and pressure are told apart from it", clip(tail), f.Name())
	}
	return fmt.Errorf("%s is of one composition and takes no strength, found %q%s", f.Name(), clip(tail), ofAnother(f))
}

// ofAnother says how a fluid of the same kind but of another composition is written.
func ofAnother(f thermo.Fluid) string {
	for _, w := range foods() {
		if w.name == f.Name() {
			return "; declare the one you have, such as " + milkDeclared
		}
	}
	if f.Phase() == thermo.Gas {
		return "; declare a mixture by its shares, such as {gas: {N2: 79 %, O2: 21 %}}"
	}
	return ""
}

// fluid makes the fluid of the strength that was read.
func (r reading) fluid() (thermo.Fluid, error) {
	switch {
	case r.dimension == 0:
		return r.make(strength{})
	case strings.TrimSpace(r.tail) == "":
		return nil, fmt.Errorf("%s wants its %s as well: write %q%s", r.name, r.asks(), r.example(), r.hint())
	}
	return r.withStrength(r.tail)
}

// unwrap takes the brackets from a strength: "32 %)".
func unwrap(tail string) string {
	if !strings.Contains(tail, "(") {
		tail = strings.TrimSuffix(strings.TrimSpace(tail), ")")
	}
	return tail
}

var (
	of     = regexp.MustCompile(`(?i)\s+of\s*$`)
	joined = regexp.MustCompile(`^(\s*[+−-]?\d[\d.]*)\s*[\p{Pd}_]\s*([^\d\s])`)
)

// unjoin takes the hyphens from a strength that join it to its unit and to what follows:
// "20-%", "20-%-".
func unjoin(tail string) string {
	tail = strings.TrimRightFunc(tail, func(r rune) bool { return unicode.IsSpace(r) || unicode.Is(unicode.Pd, r) || r == '_' })
	return joined.ReplaceAllString(tail, "$1 $2")
}

// isSign tells the sign of a number, which starts a word, from a hyphen that joins two
// words and from a dash.
func isSign(r rune, before, from string) bool {
	next, _ := utf8.DecodeRuneInString(strings.TrimLeft(from, "+-−"))
	return strings.ContainsRune("+-−", r) && strings.HasSuffix(before, " ") && !unicode.IsSpace(next)
}
