package api

import (
	"encoding/base64"
	"strings"

	"cadencewright/scheduler"
)

// PageInput asks for one page of a list. (The library looks into embedded types
// that are exported only.)
type PageInput struct {
	Limit  int    `query:"limit" minimum:"1" maximum:"200" default:"100" doc:"entries at most"`
	Cursor string `query:"cursor" maxLength:"400" doc:"what the page before gave as next; left out: from the beginning"`
}

// list is one page.
type list[T any] struct {
	Items []T    `json:"items" nullable:"false"`
	Next  string `json:"next,omitempty" doc:"cursor of the next page; left out: this is the last one"`
}

type listOutput[T any] struct{ Body list[T] }

// cursorOf makes a cursor of the key of the last entry of a page. Clients are
// not to read it, so it does not look as if they could.
func cursorOf(key string) string { return base64.RawURLEncoding.EncodeToString([]byte("after " + key)) }

// keyOf is the key in a cursor; "" where there is none.
func (p PageInput) keyOf() (string, error) {
	if p.Cursor == "" {
		return "", nil
	}
	b, err := base64.RawURLEncoding.DecodeString(p.Cursor)
	key, ok := strings.CutPrefix(string(b), "after ")
	if err != nil || !ok {
		return "", badCursor()
	}
	return key, nil
}

func badCursor() error {
	return scheduler.Problems{{Pointer: "cursor", Message: "this cursor is none of this list, or what it pointed at is gone: start from the beginning"}}
}

// pageOf cuts a page out of a whole list. key names an entry; it must be unique
// in the list. The entry that the cursor names must still be there, unless past
// tells by key alone which entries come after it.
func pageOf[T any](all []T, p PageInput, key func(*T) string, past func(*T, string) bool) (list[T], error) {
	after, err := p.keyOf()
	if err != nil {
		return list[T]{}, err
	}
	from := 0
	if after != "" {
		from = -1
		for i := range all {
			if past != nil && past(&all[i], after) {
				from = i
				break
			}
			if key(&all[i]) == after {
				from = i + 1
				break
			}
		}
		switch {
		case from < 0 && past != nil:
			from = len(all)
		case from < 0:
			return list[T]{}, badCursor()
		}
	}
	to := min(len(all), from+p.limit())
	out := list[T]{Items: append([]T{}, all[from:to]...)}
	if to < len(all) {
		out.Next = cursorOf(key(&all[to-1]))
	}
	return out, nil
}

// limit is the entries wanted at most.
func (p PageInput) limit() int {
	if p.Limit <= 0 {
		return 100
	}
	return p.Limit
}
