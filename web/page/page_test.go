package page

import (
	"bytes"
	"errors"
	"io"
	"strings"
	"testing"
	"time"

	"cadencewright/web/view"
)

// broken is a reader that has gone.
type broken struct{}

var errGone = errors.New("gone")

func (broken) Write([]byte) (int, error) { return 0, errGone }

// pages is every page with the least that it may be given.
var pages = map[string]func(io.Writer) error{
	"sign-in":      func(w io.Writer) error { return SignIn(w, view.SignIn{}) },
	"sign-in link": func(w io.Writer) error { return SignInLink(w, view.SignInLink{}) },
	"week":         func(w io.Writer) error { return Week(w, view.Week{}) },
	"week of a campaign": func(w io.Writer) error {
		return Week(w, view.Week{Page: view.Page{Campaign: "c"}, Plan: &view.Plan{}, Blocks: []view.BlockRow{{}}, Needs: []view.Need{{}}})
	},
	"scan":       func(w io.Writer) error { return Scan(w, view.ScanCard{}) },
	"sources":    func(w io.Writer) error { return Sources(w, view.Sources{}) },
	"source":     func(w io.Writer) error { return Source(w, view.Source{Orbit: &view.Orbit{}, Sky: []view.SkyPanel{{}}}) },
	"telescopes": func(w io.Writer) error { return Telescopes(w, view.Telescopes{}) },
	"telescope":  func(w io.Writer) error { return Telescope(w, view.Telescope{}) },
	"run sheet": func(w io.Writer) error {
		return RunSheet(w, view.RunSheet{Blocks: []view.SheetBlock{{Scans: []view.SheetScan{{}}}}})
	},
	"help":  func(w io.Writer) error { return Help(w, view.Help{}) },
	"error": func(w io.Writer) error { return Error(w, view.Error{}) },
}

// TestBarePages renders every page from nothing: whole, and without a figure
// that is no number.
func TestBarePages(t *testing.T) {
	for name, render := range pages {
		var buf bytes.Buffer
		if err := render(&buf); err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		body := buf.String()
		if !strings.HasPrefix(body, "<!doctype html>") && !strings.HasPrefix(body, "<!DOCTYPE html>") || !strings.HasSuffix(body, "</html>") {
			t.Errorf("%s is no whole page", name)
		}
		for _, bad := range []string{"NaN", "Inf", "%!", "0001"} {
			if strings.Contains(body, bad) {
				at := strings.Index(body, bad)
				t.Errorf("%s says %s: …%s…", name, bad, body[max(at-60, 0):min(at+40, len(body))])
			}
		}
	}
}

// TestFailedWriteIsTold: an error of the line comes back.
func TestFailedWriteIsTold(t *testing.T) {
	for name, render := range pages {
		if err := render(broken{}); !errors.Is(err, errGone) {
			t.Errorf("%s: error %v, want that of the line", name, err)
		}
	}
}

func TestJobFragment(t *testing.T) {
	fragment := func(j *view.Job) string {
		var buf bytes.Buffer
		if err := JobFragment(&buf, j); err != nil {
			t.Fatal(err)
		}
		return strings.TrimSpace(buf.String())
	}
	if got := fragment(nil); got != `<div id="job"></div>` {
		t.Errorf("no job: %q", got)
	}
	running := fragment(&view.Job{ID: 7, Week: "2027-W03", State: view.JobRunning, MayStop: true, Started: time.Unix(0, 0)})
	for _, want := range []string{`hx-get="/weeks/2027-W03/job"`, `hx-trigger="every 1s"`, `hx-status:5xx="swap:none"`, `action="/jobs/7/stop"`, "<progress"} {
		if !strings.Contains(running, want) {
			t.Errorf("a running job lacks %s", want)
		}
	}
	for _, state := range []view.JobState{view.JobDone, view.JobStopped, view.JobFailed} {
		got := fragment(&view.Job{ID: 7, State: state, MayStop: true})
		if strings.Contains(got, "hx-get") || strings.Contains(got, "stop\"") || strings.Contains(got, "<progress") {
			t.Errorf("a job that is %s goes on asking, or offers to stop it: %s", state, got)
		}
	}
	if got := fragment(&view.Job{State: view.JobRunning, MayStop: true, Stopping: true}); strings.Contains(got, "<button") {
		t.Error("a job that is stopping can be stopped again")
	}
}
