// Package ui holds the parts that pages share: the frame with its navigation,
// messages, tags, legends and small tables. It paints nothing by itself; the
// style sheets in web/static do.
package ui

import (
	"strings"

	"cadencewright/web/view"
)

// place is an entry of the navigation.
type place struct{ Path, Name string }

// places are the entries of the navigation, in order.
func places(p view.Page) []place {
	week := "/"
	if p.ThisWeek != "" {
		week = "/weeks/" + p.ThisWeek
	}
	return []place{{week, "Week"}, {"/sources", "Sources"}, {"/telescopes", "Telescopes"}, {"/help", "Help"}}
}

// isHere says whether an entry leads to the part of the site that a path is in.
func isHere(entry place, path string) bool {
	if entry.Name == "Week" {
		return path == "/" || strings.HasPrefix(path, "/weeks/")
	}
	return path == entry.Path || strings.HasPrefix(path, entry.Path+"/")
}

func messageWord(k view.MessageKind) string {
	switch k {
	case view.Good:
		return "Done."
	case view.Caution:
		return "Mind:"
	case view.Wrong:
		return "Problem:"
	}
	return "Note:"
}
