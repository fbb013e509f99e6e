package main

import (
	"fmt"
	"strings"

	"cadencewright/scheduler"
)

// pickSource is the source with the given name; a name that is none is met
// with the nearest one.
func pickSource(c *scheduler.Campaign, name string) (*scheduler.Source, error) {
	if s := c.SourceByName(name); s != nil {
		return s, nil
	}
	// Only now, when the name is wrong, are the others needed.
	names := make([]string, len(c.Sources))
	for i := range c.Sources {
		names[i] = c.Sources[i].Name
	}
	return nil, notThere("source", name, names)
}

// pickTelescopes are the telescopes with the given codes, separated by
// commas; all of them for an empty list.
func pickTelescopes(c *scheduler.Campaign, codes string) ([]*scheduler.Telescope, error) {
	var list []*scheduler.Telescope
	known := make([]string, len(c.Telescopes))
	for i := range c.Telescopes {
		known[i] = c.Telescopes[i].Code
		if codes == "" {
			list = append(list, &c.Telescopes[i])
		}
	}
	if codes == "" {
		return list, nil
	}
	// In the order asked for, which is the order of the answer.
	for _, code := range strings.Split(codes, ",") {
		t := c.TelescopeByCode(strings.TrimSpace(code))
		if t == nil {
			return nil, notThere("telescope", code, known)
		}
		list = append(list, t)
	}
	return list, nil
}

// notThere says what the campaign has instead.
func notThere(kind, name string, known []string) error {
	// More names than that are no help on a terminal; the nearest one is.
	const most = 12
	have := "it has none"
	if n := len(known); n > 0 {
		best := known[0]
		for _, k := range known {
			if editDistance(strings.ToLower(name), strings.ToLower(k)) < editDistance(strings.ToLower(name), strings.ToLower(best)) {
				best = k
			}
		}
		have = "it has " + strings.Join(known, ", ")
		if n > most {
			have = fmt.Sprintf("the nearest of its %d is %s", n, best)
		}
	}
	return inputError{fmt.Errorf("the campaign has no %s %q; %s", kind, name, have)}
}
