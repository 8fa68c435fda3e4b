package sparkplug

import (
	"errors"
	"fmt"
	"strings"
	"unicode/utf8"
)

// Kind is the kind of a message, by its topic.
type Kind uint8

// The kinds: Sparkplug 3.0, chapter 4. N is of an edge node, D of a device behind one.
const (
	NBirth Kind = iota + 1
	NDeath
	NData
	NCommand
	DBirth
	DDeath
	DData
	DCommand
	StateOfHost
)

var kindNames = [...]string{
	NBirth: "NBIRTH", NDeath: "NDEATH", NData: "NDATA", NCommand: "NCMD",
	DBirth: "DBIRTH", DDeath: "DDEATH", DData: "DDATA", DCommand: "DCMD", StateOfHost: "STATE",
}

// String returns the kind's word in a topic, such as "NBIRTH".
func (k Kind) String() string {
	if k > 0 && int(k) < len(kindNames) {
		return kindNames[k]
	}
	return fmt.Sprintf("Kind(%d)", uint8(k))
}

func (k Kind) ofDevice() bool { return k >= DBirth && k <= DCommand }

// Prefix begins the topic of every message.
const Prefix = "spBv1.0/"

// Source is an edge node, or with Device a device behind one.
type Source struct{ Group, Node, Device string }

// String returns the source as "group/node" or "group/node/device".
func (s Source) String() string {
	if s.Device == "" {
		return s.Group + "/" + s.Node
	}
	return s.Group + "/" + s.Node + "/" + s.Device
}

// EdgeNode is the node that the source is, or is behind.
func (s Source) EdgeNode() Source { return Source{Group: s.Group, Node: s.Node} }

// ParseSource reads "group/node" or "group/node/device".
func ParseSource(text string) (Source, error) {
	group, rest, _ := strings.Cut(text, "/")
	node, device, below := strings.Cut(rest, "/")
	s := Source{Group: group, Node: node, Device: device}
	switch {
	case group == "" || node == "" || below && device == "":
		return Source{}, fmt.Errorf("%q is no group/node or group/node/device", text)
	case strings.Contains(device, "/"):
		return Source{}, fmt.Errorf("%q has more than a group, a node and a device", text)
	case strings.ContainsAny(text, "+#"):
		return Source{}, fmt.Errorf("%q has + or #, which no id may have", text)
	case group == StateOfHost.String():
		return Source{}, fmt.Errorf("%q: a group has not the name STATE, which is for hosts", text)
	case !utf8.ValidString(text) || strings.ContainsRune(text, 0):
		return Source{}, fmt.Errorf("%q is not UTF-8 without NUL", text)
	case len(Prefix)+len("NBIRTH//")+len(text) > 65535:
		return Source{}, errors.New("the ids are longer than a topic may be")
	}
	return s, nil
}

// Topic is a topic, taken apart: a source, or for [StateOfHost] a host's id.
type Topic struct {
	Kind Kind
	Source
	Host string
}

// ParseTopic reads a topic; ok is false where it is none of the namespace.
func ParseTopic(topic string) (t Topic, ok bool) {
	rest, ok := strings.CutPrefix(topic, Prefix)
	if !ok {
		return t, false
	}
	group, rest, _ := strings.Cut(rest, "/")
	if group == kindNames[StateOfHost] {
		return Topic{Kind: StateOfHost, Host: rest}, rest != "" && !strings.Contains(rest, "/")
	}
	word, rest, _ := strings.Cut(rest, "/")
	for k := NBirth; k < StateOfHost; k++ {
		if kindNames[k] == word {
			t.Kind = k
		}
	}
	node, device, below := strings.Cut(rest, "/")
	t.Source = Source{Group: group, Node: node, Device: device}
	sound := group != "" && node != "" && (device != "") == below && !strings.Contains(device, "/")
	return t, t.Kind != 0 && sound && t.Kind.ofDevice() == below
}

// Topic returns the topic of the source's messages of a kind.
func (s Source) Topic(k Kind) string {
	topic := Prefix + s.Group + "/" + k.String() + "/" + s.Node
	if k.ofDevice() {
		topic += "/" + s.Device
	}
	return topic
}

// Filters are the subscriptions that bring all that the edge node of s and its devices
// publish: each counts in the sequence of the node, so all are needed to see a gap.
// Commands to the node are not among them.
func (s Source) Filters() []string {
	all := Source{Group: s.Group, Node: s.Node, Device: "+"}
	var filters []string
	for _, k := range []Kind{NBirth, NDeath, NData, DBirth, DDeath, DData} {
		filters = append(filters, all.Topic(k))
	}
	return filters
}
