package site

import "slices"

// keys are the keys of each block. A star stands for a name that the file gives.
var keys = map[string][]string{
	"": {"site", "timezone", "barometer", "broker", "brokers", "fluids", "tags", "loads", "exchangers", "timing", "history", "publish", "shown_in"},
	"broker": {"url", "client_id", "ca", "certificate", "key", "server_name", "min_tls", "username", "password_file", "password_env",
		"subscribe", "availability", "queue", "commands", "host_id"},
	"publish":  {"topic", "every", "broker"},
	"shown_in": {"duty", "heat", "temperature", "flow"},
	"timing":   {"grid", "lateness", "ahead", "commit", "bridge"},
	"history":  {"keep", "size"},
	"tags.*": {"topic", "unit", "value", "time", "time_unit", "quality", "unit_at", "samples", "step",
		"signal", "lead", "differential", "cut_off", "accuracy", "max_age", "range", "broker",
		"resolution", "deadband", "reports", "alive", "counts",
		"plausible", "fastest", "stuck", "spikes", "beside", "sparkplug", "metric"},
	"tags.*.alive":   {"topic", "within", "online", "offline", "value", "time", "time_unit"},
	"tags.*.quality": {"at", "code", "good", "uncertain", "bad", "absent"},
	"tags.*.counts":  {"rolls_over_at", "largest", "pulse", "since"},
	"loads.*":        {"stream", "vessel", "witness", "running", "bypass", "design"},
	"loads.*.bypass": {"open", "settles"},
	"loads.*.stream": {"fluid", "flow", "inlet", "outlet", "pressure", "outlet_pressure", "meter_at", "gives", "takes", "both_ways",
		"relative_humidity", "dew_point", "wet_bulb", "humidity_ratio", "coil", "margin", "idle_below", "calibrated_at", "pair", "corrections"},
	"loads.*.stream.corrections":        {"pump", "hold", "stored"},
	"loads.*.stream.corrections.stored": {"content", "metal", "over"},
	"loads.*.vessel":                    {"fluid", "temperature", "pressure", "content", "rigid", "shell", "over", "still", "gives", "takes", "margin", "idle_below"},
	"exchangers.*": {"hot", "cold", "arrangement", "shells", "design", "clean", "learned", "uncertainty", "films", "loss", "fouling_allowance",
		"lasting", "false_warnings"},
	"exchangers.*.design": {"duty", "hot_inlet", "hot_outlet", "cold_inlet", "cold_outlet"},
	"exchangers.*.films":  {"hot", "cold", "hot_exponent", "cold_exponent", "per_kelvin"},
	"loads.*.design": {"duty", "table", "week", "baseline", "exchanger", "uncertainty", "allow", "false_warnings", "lasting",
		"inlet", "outlet", "pressure"},
	"loads.*.design.table":              {"against", "points"},
	"loads.*.design.week":               weekKeys,
	"loads.*.design.baseline":           {"learned", "duty", "against", "correlation", "residual", "lag", "samples", "fewest", "span", "hours"},
	"loads.*.design.baseline.against.*": {"each", "adds", "uncertainty", "centre", "from", "to", "below", "above"},
	"loads.*.design.baseline.hours":     weekKeys,
	"fluids.*.flue gas":                 {"fuel", "elements", "excess air", "oxygen", "wet oxygen", "air humidity"},
	"fluids.*.flue gas.elements":        {"C", "H", "O", "N", "S", "water", "ash"},
	"fluids.*.food":                     {"water", "fat", "protein", "carbohydrate", "fibre", "ash"},
	"fluids.*.petroleum":                {"density", "api gravity", "watson", "group"},
	"fluids.*.moist air":                {"relative humidity", "dew point", "wet bulb", "humidity ratio", "at", "pressure"},
	"fluids.*.table":                    append([]string{"points"}, described...),
	"fluids.*.table.uncertainty":        {"cp", "density"},
	"fluids.*.polynomial":               append([]string{"cp", "density"}, described...),
	"fluids.*.polynomial.uncertainty":   {"cp", "density"},
}

// weekKeys are the keys of a week of hours.
var weekKeys = []string{"workday", "weekend", "monday", "tuesday", "wednesday", "thursday", "friday", "saturday", "sunday"}

// described are the keys of a fluid by figures of its own, beside the figures.
var described = []string{"source", "phase", "uncertainty", "pressure", "max_pressure", "freezing", "boiling", "range", "molar_mass"}

// Keys lists the keys that each block of a site file may have: "broker",
// "tags.*", "loads.*.stream" and so on, "" for the top. A star stands for a name
// that the file gives.
func Keys() map[string][]string {
	all := make(map[string][]string, len(keys)+4)
	for block, names := range keys {
		all[block] = slices.Clone(names)
	}
	all["brokers.*"] = slices.Clone(keys["broker"])
	all["fluids.*"] = fluidKeys()
	all["fluids.*.gas"], all["fluids.*.flue gas.fuel"] = species(), species()
	return all
}
