package scheduler

import (
	"fmt"
	"strconv"
	"time"

	"cadencewright/scheduler/internal/strictjson"
)

// nested is one object inside another; the pointer passes through.
type nested struct{ table *table }

func (k nested) reset(to any) {
	for i := range k.table.fields {
		f := &k.table.fields[i]
		f.kind.reset(f.at(to))
	}
}
func (k nested) read(r *fileReader, to any) { k.table.read(r, to) }
func (k nested) check(c *checker, from any) { k.table.check(c, from) }
func (k nested) isDefault(any) bool         { return false }
func (k nested) write(w *writer, from any)  { k.table.write(w, from) }
func (k nested) schema() map[string]any     { return k.table.schema() }

// optional is an object that may be absent: a nil *T.
type optional[T any] struct{ table *table }

func (k optional[T]) reset(to any) { *to.(**T) = nil }

func (k optional[T]) read(r *fileReader, to any) {
	if r.lex.Kind() != strictjson.Object {
		r.expectObject()
		return
	}
	p := new(T)
	*to.(**T) = p
	k.table.read(r, p)
}

func (k optional[T]) check(c *checker, from any) { k.table.check(c, *from.(**T)) }
func (k optional[T]) isDefault(from any) bool    { return *from.(**T) == nil }
func (k optional[T]) write(w *writer, from any)  { k.table.write(w, *from.(**T)) }
func (k optional[T]) schema() map[string]any     { return k.table.schema() }

// list is objects of one sort, written a line each.
type list[T any] struct {
	table       *table
	least, most int
}

func (k list[T]) reset(to any) { *to.(*[]T) = nil }

func (k list[T]) read(r *fileReader, to any) {
	p := to.(*[]T)
	ok := r.list("a list", k.most, func(int) {
		*p = append(*p, *new(T))
		k.table.read(r, &(*p)[len(*p)-1])
	})
	if ok {
		k.count(&r.checker, len(*p))
	}
}

// count reports a list that is too short or too long.
func (k list[T]) count(c *checker, n int) {
	switch {
	case n < k.least:
		c.bad("%s is empty; it must hold at least %d", c.name(), k.least)
	case n > k.most:
		c.bad("%s holds %d items; at most %d are allowed", c.name(), n, k.most)
	}
}

func (k list[T]) check(c *checker, from any) {
	items := *from.(*[]T)
	k.count(c, len(items))
	for i := range items[:min(len(items), k.most)] {
		c.enterIndex(i)
		k.table.check(c, &items[i])
		c.leave()
	}
}

func (k list[T]) isDefault(from any) bool { return len(*from.(*[]T)) == 0 }

func (k list[T]) write(w *writer, from any) {
	items := *from.(*[]T)
	w.raw("[")
	w.depth++
	for i := range items {
		if i > 0 {
			w.raw(",")
		}
		w.line()
		k.table.write(w, &items[i])
	}
	w.depth--
	if len(items) > 0 {
		w.line()
	}
	w.raw("]")
}

func (k list[T]) schema() map[string]any {
	s := map[string]any{"type": "array", "items": k.table.schema(), "maxItems": k.most}
	if k.least > 0 {
		s["minItems"] = k.least
	}
	return s
}

// names is a list of different, non-empty strings.
type names struct{ least, most int }

func (k names) reset(to any) { *to.(*[]string) = nil }

func (k names) read(r *fileReader, to any) {
	p := to.(*[]string)
	ok := r.list("a list of strings", k.most, func(int) {
		if v, ok := r.text("a string"); ok {
			*p = append(*p, v)
		} else {
			*p = append(*p, "?"+strconv.Itoa(len(*p))) // reported already
		}
	})
	if ok {
		k.check(&r.checker, to)
	}
}

func (k names) check(c *checker, from any) {
	v := *from.(*[]string)
	switch {
	case len(v) < k.least && k.least == 1:
		c.bad("%s is empty; it must hold at least one string", c.name())
	case len(v) < k.least:
		c.bad("%s holds %d strings; it must hold %d", c.name(), len(v), k.least)
	case len(v) > k.most && k.most == k.least:
		c.bad("%s holds %d strings; it must hold %d", c.name(), len(v), k.least)
	case len(v) > k.most:
		c.bad("%s holds %d items; at most %d are allowed", c.name(), len(v), k.most)
	}
	for i := range v[:min(len(v), k.most)] {
		c.enterIndex(i)
		text{}.check(c, &v[i])
		if contains(v[:i], v[i]) {
			c.bad("%s is %s, which stands in the list already", c.name(), quote(v[i]))
		}
		c.leave()
	}
}

