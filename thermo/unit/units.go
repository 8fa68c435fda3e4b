package unit

import "slices"

// table holds every unit, the usual ones of a dimension first. Temperature
// stands before TemperatureDifference: [Lookup] takes the first.
var table = slices.Concat(
	temperatures, differences, pressures, massFlows, volumeFlows, molarFlows, masses, volumes,
	energies, powers, specificHeats, specificEnthalpies, densities, ratios, durations, sizes, molarMasses,
	heatCapacities, amounts, counts, resistances, currents, conductances, heatResistances,
)

var temperatures = rows(Temperature,
	is("°C", 1, nist, "C", "Celsius", "celsius").from(273.15),
	is("K", 1, si, "Kelvin", "kelvin"),
	is("°F", rankine, nist, "F", "Fahrenheit", "fahrenheit").from(fOffset),
	is("°R", rankine, nist),
)

var differences = rows(TemperatureDifference,
	is("K", 1, si, "°C", "C", "Celsius", "celsius", "Kelvin", "kelvin", "ΔK", "delta K"),
	is("°F", rankine, nist, "F", "Fahrenheit", "fahrenheit", "°R"),
)

var pressures = rows(Pressure,
	is("bar", 1e5, nist, "bar(a)", "bara", "bar a", "bar abs").noting(absNote),
	is("barg", 1e5, nist, "bar(g)", "bar g").gauge(),
	is("kPa", 1e3, si, "kPa(a)", "kPaa", "kPa a", "kPa abs").noting(absNote),
	is("kPag", 1e3, si, "kPa(g)", "kPa g").gauge(),
	is("Pa", 1, si, "Pa(a)").noting(absNote),
	is("MPa", 1e6, si, "MPa(a)", "MPaa", "MPa a").noting(absNote),
	is("psi", psi, nist, "psia", "psi(a)", "psi a").noting(absNote),
	is("psig", psi, nist, "psi(g)", "psi g").gauge(),
	is("mbar", 100, nist, "mbar(a)", "mbara", "hPa").noting(absNote),
	is("mbarg", 100, nist, "mbar(g)", "mbar g").gauge(),
	is("MPag", 1e6, si, "MPa(g)", "MPa g").gauge(),
	is("Pag", 1, si, "Pa(g)").gauge(),
	is("atm", atm, nist).noting(absNote),
	is("kgf/cm2", gn*1e4, nist, "at", "at (kgf/cm2)", "kg/cm2").noting(absNote),
	is("torr", atm/760, nist, "Torr").noting(absNote),
	is("mmHg", mercury/1e3, nist, "mmHg (conventional, 0 degC)").noting(absNote),
	is("inHg", mercuryI, nist, "inHg (conventional, 32 degF)").noting(absNote),
	is("inH2O", 1000*gn*inch, nist, "inH2O (conventional, 4 degC)", "inWC").noting("absolute, water of 1000 kg/m3; the inch at 60 °F is 248.84 Pa"),
	is("mH2O", 1000*gn, nist, "mH2O (conventional)", "mWC").noting(absNote),
)

var massFlows = rows(MassFlow,
	is("kg/s", 1, si),
	is("kg/h", 1/hour, nist),
	is("t/h", 1000/hour, nist),
	is("kg/min", 1/minute, nist),
	is("g/s", 1e-3, si),
	is("t/d", 1000/day, nist),
	is("lb/h", pound/hour, nist, "lbs/h", "pph"),
	is("lb/min", pound/minute, nist, "lbs/min"),
	is("lb/s", pound, nist),
	is("standard air cfm", 0.075*pound/minute, "standard air of 0.075 lb/ft3, as ASHRAE defines it",
		"standard air cfm (0.075 lb/ft3)").noting("a mass flow of air; fan and ventilation practice"),
)

