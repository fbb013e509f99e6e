package scheduler

import "time"

// corners is a horizon mask.
type corners struct{}

func (k corners) reset(to any) { *to.(*[]HorizonPoint) = nil }

// read refuses an empty mask, which nobody writes on purpose; in memory it is
// the same as none.
func (k corners) read(r *fileReader, to any) {
	p := to.(*[]HorizonPoint)
	good := true
	ok := r.list("a list of [az_deg, el_deg]", MaxHorizon, func(int) {
		v, ok := readPair(r, "[az_deg, el_deg]", r.number)
		*p = append(*p, HorizonPoint{v[0], v[1]})
		good = good && ok
	})
	if ok && good {
		if len(*p) == 0 {
			r.bad("%s is empty; leave it out where there is no mask", r.name())
		}
		k.check(&r.checker, to)
	}
}

var (
	azimuthRange  = number{lo: 0, hi: 360, below: true, unit: "degrees"}
	maskElevation = within(-90, 90, "degrees")
)

// check wants azimuths in ascending order, so that the mask is one line round
// the horizon; from the last corner it goes on to the first.
func (k corners) check(c *checker, from any) {
	v := *from.(*[]HorizonPoint)
	if len(v) > MaxHorizon {
		c.bad("%s holds %d corners; at most %d are allowed", c.name(), len(v), MaxHorizon)
		return
	}
	for i, p := range v {
		c.enterIndex(i)
		switch {
		case !azimuthRange.ok(p.AzimuthDeg):
			c.bad("%s: azimuth is %v; it must be %s", c.name(), p.AzimuthDeg, azimuthRange.allowed())
		case !maskElevation.ok(p.ElevationDeg):
			c.bad("%s: elevation is %v; it must be %s", c.name(), p.ElevationDeg, maskElevation.allowed())
		case i > 0 && p.AzimuthDeg <= v[i-1].AzimuthDeg:
			c.bad("%s: azimuth %v comes after %v; azimuths must ascend", c.name(), p.AzimuthDeg, v[i-1].AzimuthDeg)
		}
		c.leave()
	}
}

func (k corners) isDefault(from any) bool { return len(*from.(*[]HorizonPoint)) == 0 }

func (k corners) write(w *writer, from any) {
	w.raw("[")
	for i, p := range *from.(*[]HorizonPoint) {
		if i > 0 {
			w.raw(", ")
		}
		span{}.write(w, &[2]float64{p.AzimuthDeg, p.ElevationDeg})
	}
	w.raw("]")
}

func (k corners) schema() map[string]any {
	return map[string]any{"type": "array", "minItems": 1, "maxItems": MaxHorizon, "items": map[string]any{
		"type": "array", "minItems": 2, "maxItems": 2,
		"prefixItems": []any{azimuthRange.schema(), maskElevation.schema()}}}
}

// readPair reads a list of exactly two values, each by one.
func readPair[V any](r *fileReader, want string, one func() (V, bool)) (v [2]V, good bool) {
	n := 0
	good = true
	ok := r.list("a pair "+want, 2, func(i int) {
		var ok bool
		v[i], ok = one()
		good = good && ok
		n++
	})
	if ok && n != 2 {
		r.bad("%s must be a pair %s, not %d values", r.name(), want, n)
		return v, false
	}
	return v, ok && good
}

// spans is a list of [start, end]. That they lie in their block is checked
// with the whole campaign.
type spans struct{}

func (k spans) reset(to any) { *to.(*[]Span) = nil }

func (k spans) read(r *fileReader, to any) {
	p := to.(*[]Span)
	r.list("a list of [start, end]", MaxLost, func(int) {
		v, _ := readPair(r, "[start, end]", func() (time.Time, bool) {
			var t time.Time
			before := r.count()
			instant{}.read(r, &t)
			return t, r.count() == before
		})
		*p = append(*p, Span{v[0], v[1]})
	})
}

// check looks at the instants alone; order and place need the block.
func (k spans) check(c *checker, from any) {
	v := *from.(*[]Span)
	if len(v) > MaxLost {
		c.bad("%s holds %d spans; at most %d are allowed", c.name(), len(v), MaxLost)
	}
	for i := range v[:min(len(v), MaxLost)] {
		c.enterIndex(i)
		for j, t := range []time.Time{v[i].Start, v[i].End} {
			c.enterIndex(j)
			instant{}.check(c, &t)
			c.leave()
		}
		c.leave()
	}
}

func (k spans) isDefault(from any) bool { return len(*from.(*[]Span)) == 0 }

func (k spans) write(w *writer, from any) {
	w.raw("[")
	for i, s := range *from.(*[]Span) {
		if i > 0 {
			w.raw(", ")
		}
		w.raw("[")
		w.instant(s.Start)
		w.raw(", ")
		w.instant(s.End)
		w.raw("]")
	}
	w.raw("]")
}

func (k spans) schema() map[string]any {
	return map[string]any{"type": "array", "maxItems": MaxLost, "items": map[string]any{
		"type": "array", "minItems": 2, "maxItems": 2, "items": instant{}.schema()}}
}
