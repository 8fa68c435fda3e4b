package working

import (
	"fmt"
	"math"

	"heatreeve/agent/design/exchanger"
	"heatreeve/agent/figure"
)

// Exchanger is that whose clean duty is expected of a load, in the state of the last minute.
type Exchanger struct {
	Name  string
	Model exchanger.Model
	State exchanger.State
	Loss  float64 // W, that the hot side gives up to the surroundings
	Hot   bool    // the load is the hot side
}

const byKays = "W. M. Kays and A. L. London, Compact Heat Exchangers"

// clean writes the duty of the clean exchanger by effectiveness and NTU, W; false where heat
// cannot pass.
func (p *page) clean(x *Exchanger) (term, bool) {
	duty, err := x.Model.Duty(&x.State)
	if err != nil {
		return term{}, false
	}
	s, m := &x.State, &x.Model
	hot, cold := p.capacity(&s.Hot, "h", "hot side"), p.capacity(&s.Cold, "c", "cold side")
	least, most := hot, cold
	if s.Hot.Capacity() > s.Cold.Capacity() {
		least, most = cold, hot
	}
	cmin, cmax := min(s.Hot.Capacity(), s.Cold.Capacity()), max(s.Hot.Capacity(), s.Cold.Capacity())
	ratio := p.worked("Cr", "ratio of the capacity rates", least.over(most), cmin/cmax, "1", fine, "")
	UA := p.conductance(x)
	ntu := m.Clean(s) / cmin
	n := p.worked("NTU", "transfer units", UA.over(least), ntu, "1", place(ntu, fine), "")
	eps := p.effectiveness(m, n, ratio, ntu, cmin/cmax, s.Hot.Capacity() <= s.Cold.Capacity())
	drive := p.at["inlet h"].minus(p.at["inlet c"])
	q := eps.times(least).times(drive)
	if x.Hot && x.Loss != 0 {
		duty += x.Loss
		q = q.plus(p.given("L", "loss to the surroundings", x.Loss/1e3, "kW", place(x.Loss/1e3, 10), "site file"))
	}
	return p.worked(figure.Expected.Symbol, figure.Expected.By("that of the clean exchanger, ")+x.Name, q, duty/1e3, "kW", place(duty/1e3, fine), ""), true
}

// capacity writes the capacity rate of a side, kW/K, and its inlet.
func (p *page) capacity(s *exchanger.Stream, side, words string) term {
	m := p.given("m"+side, "mass flow of the "+words, s.Flow, "kg/s", place(s.Flow, fine), "minute before")
	c := p.given("cp"+side, "its specific heat", s.Cp/1e3, "kJ/(kg K)", place(s.Cp/1e3, fine), "minute before")
	p.at["flow "+side] = m
	p.at["inlet "+side] = p.given("T"+side, "its inlet temperature", s.Inlet, "K", place(s.Inlet, fine), "minute before")
	return p.worked("C"+side, "its capacity rate", m.times(c), s.Capacity()/1e3, "kW/K", place(s.Capacity()/1e3, fine), "")
}

// conductance writes UA of the clean exchanger, kW/K, from its films and wall, K/kW.
func (p *page) conductance(x *Exchanger) term {
	s := &x.State
	hot := p.film(&x.Model.Hot, &s.Hot, "h", "hot side")
	cold := p.film(&x.Model.Cold, &s.Cold, "c", "cold side")
	wall := p.given("Rw", "resistance of the wall", x.Model.Wall*1e3, "K/kW", place(x.Model.Wall*1e3, 10), "site file")
	UA := x.Model.Clean(s) / 1e3
	return p.worked("UA", "conductance when clean", number(1).over(sum([]term{hot, wall, cold})), UA, "kW/K", place(UA, fine), "")
}

// film writes the resistance of a side at its flow and temperature.
func (p *page) film(f *exchanger.Film, s *exchanger.Stream, side, words string) term {
	r := p.given("Rd"+side, "resistance of the film of the "+words+" by design", f.Resistance*1e3, "K/kW", place(f.Resistance*1e3, 10), "site file")
	if f.Exponent != 0 {
		at := p.given("md"+side, "mass flow for which that is", f.Flow, "kg/s", place(f.Flow, 10), "site file")
		r = r.over(p.at["flow "+side].over(at).toThe(named("exponent", f.Exponent)))
	}
	if f.PerKelvin != 0 {
		mean := (s.Inlet + s.Outlet) / 2
		t := p.given("Tm"+side, "mean temperature of the "+words, mean, "K", place(mean, fine), "minute before")
		at := p.given("Td"+side, "for which that is", f.Temperature, "K", place(f.Temperature, 10), "site file")
		r = r.over(number(1).plus(named("per_kelvin", f.PerKelvin).times(t.minus(at))))
	}
	R := f.At(s.Flow, (s.Inlet+s.Outlet)/2) * 1e3
	return p.worked("R"+side, "and now", r, R, "K/kW", place(R, fine), "")
}

// effectiveness writes that of the arrangement.
func (p *page) effectiveness(m *exchanger.Model, n, c term, ntu, ratio float64, hotIsMin bool) term {
	eps := m.Effectiveness(ntu, ratio, hotIsMin)
	words := "effectiveness in " + m.Arrangement.String()
	one := number(1)
	show := func(f term) term { return p.worked("ε", words, f, eps, "1", place(eps, fine), byKays) }
	switch {
	case m.Kind == exchanger.Counterflow && c.value == 1:
		return show(n.over(one.plus(n)))
	case m.Kind == exchanger.Counterflow:
		x := math.Exp(-ntu * (1 - ratio))
		e := p.worked("X", "what is left of the drive", negative(n).times(one.minus(c)).exp(), x, "1", place(x, fine), "")
		return show(one.minus(e).over(one.minus(c.times(e))))
	case m.Kind == exchanger.Parallel:
		return show(one.minus(negative(n).times(one.plus(c)).exp()).over(one.plus(c)))
	}
	return p.given("ε", fmt.Sprintf("%s, of NTU and Cr", words), eps, "1", place(eps, fine), byKays)
}
