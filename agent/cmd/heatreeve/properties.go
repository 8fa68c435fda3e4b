package main

import (
	"context"
	"encoding/json"
	"fmt"
	"io"
	"math"
	"strings"
	"text/tabwriter"

	"heatreeve/thermo"
)

func runProperties(_ context.Context, c *call) error {
	temperature := c.flags.String("temperature", "", "temperatures `T[,T2,...]`, such as 20°C or 20°C,40°C,60°C")
	ps := pressureFlags(c.flags)
	asJSON := c.flags.Bool("json", false, "print SI numbers as JSON: an object, or an array where there are several temperatures")
	list := c.flags.Bool("list", false, "tell the fluids that have a name, with range and source")
	if err := c.parseOptions(); err != nil {
		return err
	}
	if *list {
		if err := c.expect(0, ""); err != nil {
			return err
		}
		if others := c.given("list", "json"); len(others) > 0 {
			return wrongf("heatreeve properties: --list tells all fluids and takes no %s; usage: %s", strings.Join(others, ", "), c.usage())
		}
		return tellFluids(c.stdout, *asJSON)
	}
	if err := c.expect(1, "the fluid, such as water or 'propylene glycol 32 %',"); err != nil {
		return err
	}
	f, err := c.fluid()
	if err != nil {
		return err
	}
	p, err := c.absolute("pressure", *ps.at, ps.barometer)
	if err != nil {
		return err
	}
	Ts, err := c.temperatures(*temperature)
	if err != nil {
		return err
	}
	points, err := pointsOf(f, Ts, p)
	if err != nil {
		return err
	}
	return tellProperties(c.stdout, f, points, *asJSON)
}

func tellProperties(w io.Writer, f thermo.Fluid, points []point, asJSON bool) error {
	switch {
	case asJSON && len(points) == 1:
		return printJSON(w, points[0])
	case asJSON:
		return printJSON(w, points)
	case len(points) == 1:
		return tellPoint(w, f, points[0])
	}
	return tellPoints(w, f, points)
}

// point is one state with its properties, as --json prints it.
type point struct {
	Fluid          string  `json:"fluid"`
	Phase          string  `json:"phase"`
	Temperature    float64 `json:"temperature_K"`
	Pressure       float64 `json:"pressure_Pa"`
	Enthalpy       float64 `json:"enthalpy_J_per_kg"`
	InternalEnergy float64 `json:"internal_energy_J_per_kg"`
	Cp             float64 `json:"cp_J_per_kg_K"`
	Cv             float64 `json:"cv_J_per_kg_K"`
	Density        float64 `json:"density_kg_per_m3"`
	CpU            float64 `json:"cp_relative_uncertainty"`
	DensityU       float64 `json:"density_relative_uncertainty"`
	Source         string  `json:"source"`
}

func pointsOf(f thermo.Fluid, Ts []float64, p float64) ([]point, error) {
	var all []point
	for _, T := range Ts {
		s, err := f.At(T, p)
		if err != nil {
			if err = refusal(f, p, err); len(Ts) > 1 {
				err = fmt.Errorf("--temperature %s °C: %w", celsius(T), err)
			}
			return nil, err
		}
		cp, density := f.Uncertainty(T, p)
		all = append(all, point{
			f.Name(), f.Phase().String(), T, p, s.Enthalpy, s.InternalEnergy, s.Cp, s.Cv, s.Density, cp, density, f.Source(),
		})
	}
	return all, nil
}

// shown is a point in the units and with the digits in which it is told: as many as
// the uncertainty leaves, for enthalpies as many as a difference over 1 K has.
type shown struct{ t, h, u, cp, cpU, cv, density, densityU string }