var volumeFlows = rows(VolumeFlow,
	is("m3/h", 1/hour, nist, "cbm/h"),
	is("L/s", 1e-3, nist, "l/s"),
	is("L/min", 1e-3/minute, nist, "l/min", "lpm", "LPM"),
	is("m3/s", 1, si),
	is("L/h", 1e-3/hour, nist, "l/h"),
	is("m3/min", 1/minute, nist),
	is("hL/h", 0.1/hour, nist, "hl/h").noting("the hectolitre of breweries, 0.1 m3"),
	is("m3/d", 1/day, nist),
	is("gpm", galUS/minute, nist, "gpm (US)", "US gpm", "usgpm", "GPM", "gal/min").noting("US gallons of 231 in3; a UK gallon is 20 % larger, write gpm (UK)"),
	is("gpm (UK)", galUK/minute, nist, "imp gpm", "imp. gpm", "Imp gpm", "UK gpm", "gpm (imp)"),
	is("cfm", cubicFt/minute, nist, "cfm (actual)", "acfm", "ACFM", "CFM", "ft3/min").noting("cubic feet as they flow; standard ones are scfm with their reference"),
	is("bbl/d", 42*galUS/day, nist, "bbl/d (oil)").noting("oil barrel of 42 US gallons"),
)

var molarFlows = rows(MolarFlow,
	is("Nm3/h", normal/hour, din, "m3(N)/h", "m3n/h").noting("a real gas differs by its compressibility at the reference"),
	is("Nm3/s", normal, din),
	is("Nm3/min", normal/minute, din),
	is("Sm3/h", standard/hour, iso, "m3(S)/h").noting("a real gas differs by its compressibility at the reference"),
	is("Sm3/s", standard, iso),
	is("Sm3/d", standard/day, iso),
	is("scfm (60 °F)", scf60*cubicFt/minute, "natural-gas convention: 60 °F, 14.696 psia; ideal gas", "scfm (60 degF, 14.696 psia)", "scfm 60 °F"),
	is("scfm (68 °F)", scf68*cubicFt/minute, "compressed-air convention: 68 °F, 14.696 psia; ideal gas", "scfm (68 degF, 14.696 psia)", "scfm 68 °F"),
	is("SLPM", normal*1e-3/minute, "SEMI E12 (from memory): 0 °C, 1 atm; ideal gas", "slpm", "SLPM (0 degC, 1 atm)"),
	is("mol/s", 1, si),
	is("kmol/h", 1000/hour, si),
)

var masses = rows(Mass,
	is("kg", 1, si),
	is("t", 1000, nist, "t (tonne)", "tonne", "tonnes"),
	is("g", 1e-3, si),
	is("lb", pound, nist, "lbs"),
	is("short ton (US)", 2000*pound, nist, "short ton"),
	is("long ton (UK)", 2240*pound, nist, "long ton"),
)

var volumes = rows(Volume,
	is("m3", 1, si),
	is("L", 1e-3, nist, "l", "litre", "liter"),
	is("hL", 0.1, nist, "hl", "hectolitre", "hectoliter"),
	is("gal", galUS, nist, "gal (US)", "US gal").noting("US gallon of 231 in3"),
	is("gal (UK)", galUK, nist, "imp gal", "UK gal"),
	is("ft3", cubicFt, nist),
	is("bbl", 42*galUS, nist, "bbl (oil, 42 US gal)").noting("oil barrel of 42 US gallons"),
)

