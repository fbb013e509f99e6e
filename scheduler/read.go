package scheduler

import (
	"bytes"
	"fmt"
	"strconv"
	"strings"

	"cadencewright/scheduler/internal/strictjson"
)

// ReadCampaign reads a campaign file: strictly, and with every default filled
// in. Elements keep the order of the file; see Campaign.Canonical. The error is
// of type Problems and holds all that is wrong: text that is no JSON, unknown
// keys and keys that stand twice, missing and foreign values, values out of
// range, NaN and Inf, names used twice, references to nothing, blocks that
// overlap, and whatever exceeds the limits of this package.
func ReadCampaign(data []byte) (*Campaign, error) {
	c := new(Campaign)
	r, err := readFile(data, &campaignFile, c)
	if err != nil {
		return nil, err
	}
	checkTogether(&r.checker, c)
	if err := r.named(c).err(); err != nil {
		return nil, err
	}
	return c, nil
}

// Validate applies to a campaign made in memory every rule that ReadCampaign
// applies to a file. The error is of type Problems, its pointers those of the
// file that WriteCampaign would write if it kept the order of the lists.
func (c *Campaign) Validate() error {
	var k checker
	campaignFile.check(&k, c)
	checkTogether(&k, c)
	return k.named(c).err()
}

// ReadPlan reads a plan file strictly. It checks the form of the file; whether
// the plan fits a campaign is for a re-check to say. The error is of type
// Problems.
func ReadPlan(data []byte) (*Plan, error) {
	p := new(Plan)
	r, err := readFile(data, &planFile, p)
	if err != nil {
		return nil, err
	}
	checkPlan(&r.checker, p)
	if err := r.err(); err != nil {
		return nil, err
	}
	return p, nil
}

// readFile reads one document into obj. The error is set where nothing else
// can be said about the document; problems of its values are in the reader.
func readFile(data []byte, t *table, obj any) (*fileReader, error) {
	if len(data) > MaxFileBytes {
		return nil, Problems{{"", fmt.Sprintf("the file is %.1f MiB; at most %d MiB are allowed", float64(len(data))/(1<<20),
			MaxFileBytes>>20)}}
	}
	data = bytes.TrimPrefix(data, []byte("\xef\xbb\xbf")) // a byte-order mark some editors write
	if len(bytes.TrimSpace(data)) == 0 {
		return nil, Problems{{"", "the file is empty"}}
	}
	r := &fileReader{lex: strictjson.New(data, maxDepth)}
	t.read(r, obj)
	r.lex.End()
	if r.wrongFormat != nil {
		return nil, Problems{*r.wrongFormat}
	}
	if err := r.lex.Err(); err != nil {
		// What stands behind the fault could not be read, so rules that look
		// at the whole are left out.
		r.found = append(Problems{{r.brokenAt, err.Error()}}, r.found...)
		return nil, r.err()
	}
	return r, nil
}

// named puts the name of the thing before every message about one, so that a
// person need not count list items.
func (c *checker) named(campaign *Campaign) *checker {
	for i, p := range c.found {
		if n := thingAt(campaign, p.Pointer); n != "" {
			c.found[i].Message = n + ": " + p.Message
		}
	}
	return c
}

// thingAt names what a pointer leads into, or "".
func thingAt(c *Campaign, pointer string) string {
	parts := strings.Split(pointer, "/")
	if len(parts) < 3 {
		return ""
	}
	i, err := strconv.Atoi(parts[2])
	if err != nil || i < 0 {
		return ""
	}
	pick := func(n int, name func() string, before string) string {
		if i >= n || name() == "" {
			return ""
		}
		return before + brief(name())
	}
	switch parts[1] {
	case "telescopes":
		t := pick(len(c.Telescopes), func() string { return c.Telescopes[i].Code }, "telescope ")
		if len(parts) > 4 && parts[3] == "receivers" && t != "" {
			j, err := strconv.Atoi(parts[4])
			if err == nil && j >= 0 && j < len(c.Telescopes[i].Receivers) && c.Telescopes[i].Receivers[j].Code != "" {
				return t + ", receiver " + brief(c.Telescopes[i].Receivers[j].Code)
			}
		}
		return t
	case "sources":
		return pick(len(c.Sources), func() string { return c.Sources[i].Name }, "")
	case "cadence_targets":
		return pick(len(c.CadenceTargets), func() string { return c.CadenceTargets[i].ID }, "goal ")
	case "phase_goals":
		return pick(len(c.PhaseGoals), func() string { return c.PhaseGoals[i].ID }, "goal ")
	case "overlap_goals":
		return pick(len(c.OverlapGoals), func() string { return c.OverlapGoals[i].ID }, "goal ")
	case "band_pair_goals":
		return pick(len(c.BandPairGoals), func() string { return c.BandPairGoals[i].ID }, "goal ")
	case "blocks":
		return pick(len(c.Blocks), func() string { return c.Blocks[i].ID }, "block ")
	}
	return ""
}
