package gas

import (
	"cmp"
	"fmt"
	"maps"
	"math"
	"slices"
	"strings"

	"heatreeve/thermo"
	"heatreeve/thermo/unit/near"
)

// Species returns the formulas that New knows.
func Species() []string {
	var out []string
	for _, s := range table {
		out = append(out, s.formula)
	}
	return out
}

// sumTolerance is how far the shares may miss 1 in total: the rounding of
// percentages as they are stated.
const sumTolerance = 1e-3

// New returns the ideal gas with the given mole fractions (equal to volume
// fractions), by formula as in [Species]. Shares must be from 0 to 1 and add up to
// 1 within 0.001; what is left of rounding is spread over all in proportion. The
// error names an unknown formula and those like it, or the sum.
func New(fractions map[string]float64) (thermo.Fluid, error) {
	names := slices.Sorted(maps.Keys(fractions)) // one order, so one result to the last bit
	var sum float64
	for _, name := range names {
		if _, err := lookup(name); err != nil {
			return nil, err
		}
		x := fractions[name]
		if !(x >= 0 && x <= 1) {
			return nil, fmt.Errorf("share of %s is %g; a mole fraction lies from 0 to 1", name, x)
		}
		sum += x
	}
	if !(math.Abs(sum-1) <= sumTolerance) {
		return nil, fmt.Errorf("the mole fractions add up to %.6g; they must make 1 within %g", sum, sumTolerance)
	}
	var parts []component
	for _, name := range names {
		if fractions[name] > 0 {
			s, _ := lookup(name)
			parts = append(parts, component{s, fractions[name] / sum})
		}
	}
	return mix(describe(parts), parts), nil
}

// DryAir returns dry air: N2 78.084 %, O2 20.9476 %, Ar 0.9365 %, CO2 0.0319 % by
// volume, the composition of the species Air in the NASA file (Gordon 1982),
// 28.9651 g/mol.
func DryAir() thermo.Fluid {
	var parts []component
	for _, c := range []struct {
		formula string
		share   float64
	}{{"N2", 0.78084}, {"O2", 0.209476}, {"Ar", 0.009365}, {"CO2", 0.000319}} {
		s, err := lookup(c.formula)
		if err != nil {
			panic(err) // our own table lost one of its gases
		}
		parts = append(parts, component{s, c.share})
	}
	return mix("dry air", parts)
}

type component struct {
	*species
	share float64
}

func lookup(formula string) (*species, error) {
	for k := range table {
		if table[k].formula == formula {
			return &table[k], nil
		}
	}
	hint := ""
	if guess := meant(formula); len(guess) > 0 {
		hint = ", did you mean " + strings.Join(guess, " or ")
	}
	return nil, fmt.Errorf("unknown gas %q%s; known gases: %s", formula, hint, strings.Join(Species(), ", "))
}

// meant lists the gases whose formula or name a word may have been meant to be.
func meant(word string) []string {
	gas := map[string]string{}
	var words []string
	for _, s := range table {
		for _, w := range []string{s.formula, s.name} {
			gas[w] = fmt.Sprintf("%q (%s)", s.formula, s.name)
			words = append(words, w)
		}
	}
	var out []string
	for _, w := range near.Names(word, words) {
		out = append(out, gas[w])
	}
	return out
}

// describe names a mixture by its shares, the largest first.
func describe(parts []component) string {
	if len(parts) == 1 {
		return parts[0].name
	}
	byShare := slices.Clone(parts)
	slices.SortStableFunc(byShare, func(a, b component) int { return cmp.Compare(b.share, a.share) })
	var words []string
	for _, c := range byShare {
		words = append(words, fmt.Sprintf("%s %.4g %%", c.formula, 100*c.share))
	}
	return "gas of " + strings.Join(words, ", ")
}

// mix adds up the parts; their shares make 1.
func mix(name string, parts []component) *mixture {
	m := &mixture{name: name}
	for _, c := range parts {
		m.molarMass += c.share * c.molarMass
		m.low.add(c.low, c.share)
		m.high.add(c.high, c.share)
	}
	m.r = thermo.R / m.molarMass
	m.setZero()
	m.setTrust(parts)
	for _, c := range parts {
		v := vapour{c.formula, c.share}
		if v.condenses() && v.dewPoint(m.bounds.MaxP) > minT {
			m.vapours = append(m.vapours, v)
		}
	}
	m.lastDewPoint, _ = m.dewPoint(m.bounds.MaxP)
	return m
}

func (r *range9) add(o range9, share float64) {
	for k := range r.a {
		r.a[k] += share * o.a[k]
	}
	r.b += share * o.b
}

// setZero moves the zero of enthalpy from the formation enthalpy to 298.15 K, and the
// upper range so that it meets the lower one without a step.
func (m *mixture) setZero() {
	_, h := m.low.at(zero)
	m.low.b -= h * zero
	_, below := m.low.at(seam)
	_, above := m.high.at(seam)
	m.high.b -= (above - below) * seam
}

// Deviations of the ideal gas that are accepted, and the limits of pressure in
// Pa that they may lead to.
const (
	maxCpDeviation      = 0.015
	maxDensityDeviation = 0.02
	leastMaxP           = 120e3
	mostMaxP            = 3e6
)

// setTrust finds the highest pressure and the uncertainties up to it. A
// deviation that may lie anywhere up to its largest value has a standard
// uncertainty of that value over √3.
func (m *mixture) setTrust(parts []component) {
	var t trust
	for _, c := range parts {
		k := trusts[c.formula]
		t.cp += c.share * k.cp
		t.density += c.share * k.density
		t.fit += c.share * k.fit
	}
	p := min(maxCpDeviation/t.cp, maxDensityDeviation/t.density)
	p = min(max(p, leastMaxP), mostMaxP)
	m.bounds = thermo.Bounds{MinT: minT, MaxT: maxT, MinP: 0, MaxP: p}
	m.cpU = math.Hypot(t.fit, t.cp*p/math.Sqrt(3))
	m.rhoU = t.density * p / math.Sqrt(3)
}
