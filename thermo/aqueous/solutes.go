package aqueous

// solute holds the polynomials for density in kg/m³, cp in J/(kg K) and freezing point in K:
// Å. Melinder, Properties of Secondary Working Fluids for Indirect Systems,
// International Institute of Refrigeration, 2nd edition (2010); coefficients by
// way of the incompressible-fluid files of CoolProp.
//
//	Y(T, x) = Σ c[i][j] (T − baseT)^i (x − baseX)^j
//	Tfreeze(x) = Σ f[j] (x − baseX)^j
//
// x is the mass fraction of solute, 0 to max; T runs from the freezing point to
// maxT. The freezing point falls with x all the way to max.
type solute struct {
	name         string
	aliases      []string
	max          float64 // largest mass fraction
	maxT         float64 // K
	baseT, baseX float64
	eutectic     bool    // max is the eutectic
	density20    float64 // kg/m³, of the pure liquid at 20 °C; 0: comes by mass only
	density, cp  [4][6]float64
	freezing     [6]float64
	sooner       [][2]float64 // mass fractions and K at which another source has it freeze sooner
	deviation    []deviation
	boils        func(massFraction float64) boiling
}

// freezesAt is the freezing point in K at mass fraction x.
func (s *solute) freezesAt(x float64) float64 { return horner(s.freezing[:], x-s.baseX) }

// dilute is the mass fraction below which the freezing point is led to that of water.
const dilute = 0.02

// guard is the freezing point in K at mass fraction x: 273.15 K of water, at which the
// polynomials arrive within 0.05 K, and from there to where the solution is no longer dilute
// the polynomial's and what is left of that difference δ, δ (1 − x/0.02)².
func (s *solute) guard(x float64) float64 {
	if x <= 0 {
		return zeroC
	}
	left := max(0, 1-x/dilute)
	return s.soonest(x) + left*left*(zeroC-s.soonest(0))
}

// soonest is the freezing point in K at mass fraction x, moved up to that of the other source
// where there is one: between its rows by as much as at the rows, in proportion.
func (s *solute) soonest(x float64) float64 {
	T := s.freezesAt(x)
	for k := 1; k < len(s.sooner); k++ {
		a, b := s.sooner[k-1], s.sooner[k]
		if x > b[0] && k < len(s.sooner)-1 {
			continue
		}
		w := (x - a[0]) / (b[0] - a[0])
		return T + (1-w)*(a[1]-s.freezesAt(a[0])) + w*(b[1]-s.freezesAt(b[0]))
	}
	return T
}

// freezes says what the guard is, of a mass fraction known to u.
func (s *solute) freezes(u float64) string {
	what := "freezing point"
	if s.sooner != nil {
		what += " by ASHRAE"
	}
	if u > 0 {
		what += ", were the mixture weaker by twice the uncertainty of its strength"
	}
	return what
}

// at reduces a polynomial in temperature and concentration to one in
// temperature, at the concentration d above its base.
func at(c *[4][6]float64, d float64) cubic {
	var out cubic
	for i := range c {
		out[i] = horner(c[i][:], d)
	}
	return out
}

// slopeAt is the derivative of such a polynomial by concentration.
func slopeAt(c *[4][6]float64, d float64) cubic {
	var out cubic
	for i := range c {
		var derivative [5]float64
		for j := range derivative {
			derivative[j] = float64(j+1) * c[i][j+1]
		}
		out[i] = horner(derivative[:], d)
	}
	return out
}

func horner(c []float64, x float64) float64 {
	var sum float64
	for k := len(c) - 1; k >= 0; k-- {
		sum = sum*x + c[k]
	}
	return sum
}
