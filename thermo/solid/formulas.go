package solid

import "heatreeve/thermo/table"

// formulaHalfWidth is that of what is from memory, as a fraction.
const formulaHalfWidth = 0.05

// densityHalfWidth is that of a density from memory, as a fraction; it has room for the
// thermal expansion that is left out.
const densityHalfWidth = 0.05

// carbonSteel is EN 1993-1-2:2005, 3.4.1.2 (from memory), for 20 °C to 600 °C:
//
//	cp = 425 + 0.773 t − 1.69·10⁻³ t² + 2.22·10⁻⁶ t³ J/(kg K),   t in °C
//
// The standard goes on to 1200 °C through a peak of 5000 J/(kg K) at 735 °C, which is the
// heat of a change of structure.
type carbonSteel struct{}

func (carbonSteel) make() description {
	return description{
		name: "carbon steel", source: "EN 1993-1-2:2005, 3.4.1.2 (from memory)",
		cp: []float64{425, 0.773, -1.69e-3, 2.22e-6}, density: 7850,
		options: table.Options{MinT: 293.15, MaxT: 873.15},
		cpHalf:  formulaHalfWidth, densityHalf: densityHalfWidth,
	}
}

// dryConcrete is EN 1992-1-2:2004, 3.3.2 without moisture (from memory): straight lines of
// cp through the corners, to 600 °C. Density is a typical value.
type dryConcrete struct{}

// corners are °C and J/(kg K).
var corners = [...][2]float64{{20, 900}, {100, 900}, {200, 1000}, {400, 1100}, {600, 1100}}

// Each inner corner has a row 1 K before and one behind, so that the cubics are the
// straight lines themselves but for these 2 K, where they round the corner off: 0.1 J/kg of
// enthalpy.
func (dryConcrete) make() description {
	const density, zeroC = 2300, 273.15
	var points []table.Point
	row := func(t, cp float64) {
		points = append(points, table.Point{T: zeroC + t, Cp: cp, Density: density})
	}
	for k, c := range corners {
		if k > 0 && k < len(corners)-1 {
			row(c[0]-1, c[1]-slopeTo(k))
		}
		row(c[0], c[1])
		if k > 0 && k < len(corners)-1 {
			row(c[0]+1, c[1]+slopeTo(k+1))
		}
	}
	return description{
		name: "dry concrete", source: "EN 1992-1-2:2004, 3.3.2, moisture 0 % (from memory)",
		points: points, cpHalf: formulaHalfWidth, densityHalf: densityHalfWidth,
	}
}

// slopeTo is that of cp from the corner before to corner k, in J/(kg K²).
func slopeTo(k int) float64 {
	a, b := corners[k-1], corners[k]
	return (b[1] - a[1]) / (b[0] - a[0])
}
