package store

import (
	"encoding/binary"
	"math"
)

const (
	hourNanos    = 3600 * 1_000_000_000
	quarterNanos = hourNanos / 4

	// hourFloats is how many floats an hour record holds.
	hourFloats = 14
)

// Hour is what a load did in the UTC hour that begins at Start (Unix
// nanoseconds): the sum of its minutes, each counted once. Several hours put
// together by [Hour.Add] are a day or a month, told by the same figures.
type Hour struct {
	Load  uint32
	Start int64
	// Minutes is how many minutes there are in it. One that measured nothing may
	// have none, so that what they miss of the hour is missing as well.
	Minutes uint32

	Measured, Bridged, Missing float64 // s
	Given, Taken               float64 // J, in the measured time
	BridgedGiven, BridgedTaken float64 // J
	Latent                     float64 // s within Measured
	Duty                       float64 // W, mean over Measured
	DutyMin, DutyMax           float64 // W, of the minutes that measured; 0 where none did
	// Demand is the greatest mean duty of a quarter of an hour by the clock, in W:
	// the sum of duty and measured time of its minutes over 900 s.
	Demand float64
	// Systematic, J, and Random, J², are the sums of those of the minutes. The standard
	// uncertainty of Given less Taken is the root of the sum of the squares of
	// Systematic and of Random.
	Systematic [Shares]float64
	Random     float64
	// HeatUncertainty is the sum of standard uncertainty and measured time, in J: what
	// that of Given less Taken is at most, where the minutes do not tell its parts.
	HeatUncertainty   float64
	Witness, Compared float64 // J, the sums of those of the minutes
	Mass              float64 // kg, the sum of flow and measured time
	// Inlet and Outlet in K and Pressure in Pa, absolute, are means over the
	// measured time of the minutes that have them, and 0 where none has. So is Content,
	// K, of a vessel.
	Inlet, Outlet, Pressure, Content float64
}

// floats lists the fields in the order in which they are stored.
func (h *Hour) floats() [hourFloats]*float64 {
	return [hourFloats]*float64{
		&h.Measured, &h.Bridged, &h.Missing, &h.Given, &h.Taken,
		&h.Duty, &h.DutyMin, &h.DutyMax, &h.Demand,
		&h.HeatUncertainty, &h.Mass, &h.Inlet, &h.Outlet, &h.Pressure,
	}
}

// hourLike tells of which floats of an hour are alike.
var hourLike = forerunners{-1, -1, -1, -1, -1, -1, 5, 5, 5, -1, -1, -1, 11, -1}

// Add makes h the sum of h and o: times, heat and mass add up, means are weighted by
// Measured, and of Start and the extremes the least or greatest stands. What measured
// nothing has no extremes.
func (h *Hour) Add(o Hour) {
	if h.Minutes == 0 {
		*h = o
		return
	}
	h.Start = min(h.Start, o.Start)
	h.Minutes += o.Minutes
	h.DutyMin, h.DutyMax = extremes(h.DutyMin, h.DutyMax, h.Measured, o.DutyMin, o.DutyMax, o.Measured)
	h.Duty = weighted(h.Duty, h.Measured, o.Duty, o.Measured)
	h.Inlet = present(h.Inlet, h.Measured, o.Inlet, o.Measured)
	h.Outlet = present(h.Outlet, h.Measured, o.Outlet, o.Measured)
	h.Pressure = present(h.Pressure, h.Measured, o.Pressure, o.Measured)
	h.Measured += o.Measured
	h.Bridged += o.Bridged
	h.Missing += o.Missing
	h.Given += o.Given
	h.Taken += o.Taken
	h.Demand = max(h.Demand, o.Demand)
	h.HeatUncertainty += o.HeatUncertainty
	h.Mass += o.Mass
}

// extremes leaves out those of what measured nothing.
func extremes(lowA, highA, measuredA, lowB, highB, measuredB float64) (low, high float64) {
	switch {
	case measuredB == 0:
		return lowA, highA
	case measuredA == 0:
		return lowB, highB
	}
	return min(lowA, lowB), max(highA, highB)
}

func weighted(a, wa, b, wb float64) float64 {
	if wa+wb == 0 {
		return a
	}
	return (a*wa + b*wb) / (wa + wb)
}

