package roster

import (
	"strings"
	"testing"
)

var (
	names = []string{"carbon steel", "stainless steel 304", "aluminium", "lead"}
	also  = map[string]string{"aluminum": "aluminium", "steel": "carbon steel", "gold": "Au"}
)

func TestFind(t *testing.T) {
	for written, want := range map[string]string{
		"carbon steel": "carbon steel", "Carbon-Steel": "carbon steel", " CARBONSTEEL ": "carbon steel", "carbon_steel": "carbon steel",
		"carbon – steel": "carbon steel", "steel": "carbon steel", "Aluminum": "aluminium", "stainless-steel-304": "stainless steel 304",
	} {
		if got, err := Find("solid", written, names, also); err != nil || names[got] != want {
			t.Errorf("Find(%q) = %d, %v; want that of %q", written, got, err, want)
		}
	}
}

func TestFindAnswersUnknown(t *testing.T) {
	const all = "; known: carbon steel, stainless steel 304, aluminium, lead"
	for written, want := range map[string]string{
		"carbn steel":           `unknown solid "carbn steel", did you mean "carbon steel"` + all,
		"alumnum":               `unknown solid "alumnum", did you mean "aluminium"` + all,
		"steels":                `unknown solid "steels", did you mean "carbon steel"` + all,
		"stee":                  `unknown solid "stee", did you mean "carbon steel" or "stainless steel 304"` + all,
		"lea":                   `unknown solid "lea", did you mean "lead"` + all,
		"":                      `unknown solid ""` + all,
		"gold":                  `unknown solid "gold"` + all, // leads to what is not listed
		"helium":                `unknown solid "helium"` + all,
		strings.Repeat("é", 99): `unknown solid "` + strings.Repeat("é", 60) + `..."` + all,
	} {
		if got, err := Find("solid", written, names, also); err == nil || err.Error() != want {
			t.Errorf("Find(%q) = %d, %v; want error %s", written, got, err, want)
		}
	}
}
