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
	for i := range kinds {
		k := &kinds[i]
		name := v.Get(k.name)
		if name == "" && u.fields()[i].Symbol == "" {
			name = k.choices[0]
		}
		if name == "" {
			continue
		}
		if err := u.Set(k.name, name); err != nil {
			return before, fmt.Errorf("%s %w", k.name, err)
		}
	}
	return u, nil
}

// Kinds names what there are units of: duty, heat, temperature and flow.
func Kinds() []string {
	var names []string
	for i := range kinds {
		names = append(names, kinds[i].name)
	}
	return names
}

// Set chooses the unit of a kind, by any of its usual spellings.
func (u *Units) Set(of, name string) error {
	i := slices.IndexFunc(kinds[:], func(k kind) bool { return k.name == of })
	found, err := unit.LookupAs(name, kinds[i].of)
	if err != nil || !slices.Contains(kinds[i].choices, found.Symbol) {
		return fmt.Errorf("%q is no unit to show it in; allowed are %s", name, strings.Join(kinds[i].choices, ", "))
	}
	*u.fields()[i] = found
	return nil
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
