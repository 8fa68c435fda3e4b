package ingest

import (
	"fmt"
	"strconv"
	"strings"

	"github.com/go-json-experiment/json/jsontext"
)

// splitPointer returns the reference tokens of a JSON Pointer (RFC 6901,
// sections 3 and 4), unescaped. The empty pointer has none.
func splitPointer(pointer string) ([]string, error) {
	if pointer == "" {
		return nil, nil
	}
	if pointer[0] != '/' {
		return nil, fmt.Errorf("pointer %q must begin with \"/\", as in \"/%s\"", pointer, pointer)
	}
	if !jsontext.Pointer(pointer).IsValid() {
		return nil, fmt.Errorf("pointer %q: \"~\" is written \"~0\" and \"/\" within a name \"~1\"", pointer)
	}
	tokens := strings.Split(pointer[1:], "/")
	for i, t := range tokens {
		tokens[i] = strings.ReplaceAll(strings.ReplaceAll(t, "~1", "/"), "~0", "~")
	}
	return tokens, nil
}

// node is one place in a JSON document: the wanted pointers of all tags of a
// topic form a tree, so that one pass over the message serves them all.
type node struct {
	slot  int // where the value found here is noted; -1: nowhere
	under map[string]*node
	list  *list // of samples that stands here
}

func newNode() *node { return &node{slot: -1} }

// at returns the node for the path below n, made if need be.
func (n *node) at(path []string) *node {
	for _, token := range path {
		next := n.under[token]
		if next == nil {
			next = newNode()
			if n.under == nil {
				n.under = make(map[string]*node)
			}
			n.under[token] = next
		}
		n = next
	}
	return n
}

// number returns the slot of n, the next of slots where it has none yet.
func (n *node) number(slots *int) int {
	if n.slot < 0 {
		n.slot = *slots
		*slots++
	}
	return n.slot
}

// check refuses pointers into a list of samples, whose elements are read for themselves.
func (n *node) check(path string) error {
	if n.list != nil && len(n.under) > 0 {
		return fmt.Errorf("a pointer leads into the list of samples at %q; all of a tag with samples is read from there", path)
	}
	for name, below := range n.under {
		if err := below.check(path + "/" + name); err != nil {
			return err
		}
	}
	return nil
}

// member returns the node of an object member; name is as it stands in the
// document, in quotes and perhaps with escapes.
func (n *node) member(name []byte) *node {
	bare := name[1 : len(name)-1]
	for _, c := range bare {
		if c == '\\' {
			plain, err := jsontext.AppendUnquote(nil, name)
			if err != nil {
				return nil // the scanner has accepted the name, so this cannot happen
			}
			return n.under[string(plain)]
		}
	}
	return n.under[string(bare)]
}

// element returns the node of a list element: decimal, without leading zeros.
func (n *node) element(i int) *node {
	var digits [20]byte
	return n.under[string(strconv.AppendInt(digits[:0], int64(i), 10))]
}
