package store

// hourSum gathers the minutes of one load in one hour.
type hourSum struct {
	Hour
	duty                             float64    // J
	quarters                         [4]float64 // J
	inlet, outlet, pressure, content mean
	expected, expectedError          mean
}

type mean struct{ sum, weight float64 }

func (m *mean) add(x, weight float64) {
	m.sum += x * weight
	m.weight += weight
}

// present adds a figure of which 0 says that there is none.
func (m *mean) present(x, weight float64) {
	if x != 0 {
		m.add(x, weight)
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
	s.Bridged += m.Bridged
	s.Missing += m.Missing
	s.Given += m.Given
	s.Taken += m.Taken
	s.BridgedGiven += m.BridgedGiven
	s.BridgedTaken += m.BridgedTaken
	s.Latent += m.Latent
	s.Uncertain += m.Uncertain
	s.duty += m.Duty * m.Measured
	s.quarters[(m.Start-s.Start)/quarterNanos] += m.Duty * m.Measured
	for i, x := range m.Systematic {
		s.Systematic[i] += x
	}
	s.Random += m.Random
	s.HeatUncertainty += m.DutyUncertainty * m.Measured
	if m.shares().present() == 0 {
		s.Untold += m.DutyUncertainty * m.Measured
	}
	s.Witness += m.Witness
	s.Compared += m.Compared
	s.Mass += m.Flow * m.Measured
	s.inlet.present(m.Inlet, m.Measured)
	s.outlet.present(m.Outlet, m.Measured)
	s.pressure.present(m.Pressure, m.Measured)
	s.content.present(m.Content, m.Measured)
	if m.expects() {
		s.expected.add(m.Expected, m.Measured)
		s.expectedError.add(m.ExpectedError, m.Measured)
	}
}

// hour returns the sum of what was added, as it is kept.
func (s *hourSum) hour() Hour {
	h := s.Hour
	if h.Measured != 0 {
		h.Duty = s.duty / h.Measured
	}
	h.Demand = max(s.quarters[0], s.quarters[1], s.quarters[2], s.quarters[3]) / (quarterNanos / 1e9)
	h.Inlet, h.Outlet, h.Pressure, h.Content = s.inlet.value(), s.outlet.value(), s.pressure.value(), s.content.value()
	h.Expected, h.ExpectedError = s.expected.value(), s.expectedError.value()
	return h.kept()
}
