package scheduler

import "cadencewright/scheduler/internal/strictjson"

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

// read takes an object alone: null is not how a file says that there is none.
func (k optional[T]) read(r *fileReader, to any) {
	if r.lex.Kind() != strictjson.Object {
		r.expectObject()
		return
	}
	p := new(T)
	*to.(**T) = p
	k.table.read(r, p)
}

// check is only called for an object that is there: absent is the default.
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

// read appends items as they come. One that is no object leaves a zero value,
// so that the places of the others stay right.
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

// check looks at no more items than are allowed: a list that is far too long is
// one problem, not one for each item.
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

// write puts every item on a line of its own, one blank deeper than the list.
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