var energies = rows(Energy,
	is("kWh", 1e3*hour, nist),
	is("MWh", 1e6*hour, nist),
	is("GJ", 1e9, si),
	is("MJ", 1e6, si),
	is("kJ", 1e3, si),
	is("J", 1, si),
	is("TJ", 1e12, si),
	is("Wh", hour, nist),
	is("GWh", 1e9*hour, nist),
	is("Btu", btu, nist, "Btu_IT").noting("International Table"),
	is("kBtu", 1e3*btu, nist),
	is("MMBtu", 1e6*btu, nist).noting("a million Btu"),
	is("Btu_th", 4.184*453.59237/1.8, nist).noting("thermochemical"),
	is("therm (US)", 105480400, "NIST SP 811 (2008): therm (US), exact").noting("based on the Btu at 59 °F"),
	is("therm (EC)", 1e5*btu, "NIST SP 811 (2008): therm (EC), exact"),
	is("kcal", 1e3*calIT, nist, "kcal_IT").noting("International Table"),
	is("Mcal", 1e6*calIT, nist, "Mcal_IT").noting("International Table"),
	is("Gcal", 1e9*calIT, nist, "Gcal_IT").noting("International Table"),
	is("cal_IT", calIT, nist),
	is("cal_th", 4.184, nist),
	is("cal_15", 4.1855, "NIST SP 811 (2008), CIPM 1950: 4.1855(5) J"),
	is("ton of refrigeration hour", 12000*btu, nist, "TRh", "ton-hour", "ton hour"),
)

var powers = rows(Power,
	is("kW", 1e3, si),
	is("MW", 1e6, si),
	is("W", 1, si),
	is("GW", 1e9, si),
	is("Btu/h", btu/hour, nist, "Btu_IT/h", "Btuh"),
	is("MMBtu/h", 1e6*btu/hour, nist).noting("a million Btu an hour"),
	is("kBtu/h", 1e3*btu/hour, nist, "MBH", "MBH (1000 Btu/h)").noting("a thousand Btu an hour"),
	is("ton of refrigeration", 12000*btu/hour, nist, "tons of refrigeration", "TR", "RT", "ton (refrigeration)"),
	is("kcal/h", 1e3*calIT/hour, nist).noting("International Table"),
	is("Mcal/h", 1e6*calIT/hour, nist).noting("International Table"),
	is("Gcal/h", 1e9*calIT/hour, nist).noting("International Table"),
	is("GJ/h", 1e9/hour, si),
	is("MJ/h", 1e6/hour, si),
	is("hp", 550*foot*pound*gn, nist, "horsepower", "horsepower (550 ft lbf/s)").noting("550 ft lbf/s; the metric horsepower is smaller"),
	is("boiler horsepower", 9809.5, "NIST SP 811 (2008): 9.80950 kW", "boiler hp").noting("the trade's 33 475 Btu/h is 0.01 % more"),
)

var specificHeats = rows(SpecificHeat,
	is("kJ/(kg K)", 1e3, si, "kJ/kgK", "kJ/kg K", "kJ/kg/K", "kJ/(kgK)", "kJ/(kg °C)", "kJ/kg°C", "kJ/kg °C"),
	is("J/(kg K)", 1, si, "J/kgK", "J/kg K", "J/kg/K", "J/(kgK)", "J/(kg °C)"),
	is("Btu/(lb °F)", btu/pound*1.8, nist, "Btu_IT/(lb degF)", "Btu/lb°F", "Btu/lb °F", "Btu/lb/°F", "Btu/(lb F)"),
	is("kcal/(kg K)", 1e3*calIT, nist, "kcal_IT/(kg K)", "kcal/(kg °C)", "kcal/kgK"),
)

var specificEnthalpies = rows(SpecificEnthalpy,
	is("kJ/kg", 1e3, si),
	is("J/kg", 1, si),
	is("MJ/kg", 1e6, si),
	is("Btu/lb", btu/pound, nist, "Btu_IT/lb"),
	is("kcal/kg", 1e3*calIT, nist, "kcal_IT/kg"),
)

var densities = rows(Density,
	is("kg/m3", 1, si),
	is("kg/L", 1e3, nist, "kg/l"),
	is("g/cm3", 1e3, si, "g/mL", "g/ml"),
	is("g/L", 1, nist, "g/l"),
	is("t/m3", 1e3, nist),
	is("lb/ft3", pound/cubicFt, nist),
	is("lb/gal", pound/galUS, nist, "lb/gal (US)").noting("US gallon of 231 in3"),
)

