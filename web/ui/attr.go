package ui

import "github.com/a-h/templ"

// current marks an entry of the navigation as the one that the reader is in.
func current(here bool) templ.Attributes {
	if !here {
		return nil
	}
	return templ.Attributes{"aria-current": "page"}
}
