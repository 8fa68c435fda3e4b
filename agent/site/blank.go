package site

import "go.yaml.in/yaml/v3"

// Blank stands in a draft of a site file for what only an engineer can fill in.
const Blank = "___"

// blanks finds what is still to be filled in below n, at the path.
func (s *scope) blanks(n *yaml.Node, path string) {
	switch n.Kind {
	case yaml.ScalarNode:
		if n.Value == Blank {
			s.add(n.Line, n.Column, path, "is still to be filled in")
		}
	case yaml.MappingNode:
		for i := 0; i+1 < len(n.Content); i += 2 {
			s.blanks(n.Content[i+1], join(path, n.Content[i].Value))
		}
	case yaml.SequenceNode:
		for _, item := range n.Content {
			s.blanks(item, path)
		}
	}
}
