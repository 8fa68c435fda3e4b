package quality

// OPCUA is the mark of an OPC UA status code. Its two highest bits are the severity: 00
// good, 01 uncertain, 10 bad, and 11 is none, for which ok is false (IEC 62541-4, section
// 7.39). The sub-code of bits 29 to 16 is the reason where it is known here.
//
// Three kinds of value are good by that standard and [Uncertain] here, since a heat load
// that is worked from them is not measured: one at a limit (bits 9 and 8, where bits 11
// and 10 say that they count) is [Limited], for the true one may lie beyond; a constant
// and one overridden by hand are each a [Substitute]. The other low bits change nothing.
//
// The numbers are those of IEC 62541-8, section 6.3; the low bits, 0x0096 and 0x408F to
// 0x4095 but 0x4090 and 0x4091 are from memory.
func OPCUA(status uint32) (m Mark, ok bool) {
	if m, known := statusCodes[status>>16]; known {
		return m, true
	}
	switch status >> 30 {
	case 0:
		return limits[limitOf(status)], true
	case 1:
		return Worse(limits[limitOf(status)], Doubted), true
	case 2:
		return Rejected, true
	}
	return None, false
}

// limits are the marks of the limit bits: none, low, high, constant.
var limits = [4]Mark{None, Limited, Limited, Substitute}

// limitOf is what the limit bits of a status code say; they count where the info type,
// bits 11 and 10, is 01.
func limitOf(status uint32) uint32 {
	if status>>10&3 != 1 {
		return 0
	}
	return status >> 8 & 3
}

// OPCUAName is the mark of an OPC UA status code by its symbolic name, such as
// "BadSensorFailure". Names that are not known here tell their severity by how they
// begin; any other word is none, and ok is false.
func OPCUAName(name []byte) (m Mark, ok bool) {
	if m, known := statusNames[string(name)]; known {
		return m, true
	}
	for _, severity := range severities {
		if rest, has := cut(name, severity.word); has && (len(rest) == 0 || upper(rest[0]) && letters(rest)) {
			return severity.mark, true
		}
	}
	return None, false
}

var severities = []struct {
	word string
	mark Mark
}{{"Good", None}, {"Uncertain", Doubted}, {"Bad", Rejected}}

// statusCodes are the codes whose reason has a mark of its own, by their high half.
var statusCodes = map[uint32]Mark{
	0x0096: Substitute,
	0x408F: LastUsable, 0x4090: LastUsable, 0x4091: Substitute, 0x4092: Substitute,
	0x4093: Inaccurate, 0x4094: OffSpec,
	0x8005: Offline, 0x8031: Offline, 0x808A: Offline,
	0x808B: Failed, 0x808C: Failed, 0x808D: OutOfService,
}

// statusNames are the same by their names.
var statusNames = map[string]Mark{
	"GoodLocalOverride":                  Substitute,
	"UncertainNoCommunicationLastUsable": LastUsable, "UncertainLastUsableValue": LastUsable,
	"UncertainSubstituteValue": Substitute, "UncertainInitialValue": Substitute,
	"UncertainSensorNotAccurate": Inaccurate, "UncertainEngineeringUnitsExceeded": OffSpec,
	"BadCommunicationError": Offline, "BadNoCommunication": Offline, "BadNotConnected": Offline,
	"BadDeviceFailure": Failed, "BadSensorFailure": Failed, "BadOutOfService": OutOfService,
}

// NE107 is the mark of a status signal of NAMUR NE 107: the letters F (failure), C
// (function check), S (out of specification) and M (maintenance required), in either
// case, or the names that the device model of OPC UA gives them (OPC 10000-100,
// DeviceHealth; from memory). A healthy device has no letter: that is nothing at all, or
// NORMAL. For any other word ok is false.
func NE107(word []byte) (m Mark, ok bool) {
	if len(word) == 0 {
		return None, true
	}
	if len(word) == 1 {
		m, ok = letterSignals[word[0]&^0x20]
		return m, ok
	}
	m, ok = namedSignals[string(word)]
	return m, ok
}

var letterSignals = map[byte]Mark{'F': Failed, 'C': FunctionCheck, 'S': OffSpec, 'M': Maintenance}

var namedSignals = map[string]Mark{
	"NORMAL": None, "FAILURE": Failed, "CHECK_FUNCTION": FunctionCheck, "OFF_SPEC": OffSpec, "MAINTENANCE_REQUIRED": Maintenance,
}

// Sparkplug is the mark of the quality property of a Sparkplug B metric: 0 bad, 192 good,
// 500 stale (Sparkplug 3.0.0, the metric property "Quality"). For any other number ok is
// false.
func Sparkplug(code int64) (m Mark, ok bool) {
	switch code {
	case 0:
		return Rejected, true
	case 192:
		return None, true
	case 500:
		return StaleAtSource, true
	}
	return None, false
}

func cut(text []byte, prefix string) (rest []byte, ok bool) {
	if len(text) < len(prefix) || string(text[:len(prefix)]) != prefix {
		return text, false
	}
	return text[len(prefix):], true
}

func upper(c byte) bool { return 'A' <= c && c <= 'Z' }

func letters(text []byte) bool {
	for _, c := range text {
		if l := c &^ 0x20; !upper(l) && (c < '0' || c > '9') {
			return false
		}
	}
	return true
}
