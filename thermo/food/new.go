package food

import (
	"fmt"
	"math"
	"strings"

	"heatreeve/thermo"
	"heatreeve/thermo/roster"
	"heatreeve/thermo/water"
)

// Composition is mass fractions, which make 1 together.
type Composition struct {
	Water, Fat, Protein, Carbohydrate, Fibre, Ash float64
}

const (
	// sumTolerance is how far an analysis may miss the whole; it is scaled to it.
	sumTolerance = 0.005
	// A food with less water than leastWater and less fat than leastFat, as mass fractions,
	// is a powder or a paste, by our own judgement.
	leastWater, leastFat = 0.2, 0.5
)

const citation = "Choi and Okos 1986, as in ASHRAE Handbook Refrigeration"

type share struct {
	name     string
	fraction float64
	of       *component
}

func (c Composition) shares() []share {
	return []share{
		{"water", c.Water, &waterPart}, {"fat", c.Fat, &fat}, {"protein", c.Protein, &protein},
		{"carbohydrate", c.Carbohydrate, &carbohydrate}, {"fibre", c.Fibre, &fibre}, {"ash", c.Ash, &ash},
	}
}

// String writes the composition as it stands in a site file.
func (c Composition) String() string {
	var parts []string
	for _, s := range c.shares() {
		if s.fraction != 0 {
			parts = append(parts, fmt.Sprintf("%s: %.4g %%", s.name, 100*s.fraction))
		}
	}
	return "{" + strings.Join(parts, ", ") + "}"
}

// New returns the liquid food of that composition. The fractions may miss 1 by up to 0.005
// together, as analyses do, and are scaled to it. The error names the fraction that is not
// one, or what they make together.
func New(c Composition) (thermo.Fluid, error) {
	if err := c.check(); err != nil {
		return nil, err
	}
	return mix("food: "+c.String(), citation, c), nil
}

func (c Composition) check() error {
	sum := 0.0
	for _, s := range c.shares() {
		if !(s.fraction >= 0 && s.fraction <= 1) {
			return fmt.Errorf("food: mass fraction of %s is %g; it lies from 0 to 1", s.name, s.fraction)
		}
		sum += s.fraction
	}
	if math.Abs(sum-1) > sumTolerance+1e-12 {
		return fmt.Errorf("food %v: the mass fractions make %.5g together; they must make 1 within %g", c, sum, sumTolerance)
	}
	if c.Water < leastWater && c.Fat < leastFat {
		return fmt.Errorf("food %v: it has %.4g of water and %.4g of fat; with less than %g of the one and %g of the other it is no liquid", c, c.Water, c.Fat, leastWater, leastFat)
	}
	return nil
}

// mix puts the components together. Pure solids are not refused here.
func mix(name, source string, c Composition) *mixture {
	m := &mixture{name: name, source: source}
	shares := c.shares()
	sum := 0.0
	for _, s := range shares {
		sum += s.fraction
	}
	m.water, m.fat = c.Water/sum, c.Fat/sum
	for _, s := range shares {
		if s.fraction == 0 {
			continue
		}
		x := s.fraction / sum
		for k := range m.cp {
			m.cp[k] += x * s.of.cp[k]
		}
		m.parts = append(m.parts, part{x, s.of.density})
	}
	m.stiff = thermo.NewIncompressible(referenceT, minT, maxT, m.density)
	if p, err := water.SaturationPressure(maxT); err == nil && m.water > 0 {
		m.boilsBelow = p
	}
	return m
}

// product is a food of common composition. The compositions are round, and from memory.
type product struct {
	name string
	Composition
}

var products = [...]product{
	{"whole milk", Composition{Water: 0.876, Protein: 0.033, Fat: 0.035, Carbohydrate: 0.048, Ash: 0.008}},
	{"skim milk", Composition{Water: 0.908, Protein: 0.034, Fat: 0.001, Carbohydrate: 0.049, Ash: 0.008}},
	{"cream", Composition{Water: 0.548, Protein: 0.021, Fat: 0.4, Carbohydrate: 0.026, Ash: 0.005}},
	{"whey", Composition{Water: 0.935, Protein: 0.008, Fat: 0.003, Carbohydrate: 0.048, Ash: 0.006}},
	{"beer wort", Composition{Water: 0.88, Protein: 0.006, Carbohydrate: 0.112, Ash: 0.002}},
	{"orange juice", Composition{Water: 0.883, Protein: 0.007, Fat: 0.002, Carbohydrate: 0.102, Fibre: 0.002, Ash: 0.004}},
}

// also are other names of products, those with their grade among them.
var also = map[string]string{
	"milk": "whole milk", "whole milk 3.5 % fat": "whole milk", "skimmed milk": "skim milk",
	"cream 40 % fat": "cream", "cream 40 %": "cream",
	"wort": "beer wort", "beer wort 12 °P": "beer wort", "beer wort 12 degP": "beer wort", "wort 12 °P": "beer wort",
}

// Products returns the names that Product knows.
func Products() []string {
	var out []string
	for _, p := range products {
		out = append(out, p.name)
	}
	return out
}

// Product returns the food of that name, of common composition: whole milk of 3.5 % fat,
// cream of 40 % fat, wort of 12 °P. Better than a name is the composition that a laboratory
// found. The error of an unknown name tells the near ones and all.
func Product(name string) (thermo.Fluid, error) {
	k, err := roster.Find("food", name, Products(), also)
	if err != nil {
		return nil, err
	}
	p := &products[k]
	return mix(p.name, citation+"; typical composition "+p.String(), p.Composition), nil
}
