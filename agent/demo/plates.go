package demo

import (
	"fmt"
	"math"
)

// plates is a plate exchanger in counterflow. What it does is worked here apart from
// the model by which the agent judges it, so that each may find the other's errors:
//
//	Φ = ε·Cmin·(T_hot − T_cold),   ε = (1 − e)/(1 − C·e),   e = exp(−NTU·(1 − C)),
//
// NTU = UA/Cmin, C = Cmin/Cmax of the capacity rates, and 1/UA the sum of the two
// films, each of which goes with its flow to the power of −exponent, of the wall and of
// what has settled on it (W. M. Kays and A. L. London, Compact Heat Exchangers). Φ
// passes through the wall and is what the cold side takes; the hot side gives the loss
// to the room as well.
type plates struct {
	conductance float64    // clean, at the design flows, W/K
	films       [2]float64 // parts of the resistance 1/UA there: of the hot and of the cold side
	exponent    float64    // of the flow in a film
	flows       [2]float64 // design flows of both sides, kg/s
	loss        float64    // W
}

const (
	hotSide = iota
	coldSide
)

// incoming is a stream as it comes to the plates.
type incoming struct {
	flow, inlet float64 // kg/s, K
	enthalpy    func(T float64) (float64, error)
}

// clean is the conductance at flows of both sides, W/K.
func (p *plates) clean(flows [2]float64) float64 {
	part := 1 - p.films[hotSide] - p.films[coldSide]
	for side, film := range p.films {
		part += film * math.Pow(flows[side]/p.flows[side], -p.exponent)
	}
	return p.conductance / part
}

// passed returns the heat that passes through the wall, W, and both outlets, K, where
// what has settled resists by so much, K/W. The outlets are found by turns: each gives
// the mean heat capacity of its stream, and the two capacities give the heat.
func (p *plates) passed(in [2]incoming, settled float64) (heat float64, outlets [2]float64, err error) {
	conductance := 1 / (1/p.clean([2]float64{in[hotSide].flow, in[coldSide].flow}) + settled)
	outlets = [2]float64{in[hotSide].inlet - 10, in[coldSide].inlet + 10}
	for range 50 {
		var rates [2]float64
		for side, s := range in {
			if rates[side], err = s.capacity(outlets[side]); err != nil {
				return 0, outlets, err
			}
		}
		heat = effectiveness(conductance, rates) * min(rates[0], rates[1]) * (in[hotSide].inlet - in[coldSide].inlet)
		next := [2]float64{in[hotSide].inlet - (heat+p.loss)/rates[hotSide], in[coldSide].inlet + heat/rates[coldSide]}
		moved := math.Abs(next[0]-outlets[0]) + math.Abs(next[1]-outlets[1])
		if outlets = next; moved < 1e-9 {
			return heat, outlets, nil
		}
	}
	return 0, outlets, fmt.Errorf("no outlets found at flows of %g and %g kg/s", in[hotSide].flow, in[coldSide].flow)
}

// capacity is the rate of a stream between its inlet and its outlet, W/K.
func (s *incoming) capacity(outlet float64) (float64, error) {
	h1, err := s.enthalpy(s.inlet)
	if err != nil {
		return 0, fmt.Errorf("inlet: %w", err)
	}
	h2, err := s.enthalpy(outlet)
	if err != nil {
		return 0, fmt.Errorf("outlet: %w", err)
	}
	return s.flow * (h2 - h1) / (outlet - s.inlet), nil
}

// effectiveness is ε of counterflow.
func effectiveness(conductance float64, rates [2]float64) float64 {
	least, most := min(rates[0], rates[1]), max(rates[0], rates[1])
	units, ratio := conductance/least, least/most
	if 1-ratio < 1e-9 {
		return units / (1 + units)
	}
	e := math.Exp(-units * (1 - ratio))
	return (1 - e) / (1 - ratio*e)
}

// conductanceFor is the UA by which counterflow passes the heat between two streams,
// by the logarithmic mean of the differences at both ends.
func conductanceFor(heat, hotIn, hotOut, coldIn, coldOut float64) (float64, error) {
	one, other := hotIn-coldOut, hotOut-coldIn
	if !(one > 0) || !(other > 0) {
		return 0, fmt.Errorf("no heat passes from %g to %g K on to %g to %g K", hotIn, hotOut, coldIn, coldOut)
	}
	mean := (one + other) / 2
	if math.Abs(one/other-1) > 1e-6 {
		mean = (one - other) / math.Log(one/other)
	}
	return heat / mean, nil
}