func (s point) shown() shown {
	const k = 2
	cp, U := s.Cp/1e3, k*s.CpU*s.Cp/1e3
	n, m := meant(U), meant(k*s.DensityU*s.Density)
	return shown{
		t: celsius(s.Temperature),
		h: decimals(s.Enthalpy/1e3, n-1), u: decimals(s.InternalEnergy/1e3, n-1),
		cp: decimals(cp, n), cpU: decimals(U, n), cv: decimals(s.Cv/1e3, n),
		density: decimals(s.Density, m), densityU: decimals(k*s.DensityU*s.Density, m),
	}
}

const twice = "± is twice the standard uncertainty. Enthalpy and internal energy count from a\nzero of the fluid's own: only differences mean anything."

func tellPoint(w io.Writer, f thermo.Fluid, s point) error {
	v := s.shown()
	fmt.Fprintf(w, "%s\n\n", wrapped(fmt.Sprintf("%s, %s, at %s °C and %s kPa absolute", s.Fluid, s.Phase, v.t, figures(s.Pressure/1e3, 6)), ""))
	t := newColumns(0)
	t.line("  enthalpy", "h", v.h+" kJ/kg")
	t.line("  internal energy", "u", v.u+" kJ/kg")
	t.line("  specific heat", "cp", v.cp+" ± "+v.cpU+" kJ/(kg K)", percent(2*s.CpU))
	t.line("  specific heat", "cv", v.cv+" kJ/(kg K)")
	t.line("  density", "ρ", v.density+" ± "+v.densityU+" kg/m3", percent(2*s.DensityU))
	fmt.Fprint(w, t)
	_, err := fmt.Fprintf(w, "\n%s\n%s\n%s\n", wrapped(spanOf(f, s.Pressure), ""), twice, wrapped("Source: "+s.Source, ""))
	return err
}

// deepVacuum in Pa is where a lowest pressure is of no use to a plant, and left out.
const deepVacuum = 100

// spanOf says where the phase ends at the pressure p, and where the formulation does.
func spanOf(f thermo.Fluid, p float64) string {
	b := f.Bounds()
	lo, hi := f.Span(p)
	say := fmt.Sprintf("It is a %s", f.Phase())
	switch {
	case lo > 0 && !math.IsInf(hi, 1):
		say += fmt.Sprintf(" from %s °C to %s °C at this pressure", celsius(lo), celsius(hi))
	case lo > 0:
		say += fmt.Sprintf(" above %s °C at this pressure", celsius(lo))
	case !math.IsInf(hi, 1):
		say += fmt.Sprintf(" below %s °C at this pressure", celsius(hi))
	}
	low := "up"
	if b.MinP > deepVacuum {
		low = figures(b.MinP/1e3, 6)
	}
	return fmt.Sprintf("%s; figures from %s °C to %s °C and %s to %s kPa.", say, celsius(b.MinT), celsius(b.MaxT), low, figures(b.MaxP/1e3, 6))
}

func tellPoints(w io.Writer, f thermo.Fluid, points []point) error {
	fmt.Fprintf(w, "%s\n\n", wrapped(fmt.Sprintf("%s, %s, at %s kPa absolute", f.Name(), f.Phase(), figures(points[0].Pressure/1e3, 6)), ""))
	t := newColumns(tabwriter.AlignRight)
	t.line("°C", "h", "u", "cp ±", "", "cv", "ρ ±", "")
	t.line("", "kJ/kg", "kJ/kg", "kJ/(kg K)", "", "kJ/(kg K)", "kg/m3", "")
	for _, s := range points {
		v := s.shown()
		t.line(v.t, v.h, v.u, v.cp+" ±", v.cpU, v.cv, v.density+" ±", v.densityU)
	}
	fmt.Fprint(w, t)
	_, err := fmt.Fprintf(w, "\n%s\n%s\n", twice, wrapped("Source: "+f.Source(), ""))
	return err
}

func printJSON(w io.Writer, v any) error {
	e := json.NewEncoder(w)
	e.SetEscapeHTML(false)
	e.SetIndent("", "  ")
	return e.Encode(v)
}