// An absent list of names is only allowed where none means all.
func (k names) isDefault(from any) bool { return len(*from.(*[]string)) == 0 }

func (k names) write(w *writer, from any) {
	w.raw("[")
	for i, s := range *from.(*[]string) {
		if i > 0 {
			w.raw(", ")
		}
		w.text(s)
	}
	w.raw("]")
}

func (k names) schema() map[string]any {
	return map[string]any{"type": "array", "items": text{}.schema(), "minItems": k.least, "maxItems": k.most, "uniqueItems": true}
}

// losses is 24 numbers, one a local hour, each in [0, 1).
type losses struct{}

var lossRange = number{lo: 0, hi: 1, below: true}

func (k losses) reset(to any) { *to.(*[]float64) = nil }

func (k losses) read(r *fileReader, to any) {
	p := to.(*[]float64)
	good := true
	ok := r.list("a list of 24 numbers, one a local hour", 24, func(int) {
		v, ok := r.number()
		*p = append(*p, v)
		good = good && ok
	})
	if ok && good {
		k.check(&r.checker, to)
	}
}

func (k losses) check(c *checker, from any) {
	v := *from.(*[]float64)
	if len(v) != 24 {
		c.bad("%s holds %d numbers; it must hold 24, one a local hour", c.name(), len(v))
		return
	}
	for i := range v {
		if !lossRange.ok(v[i]) {
			c.enterIndex(i)
			lossRange.check(c, &v[i])
			c.leave()
		}
	}
}

func (k losses) isDefault(from any) bool { return len(*from.(*[]float64)) == 0 }

func (k losses) write(w *writer, from any) {
	w.raw("[")
	for i, v := range *from.(*[]float64) {
		if i > 0 {
			w.raw(", ")
		}
		w.number(v)
	}
	w.raw("]")
}

func (k losses) schema() map[string]any {
	return map[string]any{"type": "array", "minItems": 24, "maxItems": 24, "items": lossRange.schema()}
}

// corners is a horizon mask.
type corners struct{}

func (k corners) reset(to any) { *to.(*[]HorizonPoint) = nil }

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

// lengths is scan lengths in minutes, ascending. That they fit the grid is
// checked with the whole campaign.
type lengths struct{}

func (k lengths) reset(to any) { *to.(*[]int) = nil }

func (k lengths) read(r *fileReader, to any) {
	p := to.(*[]int)
	good := true
	ok := r.list("a list of minutes", MaxScanLengths, func(int) {
		v, ok := r.number()
		if ok && (v != float64(int(v)) || v < 1 || v > MaxBlock.Minutes()) {
			r.bad("%s is %s; it must be a whole number of minutes from 1 to %.0f", r.name(), short(v), MaxBlock.Minutes())
			ok = false
		}
		*p = append(*p, int(v))
		good = good && ok
	})
	if ok && good {
		k.check(&r.checker, to)
	}
}

func (k lengths) check(c *checker, from any) {
	v := *from.(*[]int)
	if len(v) == 0 || len(v) > MaxScanLengths {
		c.bad("%s holds %d lengths; it must hold from 1 to %d", c.name(), len(v), MaxScanLengths)
		return
	}
	for i := range v {
		c.enterIndex(i)
		if v[i] < 1 || v[i] > int(MaxBlock.Minutes()) {
			c.bad("%s is %d; it must be a whole number of minutes from 1 to %.0f", c.name(), v[i], MaxBlock.Minutes())
		} else if i > 0 && v[i] <= v[i-1] {
			c.bad("%s is %d after %d; scan lengths must ascend", c.name(), v[i], v[i-1])
		}
		c.leave()
	}
}

func (k lengths) isDefault(from any) bool { return len(*from.(*[]int)) == 0 }

func (k lengths) write(w *writer, from any) {
	w.raw("[")
	for i, v := range *from.(*[]int) {
		if i > 0 {
			w.raw(", ")
		}
		w.b = strconv.AppendInt(w.b, int64(v), 10)
	}
	w.raw("]")
}

func (k lengths) schema() map[string]any {
	return map[string]any{"type": "array", "minItems": 1, "maxItems": MaxScanLengths, "uniqueItems": true,
		"items": map[string]any{"type": "integer", "minimum": 1, "maximum": int(MaxBlock.Minutes())}}
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

// spanText shows a stretch of time inside a message.
func spanText(a, b time.Time) string {
	const f = "2006-01-02T15:04:05Z"
	return fmt.Sprintf("%s to %s", a.UTC().Format(f), b.UTC().Format(f))
}
