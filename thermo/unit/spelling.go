package unit

import "strings"

// alike maps characters and words that are typed for one another.
var alike = strings.NewReplacer(
	"³", "3", "²", "2", "^3", "3", "^2", "2",
	"℃", "°C", "℉", "°F", "º", "°", "˚", "°",
	"degC", "°C", "degF", "°F", "degR", "°R", "deg C", "°C", "deg F", "°F", "° C", "°C", "° F", "°F",
	"·", " ", "⋅", " ", "∙", " ", "*", " ", "×", " ",
	"μ", "µ", // Greek mu, micro sign
	"\u2126", "Ω", // ohm sign, Greek omega
	"BTU", "Btu", "btu", "Btu",
)

// spelling brings a unit's name into the form under which it is indexed: one
// space between words, none beside a slash or a bracket, "/h" for "/hr".
func spelling(s string) string {
	s = strings.Join(strings.Fields(alike.Replace(s)), " ")
	s = tight.Replace(s)
	if t, ok := strings.CutSuffix(s, "/hr"); ok {
		return t + "/h"
	}
	return s
}

var tight = strings.NewReplacer(" / ", "/", " /", "/", "/ ", "/", " (", "(", "( ", "(", " )", ")")

// ambiguous names are in use for several units. The text tells the choices.
var ambiguous = map[string]string{
	"scfm":  `say which reference, "scfm (60 °F)" as for natural gas or "scfm (68 °F)" as for compressed air; air at 0.075 lb/ft3 is "standard air cfm"`,
	"SCFM":  `say which reference, "scfm (60 °F)" as for natural gas or "scfm (68 °F)" as for compressed air; air at 0.075 lb/ft3 is "standard air cfm"`,
	"scf":   `say which reference, "scf (60 °F)" as for natural gas or "scf (68 °F)" as for compressed air`,
	"ton":   `write "t" for the tonne, "short ton (US)", "long ton (UK)" or "ton of refrigeration"`,
	"tons":  `write "t" for the tonne, "short ton (US)", "long ton (UK)" or "ton of refrigeration"`,
	"therm": `write "therm (US)" or "therm (EC)"`,
	"MBtu":  `write "kBtu" for a thousand or "MMBtu" for a million`,
	"cal":   `write "cal_IT", "cal_th" or "cal_15"`,
	"m":     `write "min" for minutes`,
	"N":     `write "Nm3/h" for a normal volume flow`,
}
