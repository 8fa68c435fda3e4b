package configs_test

import (
	"fmt"
	"slices"
	"testing"

	"go.yaml.in/yaml/v3"
)

// values are put in the place of every value, one by one.
var values = []yaml.Node{
	{Kind: yaml.ScalarNode, Tag: "!!int", Value: "7"},
	{Kind: yaml.ScalarNode, Tag: "!!null", Value: "null"},
	{Kind: yaml.ScalarNode, Tag: "!!str", Value: ""},
	{Kind: yaml.ScalarNode, Tag: "!!str", Value: "odd +#$ text"},
	{Kind: yaml.ScalarNode, Tag: "!!str", Value: " 7 K"},
	{Kind: yaml.MappingNode},
	{Kind: yaml.SequenceNode},
}

// eachMutant changes a file in every place: a value replaced, a key left out, an
// unknown one or a neighbour's added. visit gets the changed tree, which is only
// good until it returns, and what the change is.
func eachMutant(t *testing.T, text []byte, visit func(doc *yaml.Node, what string)) {
	t.Helper()
	var doc yaml.Node
	if err := yaml.Unmarshal(text, &doc); err != nil {
		t.Fatal(err)
	}
	bare(&doc)
	change(doc.Content[0], "", func(format string, args ...any) {
		visit(&doc, fmt.Sprintf(format, args...))
	})
}

// bare drops the comments: what is written anew has other places for them.
func bare(n *yaml.Node) {
	n.HeadComment, n.LineComment, n.FootComment = "", "", ""
	for _, c := range n.Content {
		bare(c)
	}
}

// change applies every change to n and below, calls write for each, and takes it
// back.
func change(n *yaml.Node, path string, write func(format string, args ...any)) {
	original := *n
	for _, v := range values {
		*n = v
		write("%s is %q (%s)", path, v.Value, v.Tag)
	}
	*n = original
	switch n.Kind {
	case yaml.MappingNode:
		changeKeys(n, path, write)
		seen := make(map[string]bool)
		for i := 0; i+1 < len(n.Content); i += 2 {
			if s := shape(n.Content[i+1]); s == "" || !seen[s] {
				seen[s] = true
				change(n.Content[i+1], path+"."+n.Content[i].Value, write)
			}
		}
	case yaml.SequenceNode:
		content := n.Content
		for i := range content {
			n.Content = slices.Delete(slices.Clone(content), i, i+1)
			write("%s is without item %d", path, i)
		}
		n.Content = content
		seen := make(map[string]bool)
		for i, item := range content {
			if s := fmt.Sprint(item.Kind, shape(item), len(item.Content)); !seen[s] {
				seen[s] = true
				change(item, fmt.Sprintf("%s[%d]", path, i), write)
			}
		}
	}
}

// shape is what a mapping's keys are. Of tags with the same keys, one is changed, and so it
// is with items of a list.
func shape(n *yaml.Node) string {
	var keys string
	if n.Kind == yaml.MappingNode {
		for i := 0; i < len(n.Content); i += 2 {
			keys += n.Content[i].Value + "\n"
		}
	}
	return keys
}

// added are keys that one block or another has, and one that none has. Each block gets a
// third of them, and those that follow it the others.
var added = []string{
	"colour", "time_unit", "range", "password_env", "key", "takes", "gives", "meter_at", "allow", "uncertainty", "table", "propylene glycol",
	"counts", "reports", "vessel", "samples", "signal", "quality", "stuck", "spikes", "running",
}

func changeKeys(n *yaml.Node, path string, write func(format string, args ...any)) {
	content := n.Content
	for i := 0; i+1 < len(content); i += 2 {
		n.Content = slices.Delete(slices.Clone(content), i, i+2)
		write("%s is without %s", path, content[i].Value)
	}
	for i, key := range added {
		if (i+len(path))%3 != 0 || slices.ContainsFunc(content, func(k *yaml.Node) bool { return k.Value == key }) {
			continue
		}
		n.Content = append(slices.Clone(content), &yaml.Node{Kind: yaml.ScalarNode, Value: key}, &yaml.Node{Kind: yaml.ScalarNode, Value: "heat"})
		write("%s has %s besides", path, key)
	}
	n.Content = content
}
