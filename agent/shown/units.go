package shown

import (
	"fmt"
	"net/url"
	"slices"
	"strings"

	"heatreeve/thermo/unit"
)

// Units are those that a reader chose.
type Units struct{ Duty, Heat, Temperature, Flow unit.Unit }

// kind is a quantity that a reader may have in one of several units.
type kind struct {
	name    string // as in an address and in a site file
	of      unit.Dimension
	choices []string // the first is the usual one
}

var kinds = [...]kind{
	{"duty", unit.Power, []string{"kW", "MW", "Btu/h", "kBtu/h", "MMBtu/h", "ton of refrigeration"}},
	{"heat", unit.Energy, []string{"MWh", "kWh", "GJ", "MMBtu", "ton of refrigeration hour"}},
	{"temperature", unit.Temperature, []string{"°C", "°F"}},
	{"flow", unit.MassFlow, []string{"kg/s", "kg/h", "t/h", "lb/h"}},
}

// Choice is a quantity with the units that it may be shown in, for a form.
type Choice struct {
	Name    string
	Units   []string
	Current string
}

func (u *Units) fields() [len(kinds)]*unit.Unit {
	return [...]*unit.Unit{&u.Duty, &u.Heat, &u.Temperature, &u.Flow}
}

// Usual are kW, MWh, °C and kg/s.
func Usual() Units {
	u, err := Choose(url.Values{}, Units{})
	if err != nil {
		panic(err) // the table of kinds names a unit that is none
	}
	return u
}

// Choose reads units from the parameters duty, heat, temperature and flow; what they leave out
// is as before says, and usual where that has none. The error names the parameter first.
func Choose(v url.Values, before Units) (Units, error) {
	u := before
	for i, field := range u.fields() {
		k := &kinds[i]
		name := v.Get(k.name)
		if name == "" {
			if field.Symbol != "" {
				continue
			}
			name = k.choices[0]
		}
		found, err := unit.LookupAs(name, k.of)
		if err != nil || !slices.Contains(k.choices, found.Symbol) {
			return before, fmt.Errorf("%s %q is no unit to show it in; allowed are %s", k.name, name, strings.Join(k.choices, ", "))
		}
		*field = found
	}
	return u, nil
}

// Values are the parameters that lead from usual to u: what is alike is left out, so that
// addresses stay short.
func (u Units) Values(usual Units) url.Values {
	v := url.Values{}
	was := usual.fields()
	for i, field := range u.fields() {
		if field.Symbol != was[i].Symbol {
			v.Set(kinds[i].name, field.Symbol)
		}
	}
	return v
}

// Key tells u from other units.
func (u Units) Key() string {
	return u.Duty.Symbol + "|" + u.Heat.Symbol + "|" + u.Temperature.Symbol + "|" + u.Flow.Symbol
}

// Choices are what a reader may choose from.
func (u Units) Choices() []Choice {
	all := make([]Choice, len(kinds))
	for i, field := range u.fields() {
		all[i] = Choice{kinds[i].name, kinds[i].choices, field.Symbol}
	}
	return all
}

// Label is the short name of a unit beside a figure.
func Label(u unit.Unit) string {
	switch u.Symbol {
	case "ton of refrigeration":
		return "TR"
	case "ton of refrigeration hour":
		return "TRh"
	}
	return u.Symbol
}
