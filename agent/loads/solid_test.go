package loads

import (
	"testing"

	"heatreeve/thermo/solid"
)

// Solids on a belt are a stream by mass like any other. Aluminium from 298.15 K to 900 K takes
// up 625,983.6 J/kg (NIST-JANAF Thermochemical Tables, 4th edition, 1998, Al-002); carbon
// steel from 20 °C to 600 °C 335,738 J/kg, so 2 t/h of billets 186.52 kW (EN 1993-1-2:2005,
// 3.4.1.2, integrated outside of this project), where its 470 J/(kg K) of a cold one would
// give 18.8 % less.
func TestStreamOfSolids(t *testing.T) {
	for _, tt := range []struct {
		name                string
		flow, in, out, want float64
		tolerance           float64
	}{
		{"aluminium", 2, 298.15, 900, 2 * 625983.6, 1e-3},
		{"carbon steel", 2000. / 3600, 293.15, 873.15, 186521.01, 1e-4},
	} {
		f, err := solid.New(tt.name)
		if err != nil {
			t.Fatal(err)
		}
		cfg := plant(f)
		s := &cfg.Loads[0].Stream
		s.Gives, s.Pressure, s.OutletPressure = false, Constant(101325), Constant(101325)
		e := engine(t, cfg)
		e.Advance(Beat{at(0, tt.flow, tt.in, tt.out), through(60)}, nil)
		l := e.Snapshot().Loads[0]
		near(t, tt.name, l.Figure.Duty, tt.want, tt.tolerance*tt.want)
		near(t, "taken", l.Taken, 60*l.Figure.Duty, 1e-6*l.Taken)
		if l.Figure.Share[PartCp] <= 0 {
			t.Errorf("%s: no share of the heat capacity in an uncertainty of %g W", tt.name, l.Figure.Uncertainty)
		}
	}
}
