package oil

import (
	"fmt"
	"math"
	"slices"

	"heatreeve/thermo/roster"
)

const (
	fifteenC = 288.15              // K
	sixtyF   = (60 + 459.67) / 1.8 // K
)

// group is a product group of ASTM D1250-80 (API MPMS 11.1, ISO 91-1), with its constants
// for 15 °C. Those of fuel oil and lubricating oil are from memory; all are 1.8 times the
// constants for 60 °F, to the digits printed. Its range of density at 60 °F in kg/m³ is
// that of API MPMS 11.1 (2004), from memory, which kept the constants and drew the limits
// anew.
type group struct {
	name       string
	k          [3]float64
	minRho60   float64
	maxRho60   float64
	distillate bool    // one of those that density tells apart
	watson     float64 // usual Watson factor (from memory)
}

var groups = [...]group{
	{"gasoline", [3]float64{346.4228, 0.4388, 0}, 610.6, 770.352, true, 12.0},
	{"transition", [3]float64{2680.3206, 0, -0.00336312}, 770.352, 787.5195, true, 11.9},
	{"jet-kerosene", [3]float64{594.5418, 0, 0}, 787.5195, 838.3127, true, 11.8},
	{"fuel oil", [3]float64{186.9696, 0.4862, 0}, 838.3127, 1163.5, true, 11.5},
	{"crude oil", [3]float64{613.9723, 0, 0}, 610.6, 1163.5, false, 12.0},
	{"lubricating oil", [3]float64{0, 0.6278, 0}, 800.9, 1163.5, false, 12.2},
}

var alsoGroups = map[string]string{
	"crude": "crude oil", "petrol": "gasoline", "naphtha": "gasoline", "kerosene": "jet-kerosene", "jet fuel": "jet-kerosene", "jet": "jet-kerosene",
	"kerosine": "jet-kerosene", "aviation turbine fuel": "jet-kerosene", "motor gasoline": "gasoline", "motor spirit": "gasoline",
	"diesel": "fuel oil", "diesel oil": "fuel oil", "diesel fuel": "fuel oil", "gas oil": "fuel oil", "heating oil": "fuel oil", "light fuel oil": "fuel oil",
	"heavy fuel oil": "fuel oil", "residual fuel oil": "fuel oil", "lube oil": "lubricating oil", "lubricant": "lubricating oil", "lubricating": "lubricating oil", "lube": "lubricating oil",
}

// Groups returns the product groups that [Petroleum] knows.
func Groups() []string {
	var out []string
	for _, g := range groups {
		out = append(out, g.name)
	}
	return out
}

// Group returns that one of [Groups] for which name stands: also "diesel", "kerosene",
// "petrol" and the like, in any case, with spaces or hyphens. The error of an unknown name
// tells the near ones and all.
func Group(name string) (string, error) {
	k, err := findGroup(name)
	if err != nil {
		return "", err
	}
	return groups[k].name, nil
}

// GroupAliases returns the other names of one of [Groups], in order.
func GroupAliases(group string) []string {
	var out []string
	for also, name := range alsoGroups {
		if name == group {
			out = append(out, also)
		}
	}
	slices.Sort(out)
	return out
}

func findGroup(name string) (int, error) {
	return roster.Find("product group", name, Groups(), alsoGroups)
}

// groupFor returns the group of that name for a density in kg/m³ at 15 °C, or without a
// name the one of the distillates into which it falls.
func groupFor(rho15 float64, name string) (*group, error) {
	if !(rho15 > 0 && !math.IsInf(rho15, 1)) {
		return nil, fmt.Errorf("density at 15 °C of %g kg/m³; it must be above zero", rho15)
	}
	return choose(name, func(g *group) float64 { return g.rho60(rho15) })
}

// choose returns the group of that name, or the distillate, which holds the density at 60
// °F. Without a name it is the first of them whose upper end does: each group has its own
// density at 60 °F for one at 15 °C, so that a density a little above one group may be a
// little below the next, 2e-6 of it, and has to go somewhere.
func choose(name string, rho60 func(*group) float64) (*group, error) {
	k := 0
	if name == "" {
		for groups[k+1].distillate && rho60(&groups[k]) > groups[k].maxRho60 {
			k++
		}
	} else {
		var err error
		if k, err = findGroup(name); err != nil {
			return nil, err
		}
	}
	g := &groups[k]
	between := name == "" && k > 0
	if r := rho60(g); !((r >= g.minRho60 || between) && r <= g.maxRho60) {
		return nil, fmt.Errorf("%.6g kg/m³ at 60 °F is no %s, which goes from %g to %g kg/m³", r, g.name, g.minRho60, g.maxRho60)
	}
	return g, nil
}

// alpha is the coefficient of thermal expansion at 15 °C in 1/K.
func (g *group) alpha(rho15 float64) float64 {
	return g.k[0]/(rho15*rho15) + g.k[1]/rho15 + g.k[2]
}

func (g *group) rho60(rho15 float64) float64 {
	return rho15 * correction(g.alpha(rho15), sixtyF-fifteenC)
}

func (g *group) specificGravity(rho15 float64) float64 { return g.rho60(rho15) / waterAt60F }

// correction is the volume correction factor ρ(T)/ρ(15 °C), at dT in K above 15 °C.
func correction(alpha, dT float64) float64 {
	x := alpha * dT
	return math.Exp(-x * (1 + 0.8*x))
}

// compressibility in 1/Pa at T in K: API MPMS 11.2.1M (1984) for densities from 638 kg/m³
// to 1074 kg/m³ and -30 °C to 90 °C, here carried on beyond (from memory), with t in °C:
//
//	κ = 1e-9 exp(−1.62080 + 0.00021592 t + (0.87096 + 0.0042092 t) 1e6/ρ15²)
func compressibility(rho15, T float64) float64 {
	t, square := T-zeroC, 1e6/(rho15*rho15)
	return 1e-9 * math.Exp(-1.62080+0.00021592*t+(0.87096+0.0042092*t)*square)
}
