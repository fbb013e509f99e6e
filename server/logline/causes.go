package logline

import "strings"

// maxCauses bounds how far an error's tree is followed.
const maxCauses = 20

// walk lists the errors that err wraps, depth first, at most maxCauses.
func walk(err error, list []error) []error {
	var inner []error
	switch e := err.(type) {
	case interface{ Unwrap() error }:
		if u := e.Unwrap(); u != nil {
			inner = []error{u}
		}
	case interface{ Unwrap() []error }:
		inner = e.Unwrap()
	}
	for _, u := range inner {
		if u == nil || len(list) >= maxCauses {
			continue
		}
		list = walk(u, append(list, u))
	}
	return list
}

// contains tells whether a text says a part already, whatever its capitals.
func contains(text, part string) bool {
	return strings.Contains(strings.ToLower(text), strings.ToLower(part))
}
