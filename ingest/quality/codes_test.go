package quality

import "testing"

// The codes are those of IEC 62541-4 and -8 (OPC 10000-4, 7.39, and OPC 10000-8, 6.3) and of
// a companion specification's table; those marked (memory) were not looked up.
func TestOPCUA(t *testing.T) {
	for _, tt := range []struct {
		code uint32
		name string
		want Mark
	}{
		{0x00000000, "Good", None}, {0x40000000, "Uncertain", Doubted}, {0x80000000, "Bad", Rejected},
		{0x40900000, "UncertainLastUsableValue", LastUsable}, {0x40910000, "UncertainSubstituteValue", Substitute},
		{0x80050000, "BadCommunicationError", Offline}, {0x80310000, "BadNoCommunication", Offline},
		{0x80890000, "BadConfigurationError", Rejected}, {0x808A0000, "BadNotConnected", Offline},
		{0x808B0000, "BadDeviceFailure", Failed}, {0x808C0000, "BadSensorFailure", Failed}, {0x808D0000, "BadOutOfService", OutOfService},
		{0x40920000, "UncertainInitialValue", Substitute}, {0x40930000, "UncertainSensorNotAccurate", Inaccurate}, // (memory)
		{0x40940000, "UncertainEngineeringUnitsExceeded", OffSpec}, {0x40950000, "UncertainSubNormal", Doubted}, // (memory)
		{0x408F0000, "UncertainNoCommunicationLastUsable", LastUsable}, // (memory)
	} {
		for _, flags := range []uint32{0, 0x0400, 0x0480, 0x0300, 0x0B00, 0xFFFF} { // no limit, overflow, limits of another info type
			if got, ok := OPCUA(tt.code | flags); !ok || got != tt.want {
				t.Errorf("%#08x: %v, %v; want %v", tt.code|flags, got, ok, tt.want)
			}
		}
		if got, ok := OPCUAName([]byte(tt.name)); !ok || got != tt.want {
			t.Errorf("%s: %v, %v; want %v", tt.name, got, ok, tt.want)
		}
		if want := Quality(tt.code >> 30); tt.want.Quality() != want {
			t.Errorf("%s has the mark %v, of another severity than %v", tt.name, tt.want, want)
		}
	}
	for _, code := range []uint32{0xC0000000, 0xFFFFFFFF} {
		if m, ok := OPCUA(code); ok {
			t.Errorf("%#x is %v; want no status", code, m)
		}
	}
	for _, name := range []string{"", "good", "BAD", "Goodness", "Bad!", "BadSensor Failure", "Not", "Badß", "Bad-X"} {
		if m, ok := OPCUAName([]byte(name)); ok {
			t.Errorf("%q is %v; want no status", name, m)
		}
	}
}

// The bits are those of IEC 62541-4 (OPC 10000-4, 7.39), from memory: a limit counts where the
// info type is 01, and neither worsens nor explains what is bad or uncertain for a reason.
func TestOPCUALimits(t *testing.T) {
	for _, tt := range []struct {
		status uint32
		want   Mark
	}{
		{0x00000400, None}, {0x00000500, Limited}, {0x00000600, Limited}, {0x00000700, Substitute},
		{0x00000480, None}, {0x00000580, Limited}, {0x00000100, None}, {0x00000900, None}, {0x00000D00, None},
		{0x40000500, Limited}, {0x40000700, Substitute}, {0x40950600, Limited}, {0x40000100, Doubted},
		{0x40940600, OffSpec}, {0x40900700, LastUsable}, {0x80000500, Rejected}, {0x808C0600, Failed},
	} {
		if got, ok := OPCUA(tt.status); !ok || got != tt.want {
			t.Errorf("%#08x: %v, %v; want %v", tt.status, got, ok, tt.want)
		}
	}
}

// A value overridden by hand is good to the standard, but it is not measured.
func TestOPCUAOverride(t *testing.T) {
	byNumber, _ := OPCUA(0x00960000)
	byName, _ := OPCUAName([]byte("GoodLocalOverride"))
	if byNumber != Substitute || byName != Substitute {
		t.Errorf("a local override is %v by number, %v by name; want %v", byNumber, byName, Substitute)
	}
}

// NAMUR NE 107 (2017): failure and function check leave no valid signal, out of
// specification an uncertain one, and a need for maintenance a valid one.
func TestNE107(t *testing.T) {
	for word, want := range map[string]Mark{
		"": None, "NORMAL": None, "F": Failed, "f": Failed, "FAILURE": Failed, "C": FunctionCheck, "CHECK_FUNCTION": FunctionCheck,
		"S": OffSpec, "OFF_SPEC": OffSpec, "M": Maintenance, "m": Maintenance, "MAINTENANCE_REQUIRED": Maintenance,
	} {
		if got, ok := NE107([]byte(word)); !ok || got != want {
			t.Errorf("%q: %v, %v; want %v", word, got, ok, want)
		}
	}
	for _, word := range []string{"G", "&", "FF", "failure", " F", "\xff", "\x06"} {
		if m, ok := NE107([]byte(word)); ok {
			t.Errorf("%q is %v; want no signal", word, m)
		}
	}
}

func TestSparkplug(t *testing.T) {
	for code, want := range map[int64]Mark{0: Rejected, 192: None, 500: StaleAtSource} {
		if got, ok := Sparkplug(code); !ok || got != want {
			t.Errorf("%d: %v, %v; want %v", code, got, ok, want)
		}
	}
	for _, code := range []int64{-1, 1, 64, 191, 499, 1 << 40} {
		if m, ok := Sparkplug(code); ok {
			t.Errorf("%d is %v; want no quality", code, m)
		}
	}
}

// Whatever the word, it is no code, or has a mark that is known and of the word's severity; the one
// good word that doubts is held by a test of its own.
func FuzzNames(f *testing.F) {
	for name := range statusNames {
		f.Add([]byte(name))
	}
	for name := range namedSignals {
		f.Add([]byte(name))
	}
	f.Fuzz(func(t *testing.T, name []byte) {
		if m, ok := OPCUAName(name); ok && (words[m] == "" || len(name) < 3 || m.Quality() != severityOf(name[0]) && string(name) != "GoodLocalOverride") {
			t.Errorf("%q is %v", name, m)
		}
		if m, ok := NE107(name); ok && words[m] == "" {
			t.Errorf("%q is %v", name, m)
		}
	})
}

func severityOf(first byte) Quality {
	return map[byte]Quality{'G': Good, 'U': Uncertain, 'B': Bad}[first]
}
