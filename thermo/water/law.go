package water

import "heatreeve/thermo"

// tableLaw is what a difference over 10 mK makes of a density that steps by 3e-7
// from one column to the next, as a fraction of v; inside a column it is 1e-4.
const tableLaw = 0.02

// PressureLaw leaves room between the enthalpy and the density of a table, which
// have their errors each on its own.
func (*liquidTable) PressureLaw() thermo.PressureLaw { return thermo.PressureLaw{Within: tableLaw} }

// PressureLaw is that of a table of water.
func (*steamTable) PressureLaw() thermo.PressureLaw { return thermo.PressureLaw{Within: tableLaw} }
