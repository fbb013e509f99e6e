package scheduler

import "strconv"

// names is a list of different, non-empty strings.
type names struct{ least, most int }

func (k names) reset(to any) { *to.(*[]string) = nil }

// read puts a stand-in where an item is no string, so that the places of the
// others stay right.
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

// check finds duplicates by looking back; lists of names are short.
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

// check wants all 24 or none; 1 would leave no band at all and is not allowed.
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

// lengths is scan lengths in minutes, ascending. That they fit the grid is
// checked with the whole campaign.
type lengths struct{}

func (k lengths) reset(to any) { *to.(*[]int) = nil }

// read refuses fractions here, since the Go field cannot hold them.
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

// check keeps lengths to what fits into the longest block.
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
