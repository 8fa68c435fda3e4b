package site

import "heatreeve/agent/shown"

// shownIn reads the optional block of the units that people are shown figures in.
func (r *reader) shownIn(o object) {
	r.site.Shown = shown.Usual()
	block, ok := o.get("shown_in")
	if !ok {
		return
	}
	b := block.object("shown_in")
	for _, kind := range shown.Kinds() {
		v, ok := b.get(kind)
		if !ok {
			continue
		}
		if name, ok := v.text(); ok {
			if err := r.site.Shown.Set(kind, name); err != nil {
				v.fault("%v", err)
			}
		}
	}
}
