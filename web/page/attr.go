package page

import (
	"github.com/a-h/templ"

	"cadencewright/web/view"
)

// mainIf makes a button the main one of its group.
func mainIf(yes bool) templ.Attributes {
	if !yes {
		return nil
	}
	return templ.Attributes{"class": "main"}
}

// started says when a job began.
func started(j *view.Job) string {
	if j.Started.IsZero() {
		return ""
	}
	return " at " + view.Clock(j.Started) + " UTC"
}

// chosen marks an option of a list.
func chosen(yes bool) templ.Attributes {
	if !yes {
		return nil
	}
	return templ.Attributes{"selected": true}
}
