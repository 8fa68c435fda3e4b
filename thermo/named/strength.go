package named

import (
	"fmt"
	"regexp"
	"strconv"
	"strings"

	"heatreeve/thermo"
	"heatreeve/thermo/oil"
	"heatreeve/thermo/unit"
)

// strength is how much of a solute there is, or of what else a name asks for.
type strength struct {
	unit.Quantity
	byVolume bool
	api      bool    // the quantity is an API gravity
	watson   float64 // of a petroleum; 0: not told
}

// SI is the quantity in its SI unit, as it would be written there.
func (s strength) SI() float64 { return unit.Decimal(s.Quantity.SI()) }

// share is what stands between the number and "%" or behind it to say of what.
var share = regexp.MustCompile(`(?i)^(.*?)[\s-]*(?:(vol(?:ume)?|mass|wt|weight|v/v|w/w|m/m)[\s.-]*%|` +
	`%[\s-]*\(?(?:by[\s-]+)?(vol(?:ume)?|mass|wt|weight|abv|v/v|w/w|m/m)\.?\)?)\s*$`)

// mixed is a mass per volume, which is no share of a whole.
var mixed = regexp.MustCompile(`(?i)%\s*\(?[wm]/v\)?\s*$`)

// relative is what tells that percents are of a relative humidity.
var relative = regexp.MustCompile(`(?i)%\s*(?:RH|r\.h\.|relative humidity)\s*$`)

// parts are two shares, such as 30/70.
var parts = regexp.MustCompile(`^\s*\d[\d.]*\s*[/:]\s*\d`)

func (w *word) withStrength(text string) (thermo.Fluid, error) {
	var s strength
	var err error
	switch w.dimension {
	case unit.Ratio:
		s, err = w.share(text)
	case unit.Density:
		s, err = petroleumStrength(text)
	default:
		s.Quantity, err = unit.ParseFold(text, w.dimension)
	}
	if err != nil {
		return nil, fmt.Errorf("%s: %w; write %q%s", w.name, err, w.example(), w.hint())
	}
	return w.make(s)
}

// share reads a part of a whole, by mass or by volume.
func (w *word) share(text string) (s strength, err error) {
	if w.name == "moist air" {
		text = relative.ReplaceAllString(text, "%")
	}
	plain := text
	if m := share.FindStringSubmatch(text); m != nil {
		plain = m[1] + " %"
		s.byVolume = strings.Contains("volume abv v/v", strings.ToLower(m[2]+m[3]))
	}
	switch {
	case parts.MatchString(text):
		return s, fmt.Errorf("%q does not say which part is whose, nor of what", clip(text))
	case mixed.MatchString(text):
		return s, fmt.Errorf("%q is mass per volume, and no share of the mass or of the volume", clip(text))
	case s.byVolume && !w.volume:
		return s, fmt.Errorf("%q is by volume, and it is known by mass only", clip(text))
	}
	s.Quantity, err = unit.ParseFold(plain, unit.Ratio)
	return s, err
}

var (
	gravity = regexp.MustCompile(`(?i)°?\bAPI(?:\s+gravity)?\s*[:=]?\s*(-?\d+(?:\.\d+)?)`)
	api     = regexp.MustCompile(`(?i)^\s*([−-]?\d+(?:\.\d+)?)\s*(?:°|deg)?\s*API\s*$`)
	watson  = regexp.MustCompile(`(?i)[\s,;]+(?:(?:Watson|UOP)(?:\s*K|\s+factor)?|Kw|K)\s*[:=]?\s*(\d+(?:\.\d+)?)\s*$`)
	at15    = regexp.MustCompile(`(?i)\s*(?:at|@)\s*15\s*°?\s*C\s*$`)
)

func apiGravity(text string) (float64, bool) {
	m := api.FindStringSubmatch(text)
	if m == nil {
		return 0, false
	}
	x, err := strconv.ParseFloat(strings.Replace(m[1], "−", "-", 1), 64)
	return x, err == nil
}

// petroleumStrength reads the density at 15 °C of a petroleum or its API gravity, and
// the Watson factor that may follow.
func petroleumStrength(text string) (s strength, err error) {
	if m := watson.FindStringSubmatchIndex(text); m != nil {
		if s.watson, err = strconv.ParseFloat(text[m[2]:m[3]], 64); err != nil {
			return s, err
		}
		text = text[:m[0]]
	}
	text = at15.ReplaceAllString(text, "")
	if x, ok := apiGravity(text); ok {
		s.Quantity.Value, s.api = x, true
		return s, nil
	}
	s.Quantity, err = unit.ParseFold(text, unit.Density)
	return s, err
}

// petroleum is the liquid of a product group, or with "" the distillate of its density.
func (s strength) petroleum(group string) (thermo.Fluid, error) {
	if !s.api {
		return oil.Petroleum(s.SI(), s.watson, group)
	}
	density, err := oil.DensityOfAPI(s.Value, group)
	if err != nil {
		return nil, err
	}
	return oil.Petroleum(density, s.watson, group)
}
