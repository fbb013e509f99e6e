package scheduler

import (
	"fmt"
	"strings"
)

// Problem is one thing wrong with a file or a value.
type Problem struct {
	// Pointer is the place as a JSON Pointer (RFC 6901); "" is the whole
	// document.
	Pointer string
	// Message names the field, the value and what is allowed.
	Message string
}

// Problems is everything wrong with a file, in the order it was found; at most
// MaxProblems and one line that counts the rest. It is an error of kind
// ErrInvalid.
type Problems []Problem

// Error lists all problems, one a line, each as "pointer: message"; the whole
// document is shown as "/".
func (p Problems) Error() string {
	var b strings.Builder
	for i, x := range p {
		if i > 0 {
			b.WriteByte('\n')
		}
		at := x.Pointer
		if at == "" {
			at = "/"
		}
		fmt.Fprintf(&b, "%s: %s", at, x.Message)
	}
	return b.String()
}

// Is makes errors.Is(err, ErrInvalid) hold.
func (p Problems) Is(target error) bool { return target == ErrInvalid }

// pointerEscaper writes a key as a JSON Pointer token.
var pointerEscaper = strings.NewReplacer("~", "~0", "/", "~1")

// reporter gathers problems. It stops formatting after MaxProblems and only
// counts, so that a file with a million faults costs no more than a good one.
type reporter struct {
	found Problems
	more  int
	bad   map[string]bool // pointers that have a problem
}

// maxBadPointers bounds the memory that remembering bad places may take.
const maxBadPointers = 20000

// add notes a problem at a place.
func (r *reporter) add(pointer, format string, args ...any) {
	if len(r.bad) < maxBadPointers {
		if r.bad == nil {
			r.bad = map[string]bool{}
		}
		r.bad[pointer] = true
	}
	if len(r.found) >= MaxProblems {
		r.more++
		return
	}
	r.found = append(r.found, Problem{pointer, fmt.Sprintf(format, args...)})
}

// full reports whether a further problem would only be counted.
func (r *reporter) full() bool { return len(r.found) >= MaxProblems && len(r.bad) >= maxBadPointers }

// count is how many problems there are so far.
func (r *reporter) count() int { return len(r.found) + r.more }

// isBad reports whether the place, or anything that holds it, already has a
// problem: rules between values are not checked on values that are wrong in
// themselves.
func (r *reporter) isBad(pointer string) bool {
	if len(r.bad) == 0 {
		return false
	}
	for {
		if r.bad[pointer] {
			return true
		}
		i := strings.LastIndexByte(pointer, '/')
		if i < 0 {
			return false
		}
		pointer = pointer[:i]
	}
}

// err is the finished list, or nil if there is nothing wrong.
func (r *reporter) err() error {
	if len(r.found) == 0 {
		return nil
	}
	list := r.found
	if r.more > 0 {
		noun := "problems"
		if r.more == 1 {
			noun = "problem"
		}
		list = append(list, Problem{"", fmt.Sprintf("and %d more %s", r.more, noun)})
	}
	return list
}
