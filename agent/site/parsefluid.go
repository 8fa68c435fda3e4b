package site

import (
	"regexp"
	"strings"

	"heatreeve/thermo"
	"heatreeve/thermo/named"
)

// unspaced is a colon behind a key that YAML takes for a part of it.
var unspaced = regexp.MustCompile(`[\p{L}\d]:[^\s/]`)

// ParseFluid reads a fluid as it stands in a site file, for a command line: a name such
// as "water" or "propylene glycol 32 %", or the YAML of a declaration such as
// "{gas: {N2: 79 %, O2: 21 %}}". The error is a [Faults] where it is YAML. A gauge
// pressure is refused: there is no barometer.
func ParseFluid(text string) (thermo.Fluid, error) {
	if !strings.ContainsAny(text, "{\n") {
		if f, err := named.Lookup(text); err == nil || !strings.Contains(text, ":") {
			return f, err
		}
	}
	s := &scope{file: "fluid"}
	if root := s.document([]byte(text)); len(s.faults) == 0 {
		v := value{scope: s, node: root}
		r := &reader{site: &Site{}, file: s.file}
		f := r.declare("fluid", v)
		if r.gauge {
			v.fault("has a gauge pressure; write the absolute one, such as 3 bar")
		}
		if len(s.faults) == 0 && f != nil {
			return f, nil
		}
	}
	s.faults.sort()
	if unspaced.MatchString(text) {
		for i := range s.faults {
			s.faults[i].Message = strings.Replace(s.faults[i].Message, notYAML, notYAML+" (a colon is followed by a space)", 1)
		}
	}
	return nil, s.faults
}
