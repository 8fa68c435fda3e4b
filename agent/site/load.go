package site

import (
	"bytes"
	"crypto/sha256"
	"errors"
	"fmt"
	"io"
	"os"
	"regexp"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"

	"go.yaml.in/yaml/v3"
)

// maxFile bounds a site file, in bytes. A thousand loads with four tags each
// need about one MiB.
const maxFile = 16 << 20

// Load reads the site file at path. The error is a [Faults] where the file could
// be read and is wrong. Relative paths in the file start at its directory.
func Load(path string) (*Site, error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, fmt.Errorf("site file: %w", err)
	}
	defer f.Close()
	text, err := io.ReadAll(io.LimitReader(f, maxFile+1))
	if err != nil {
		return nil, fmt.Errorf("site file: %w", err)
	}
	return Parse(path, text)
}

// Parse is [Load] for a text that is at hand; name stands for its path.
func Parse(name string, text []byte) (*Site, error) {
	s := &scope{file: name}
	root := s.document(text)
	if len(s.faults) == 0 {
		s.blanks(root, "")
	}
	if len(s.faults) == 0 {
		r := &reader{site: &Site{Text: text, Digest: sha256.Sum256(text)}, file: name, tellers: make(map[int]value)}
		r.read(value{scope: s, node: root})
		if len(s.faults) == 0 {
			return r.site, nil
		}
	}
	s.faults.sort()
	return nil, s.faults
}

// document reads the YAML of a file that holds one document.
func (s *scope) document(text []byte) *yaml.Node {
	if len(text) > maxFile {
		s.add(1, 1, "", "the file is larger than %d MiB", maxFile>>20)
		return nil
	}
	if !s.legible(text) {
		return nil
	}
	dec := yaml.NewDecoder(bytes.NewReader(text))
	var doc, more yaml.Node
	switch err := dec.Decode(&doc); {
	case errors.Is(err, io.EOF):
		s.add(1, 1, "", "the file is empty")
		return nil
	case err != nil:
		s.syntax(err)
		return nil
	}
	switch err := dec.Decode(&more); {
	case err == nil:
		s.add(more.Line, more.Column, "", "a second document starts here; a site file holds one")
	case !errors.Is(err, io.EOF):
		s.syntax(err)
	}
	return doc.Content[0]
}

// legible finds the place of what YAML forbids in any text.
func (s *scope) legible(text []byte) bool {
	line, column := 1, 1
	for len(text) > 0 {
		r, n := utf8.DecodeRune(text)
		switch {
		case r == utf8.RuneError && n == 1:
			s.add(line, column, "", "byte 0x%02x is not valid UTF-8", text[0])
			return false
		case unicode.IsControl(r) && r != '\n' && r != '\r' && r != '\t' && r != '\u0085':
			s.add(line, column, "", "control character %U", r)
			return false
		case r == '\n':
			line, column = line+1, 0
		}
		column++
		text = text[n:]
	}
	return true
}

var yamlError = regexp.MustCompile(`^yaml: (?:line (\d+): )?((?s).*)$`)

const notYAML = "this is not YAML"

// syntax adds an error of the YAML parser, which knows at best the line.
func (s *scope) syntax(err error) {
	line, text := 1, err.Error()
	if m := yamlError.FindStringSubmatch(text); m != nil {
		text = m[2]
		if n, err := strconv.Atoi(m[1]); err == nil && n > 0 {
			line = n
		}
	}
	s.add(line, 1, "", notYAML+": %s", clip(strings.Join(strings.Fields(text), " ")))
}
