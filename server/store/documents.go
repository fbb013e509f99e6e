package store

import "cadencewright/scheduler"

// The parts of a plan that the database keeps as JSON, with names of their own:
// what is stored must not change when a field of the program does.

type earningDoc struct {
	Goal  string  `json:"goal"`
	Unit  string  `json:"unit"`
	Value float64 `json:"value"`
}

type unmetDoc struct {
	Goal    string      `json:"goal"`
	Unit    string      `json:"unit"`
	Weight  float64     `json:"weight"`
	Reasons []reasonDoc `json:"reasons,omitempty"`
}

type reasonDoc struct {
	Code  scheduler.ReasonCode `json:"code"`
	Text  string               `json:"text"`
	Count int                  `json:"count,omitempty"`
}

func earningDocs(list []scheduler.Earning) []earningDoc {
	docs := make([]earningDoc, len(list))
	for i, e := range list {
		docs[i] = earningDoc(e)
	}
	return docs
}

func earningsOf(docs []earningDoc) []scheduler.Earning {
	var list []scheduler.Earning
	for _, d := range docs {
		list = append(list, scheduler.Earning(d))
	}
	return list
}

func unmetDocs(list []scheduler.Unmet) []unmetDoc {
	docs := make([]unmetDoc, len(list))
	for i, u := range list {
		docs[i] = unmetDoc{Goal: u.Goal, Unit: u.Unit, Weight: u.Weight}
		for _, r := range u.Reasons {
			docs[i].Reasons = append(docs[i].Reasons, reasonDoc(r))
		}
	}
	return docs
}

func unmetOf(docs []unmetDoc) []scheduler.Unmet {
	var list []scheduler.Unmet
	for _, d := range docs {
		u := scheduler.Unmet{Goal: d.Goal, Unit: d.Unit, Weight: d.Weight}
		for _, r := range d.Reasons {
			u.Reasons = append(u.Reasons, scheduler.Reason(r))
		}
		list = append(list, u)
	}
	return list
}
