package thermo

// Balance is what a heat balance needs of one state.
type Balance struct {
	Enthalpy float64 // h, J/kg
	Cp       float64 // J/(kg K)
	Density  float64 // kg/m³
}

// Balancer is a fluid that works a [Balance] in less time than all of its
// [Properties]. The figures are those of At, and so are the errors.
type Balancer interface {
	Fluid
	Balance(T, p float64) (Balance, error)
}

// BalanceOf returns the function that works a [Balance] of f: the fluid's own where
// it is a [Balancer], else a part of its At.
func BalanceOf(f Fluid) func(T, p float64) (Balance, error) {
	if b, ok := f.(Balancer); ok {
		return b.Balance
	}
	return func(T, p float64) (Balance, error) {
		s, err := f.At(T, p)
		return Balance{s.Enthalpy, s.Cp, s.Density}, err
	}
}
