package page

// curve is a picture of a quantity over another one.
type curve struct {
	Label  string
	Height px
	Lines  []mark
	Below  []mark
	Path   string
	Band   string // closed; empty for none
	Ahead  string // path of what is expected to come; empty for none
	Zones  []zone
	Limit  *level
	Of     string // what is drawn
	Unit   string // of the upright axis
	Along  string // what lies along the other one
}

// zone is a stretch along the axis below.
type zone struct {
	X, Width, End part
	Text          string
}

// level is a line across with its text.
type level struct {
	Y    px
	Text string
}

const curveHeight = 170

// drawCurve lays a line out over two axes; what else is marked is for the caller.
func drawCurve(label string, x, y axis, xs, ys []float64) *curve {
	c := &curve{Label: label, Height: curveHeight, Lines: y.lines(curveHeight)}
	c.Path = curvePath(places(x, xs), heights(y, ys))
	return c
}

// bounds are the least and the greatest of ys, for an axis of four steps.
func bounds(ys []float64) (lo, hi float64, steps int) {
	if len(ys) == 0 {
		return 0, 1, 4
	}
	lo, hi = ys[0], ys[0]
	for _, y := range ys {
		lo, hi = min(lo, y), max(hi, y)
	}
	return lo, hi, 4
}

func places(x axis, xs []float64) []float64 {
	at := make([]float64, len(xs))
	for i := range xs {
		at[i] = x.at(xs[i])
	}
	return at
}

func heights(y axis, ys []float64) []px {
	at := make([]px, len(ys))
	for i := range ys {
		at[i] = y.down(ys[i], curveHeight)
	}
	return at
}

// stretch is the zone from lo to hi, cut off at the ends of the axis.
func stretch(x axis, lo, hi float64, text string) zone {
	from, to := max(0, x.at(lo)), min(1, x.at(hi))
	return zone{part(from), part(max(to-from, 0)), part(to), text}
}

// within are marks that lie on the axis, each with its text.
func within(x axis, marks []float64, text func(float64) string) (all []mark) {
	for _, m := range marks {
		if at := x.at(m); at >= 0 && at <= 1 {
			all = append(all, across(at, text(m)))
		}
	}
	return all
}
