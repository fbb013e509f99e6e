// Package page turns view models into pages: one page a file, each a function
// that takes one view model and writes whole HTML. Callers write into a buffer
// first, so that a failure never sends half a page.
package page

import (
	"context"
	"io"

	"github.com/a-h/templ"

	"cadencewright/web/view"
)

// render writes a component. Pages wait for nothing, so there is nothing to
// cancel.
func render(w io.Writer, c templ.Component) error { return c.Render(context.Background(), w) }

// SignIn writes the form for a name and a password.
func SignIn(w io.Writer, v view.SignIn) error { return render(w, signIn(v)) }

// SignInLink writes the landing page of a one-time link.
func SignInLink(w io.Writer, v view.SignInLink) error { return render(w, signInLink(v)) }

// Week writes the page of a week.
func Week(w io.Writer, v view.Week) error { return render(w, week(v)) }

// JobFragment writes the progress of a planning job alone, for the week page to
// take in while the job runs; nil: there is no job.
func JobFragment(w io.Writer, v *view.Job) error { return render(w, job(v)) }

// Scan writes the card of a scan.
func Scan(w io.Writer, v view.ScanCard) error { return render(w, scanCard(v)) }

// Sources writes the list of sources.
func Sources(w io.Writer, v view.Sources) error { return render(w, sources(v)) }

// Source writes the page of a source.
func Source(w io.Writer, v view.Source) error { return render(w, source(v)) }

// Telescopes writes the list of telescopes.
func Telescopes(w io.Writer, v view.Telescopes) error { return render(w, telescopes(v)) }

// Telescope writes the page of a telescope.
func Telescope(w io.Writer, v view.Telescope) error { return render(w, telescope(v)) }

// RunSheet writes a night's run sheet.
func RunSheet(w io.Writer, v view.RunSheet) error { return render(w, runSheet(v)) }

// Help writes the help page.
func Help(w io.Writer, v view.Help) error { return render(w, help(v)) }

// Error writes the page of something that went wrong.
func Error(w io.Writer, v view.Error) error { return render(w, errorPage(v)) }