// present is weighted for figures of which 0 says that there is none.
func present(a, wa, b, wb float64) float64 {
	switch {
	case b == 0:
		return a
	case a == 0:
		return b
	}
	return weighted(a, wa, b, wb)
}

// hourSum gathers the minutes of one load in one hour.
type hourSum struct {
	Hour
	duty                    float64    // J
	quarters                [4]float64 // J
	inlet, outlet, pressure mean
}

type mean struct{ sum, weight float64 }

func (m *mean) add(x, weight float64) {
	if x != 0 {
		m.sum += x * weight
		m.weight += weight
	}
}

func (m *mean) value() float64 {
	if m.weight == 0 {
		return 0
	}
	return m.sum / m.weight
}

func (s *hourSum) add(m *Minute) {
	if s.Minutes == 0 {
		s.Hour = Hour{Load: m.Load, Start: hourOf(m.Start)}
	}
	s.DutyMin, s.DutyMax = extremes(s.DutyMin, s.DutyMax, s.Measured, m.DutyMin, m.DutyMax, m.Measured)
	s.Minutes++
	s.Measured += m.Measured
	s.Missing += m.Missing
	s.Given += m.Given
	s.Taken += m.Taken
	s.duty += m.Duty * m.Measured
	s.quarters[(m.Start-s.Start)/quarterNanos] += m.Duty * m.Measured
	s.HeatUncertainty += m.DutyUncertainty * m.Measured
	s.Mass += m.Flow * m.Measured
	s.inlet.add(m.Inlet, m.Measured)
	s.outlet.add(m.Outlet, m.Measured)
	s.pressure.add(m.Pressure, m.Measured)
}

// hour returns the sum of what was added.
func (s *hourSum) hour() Hour {
	h := s.Hour
	if h.Measured != 0 {
		h.Duty = s.duty / h.Measured
	}
	h.Demand = max(s.quarters[0], s.quarters[1], s.quarters[2], s.quarters[3]) / (quarterNanos / 1e9)
	h.Inlet, h.Outlet, h.Pressure = s.inlet.value(), s.outlet.value(), s.pressure.value()
	return h
}

// hourOf returns the start of the hour that holds t. The hour that begins before
// the least int64 is taken to begin there.
func hourOf(t int64) int64 {
	into := t % hourNanos
	if into < 0 {
		into += hourNanos
	}
	if t < math.MinInt64+into {
		return math.MinInt64
	}
	return t - into
}

// hourAfter returns the start of the next hour, or the greatest int64 where
// there is none.
func hourAfter(start int64) int64 {
	if start > math.MaxInt64-hourNanos {
		return math.MaxInt64
	}
	return hourOf(start + hourNanos)
}

// appendHours writes the hours of one key, sorted by load.
func appendHours(b []byte, key []byte, all []Hour) []byte {
	begin := len(b)
	for _, h := range all {
		b = binary.AppendUvarint(append(b, byte(h.Load%loadsAKey)), uint64(h.Minutes))
		fields := h.floats()
		b = appendFloats(b, fields[:], hourLike)
	}
	return binary.LittleEndian.AppendUint32(b, checksum(key, b[begin:]))
}

// parseHours adds to all the hours under one key, of the loads that are wanted.
func parseHours(all []Hour, key, value []byte, want func(load uint32) bool) ([]Hour, error) {
	n := len(value) - 4
	if len(key) != 12 || n < 0 || binary.LittleEndian.Uint32(value[n:]) != checksum(key, value[:n]) {
		return all, errRecord
	}
	start := int64(binary.BigEndian.Uint64(key) ^ 1<<63)
	block := binary.BigEndian.Uint32(key[8:])
	for p := (parser{rest: value[:n]}); len(p.rest) > 0; {
		rest := p.take(1)[0]
		minutes := p.uvarint()
		counts, body := p.floats(hourFloats)
		if p.bad || rest >= loadsAKey || block > math.MaxUint32/loadsAKey || minutes > math.MaxUint32 {
			return all, errRecord
		}
		h := Hour{Load: block*loadsAKey + uint32(rest), Start: start, Minutes: uint32(minutes)}
		if !want(h.Load) {
			continue
		}
		if fields := h.floats(); !parseFloats(counts, body, fields[:], hourLike) {
			return all, errRecord
		}
		all = append(all, h)
	}
	return all, nil
}
