package working

// sheet is a working that is being written.
type sheet struct{ *Working }

// begin opens a section.
func (s *sheet) begin(title string) { s.Sections = append(s.Sections, Section{Title: title}) }

// end drops the section where nothing came into it.
func (s *sheet) end() {
	if last := len(s.Sections) - 1; len(s.Sections[last].Lines) == 0 {
		s.Sections = s.Sections[:last]
	}
}

func (s *sheet) add(l Line) {
	section := &s.Sections[len(s.Sections)-1]
	section.Lines = append(section.Lines, l)
}

// given writes a value that is not worked here, and returns what formulas write of it.
func (s *sheet) given(symbol, words string, x float64, unit string, decimals int, source string) term {
	text := fixed(x, max(decimals, 0))
	s.add(Line{Symbol: symbol, Words: words, Value: x, Shown: text, Unit: unit, Source: source})
	return shown(symbol, text)
}

// worked writes a value with the formula that leads to it: the value is the engine's own,
// with the digits in which the printed numbers give the same.
func (s *sheet) worked(symbol, words string, f term, x float64, unit string, decimals int, source string) term {
	text := fixed(x, agreed(x, f.value, max(decimals, 0)))
	l := Line{Symbol: symbol, Words: words, Law: f.law, Formula: f.text, Value: x, Shown: text, Unit: unit, Source: source}
	s.add(l)
	return shown(symbol, text)
}

// say writes a line of words.
func (s *sheet) say(words string) { s.add(Line{Words: words}) }

func shown(symbol, text string) term {
	return term{symbol, text, parse(text), asOne}
}
