package thermo

// Wet is a gas whose vapour condenses below the lower end of its Span, while the
// sensible part of its heat stays well defined: that of the same composition,
// cooled on without condensing.
type Wet interface {
	Fluid
	// Sensible is At, but not refused below the dew point.
	Sensible(T, p float64) (Properties, error)
}

// MoistureKind tells which quantity of the humidity of air is known.
type MoistureKind uint8

const (
	HumidityRatio    MoistureKind = iota + 1 // kg of vapour per kg of dry air
	RelativeHumidity                         // partial pressure over that at saturation, 0 to 1
	DewPoint                                 // K
	WetBulb                                  // thermodynamic wet-bulb temperature, K
)

// Moisture is a humidity as it is measured: Value in the unit of its kind.
type Moisture struct {
	Kind  MoistureKind
	Value float64
}

// Humid is a gas whose vapour content is measured beside the stream.
type Humid interface {
	Fluid
	// Carrying returns the gas with the moisture m, measured where the
	// temperature is T in K and the absolute pressure p in Pa. The error says
	// which figure is out of range.
	Carrying(m Moisture, T, p float64) (Wet, error)
}
