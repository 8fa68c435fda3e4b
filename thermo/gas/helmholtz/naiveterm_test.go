package helmholtz

import "math"

// printedTerm is a non-analytic term with its derivatives as table 32 of Span and
// Wagner (1996) has them; the number of the table is from memory.
type printedTerm struct {
	nonAnalytic
	delta, tau float64
}

func (c printedTerm) square() float64 { return math.Pow(c.delta-1, 2) }
func (c printedTerm) theta() float64 {
	return 1 - c.tau + c.A*math.Pow(c.square(), 1/(2*c.beta))
}
func (c printedTerm) Delta() float64 {
	return math.Pow(c.theta(), 2) + c.B*math.Pow(c.square(), c.a)
}
func (c printedTerm) psi() float64 {
	return math.Exp(-c.C*c.square() - c.D*math.Pow(c.tau-1, 2))
}
func (c printedTerm) psiD() float64  { return -2 * c.C * (c.delta - 1) * c.psi() }
func (c printedTerm) psiDD() float64 { return (2*c.C*c.square() - 1) * 2 * c.C * c.psi() }
func (c printedTerm) psiT() float64  { return -2 * c.D * (c.tau - 1) * c.psi() }
func (c printedTerm) psiTT() float64 {
	return (2*c.D*math.Pow(c.tau-1, 2) - 1) * 2 * c.D * c.psi()
}
func (c printedTerm) psiDT() float64 { return 4 * c.C * c.D * (c.delta - 1) * (c.tau - 1) * c.psi() }

func (c printedTerm) DeltaD() float64 {
	return (c.delta - 1) * (c.A*c.theta()*2/c.beta*math.Pow(c.square(), 1/(2*c.beta)-1) + 2*c.B*c.a*math.Pow(c.square(), c.a-1))
}

func (c printedTerm) DeltaDD() float64 {
	k := 1 / (2 * c.beta)
	return c.DeltaD()/(c.delta-1) + c.square()*(4*c.B*c.a*(c.a-1)*math.Pow(c.square(), c.a-2)+
		2*c.A*c.A/(c.beta*c.beta)*math.Pow(math.Pow(c.square(), k-1), 2)+
		c.A*c.theta()*4/c.beta*(k-1)*math.Pow(c.square(), k-2))
}

func (c printedTerm) bD() float64 { return c.b * math.Pow(c.Delta(), c.b-1) * c.DeltaD() }
func (c printedTerm) bDD() float64 {
	return c.b * (math.Pow(c.Delta(), c.b-1)*c.DeltaDD() + (c.b-1)*math.Pow(c.Delta(), c.b-2)*math.Pow(c.DeltaD(), 2))
}
func (c printedTerm) bT() float64 { return -2 * c.theta() * c.b * math.Pow(c.Delta(), c.b-1) }
func (c printedTerm) bTT() float64 {
	return 2*c.b*math.Pow(c.Delta(), c.b-1) + 4*math.Pow(c.theta(), 2)*c.b*(c.b-1)*math.Pow(c.Delta(), c.b-2)
}
func (c printedTerm) bDT() float64 {
	return -c.A*c.b*2/c.beta*math.Pow(c.Delta(), c.b-1)*(c.delta-1)*math.Pow(c.square(), 1/(2*c.beta)-1) -
		2*c.theta()*c.b*(c.b-1)*math.Pow(c.Delta(), c.b-2)*c.DeltaD()
}

func (c printedTerm) bare() float64 { return math.Pow(c.Delta(), c.b) }
func (c printedTerm) phiD() float64 {
	return c.bare()*(c.psi()+c.delta*c.psiD()) + c.bD()*c.delta*c.psi()
}
func (c printedTerm) phiDD() float64 {
	return c.bare()*(2*c.psiD()+c.delta*c.psiDD()) + 2*c.bD()*(c.psi()+c.delta*c.psiD()) + c.bDD()*c.delta*c.psi()
}
func (c printedTerm) phiT() float64 { return c.delta * (c.bT()*c.psi() + c.bare()*c.psiT()) }
func (c printedTerm) phiTT() float64 {
	return c.delta * (c.bTT()*c.psi() + 2*c.bT()*c.psiT() + c.bare()*c.psiTT())
}
func (c printedTerm) phiDT() float64 {
	return c.bare()*(c.psiT()+c.delta*c.psiDT()) + c.delta*c.bD()*c.psiT() + c.bT()*(c.psi()+c.delta*c.psiD()) + c.bDT()*c.delta*c.psi()
}