var ratios = rows(Ratio,
	is("%", 1e-2, si, "percent", "per cent"),
	is("‰", 1e-3, si, "permille"),
	is("ppm", 1e-6, si),
	is("kg/kg", 1, si),
	is("g/kg", 1e-3, si),
)

var durations = rows(Duration,
	is("s", 1, si, "sec", "second", "seconds"),
	is("min", minute, nist, "minute", "minutes"),
	is("h", hour, nist, "hr", "hour", "hours"),
	is("d", day, nist, "day", "days"),
	is("ms", 1e-3, si),
	is("µs", 1e-6, si, "us"),
)

var sizes = rows(Size,
	is("MiB", 1<<20, inSize),
	is("GiB", 1<<30, inSize),
	is("KiB", 1<<10, inSize, "kiB"),
	is("B", 1, inSize, "byte", "bytes"),
	is("kB", 1e3, inSize),
	is("MB", 1e6, inSize),
	is("GB", 1e9, inSize),
)

var molarMasses = rows(MolarMass,
	is("g/mol", 1e-3, si),
	is("kg/kmol", 1e-3, si),
	is("kg/mol", 1, si),
	is("lb/lbmol", 1e-3, "a pound-mole is as many pounds as a gram-mole is grams", "lb/lb-mol"),
)

var heatCapacities = rows(HeatCapacity,
	is("kJ/K", 1e3, si, "kJ/°C"),
	is("MJ/K", 1e6, si, "MJ/°C"),
	is("J/K", 1, si, "J/°C"),
	is("kWh/K", 1e3*hour, nist, "kWh/°C"),
	is("Btu/°F", btu*1.8, nist, "Btu_IT/°F", "Btu/F"),
	is("kcal/K", 1e3*calIT, nist, "kcal/°C").noting("International Table"),
)

var amounts = rows(Amount,
	is("Nm3", normal, din, "m3(N)", "m3n").noting("a real gas differs by its compressibility at the reference"),
	is("Sm3", standard, iso, "m3(S)").noting("a real gas differs by its compressibility at the reference"),
	is("scf (60 °F)", scf60*cubicFt, "natural-gas convention: 60 °F, 14.696 psia; ideal gas", "scf (60 degF, 14.696 psia)", "scf 60 °F"),
	is("scf (68 °F)", scf68*cubicFt, "compressed-air convention: 68 °F, 14.696 psia; ideal gas", "scf (68 degF, 14.696 psia)", "scf 68 °F"),
	is("mol", 1, si),
	is("kmol", 1000, si),
)

var counts = rows(Count,
	is("pulses", 1, "a number of events", "pulse", "counts", "count"),
)

var resistances = rows(Resistance,
	is("ohm", 1, si, "ohms", "Ohm", "Ω"),
	is("kohm", 1e3, si, "kΩ"),
	is("mohm", 1e-3, si, "mΩ"),
)

var currents = rows(Current,
	is("mA", 1e-3, si),
	is("A", 1, si),
)

var conductances = rows(Conductance,
	is("kW/K", 1e3, si, "kW/°C"),
	is("W/K", 1, si, "W/°C"),
	is("MW/K", 1e6, si, "MW/°C"),
	is("Btu/(h °F)", btu/hour*1.8, nist, "Btu_IT/(h °F)", "Btu/h/°F", "Btu/(h F)"),
	is("kcal/(h K)", 1e3*calIT/hour, nist, "kcal/(h °C)").noting("International Table"),
)

var heatResistances = rows(HeatResistance,
	is("K/kW", 1e-3, si, "°C/kW"),
	is("K/W", 1, si, "°C/W"),
	is("K/MW", 1e-6, si, "°C/MW"),
	is("h °F/Btu", hour/btu/1.8, nist, "h °F/Btu_IT", "h F/Btu"),
)
