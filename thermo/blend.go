package thermo

// Blend is a mixture whose strength is known with an uncertainty. One and the same error
// of it moves cp and density at once, for most solutes to opposite sides, so that what
// their product is off by is no root sum of squares.
type Blend interface {
	Fluid
	// Strength returns the relative changes, signed, of cp and of density at T in K and p
	// in Pa as the strength rises by one standard uncertainty. They are within those of
	// Uncertainty.
	Strength(T, p float64) (cp, density float64)
}
