package ui

import (
	"bytes"
	"context"
	"strings"
	"testing"

	"cadencewright/web/view"
)

func frame(t *testing.T, p view.Page) string {
	t.Helper()
	var buf bytes.Buffer
	if err := Frame(p, "Title").Render(context.Background(), &buf); err != nil {
		t.Fatal(err)
	}
	return buf.String()
}

func TestNavigationMarksThePlace(t *testing.T) {
	for path, want := range map[string]string{
		"/weeks/2027-W03": "Week", "/weeks/2027-W03/scans/7": "Week", "/": "Week", "/sources": "Sources", "/sources/SIM%20J0412+1833": "Sources",
		"/telescopes/ALD/nights/2027-01-18": "Telescopes", "/help": "Help", "/elsewhere": "", "/helpers": "",
	} {
		body := frame(t, view.Page{Path: path, Person: &view.Person{Name: "Imre Oduya", Role: "reader"}, ThisWeek: "2027-W03"})
		got := ""
		if _, rest, ok := strings.Cut(body, `aria-current="page">`); ok {
			got, _, _ = strings.Cut(rest, "<")
		}
		if got != want || strings.Count(body, "aria-current") > 1 {
			t.Errorf("at %s the place is %q, want %q", path, got, want)
		}
	}
}

func TestSignedOutHasNoNavigation(t *testing.T) {
	body := frame(t, view.Page{Path: "/sign-in"})
	for _, bad := range []string{"Sign out", "<nav"} {
		if strings.Contains(body, bad) {
			t.Errorf("before signing in the page has %q", bad)
		}
	}
	for _, want := range []string{`class="skip"`, `id="main"`, `lang="en-GB"`, "<title>Title · Cadencewright</title>"} {
		if !strings.Contains(body, want) {
			t.Errorf("the page lacks %s", want)
		}
	}
}

func TestWeekOfTheNavigation(t *testing.T) {
	for week, want := range map[string]string{"": "/", "2027-W03": "/weeks/2027-W03"} {
		if got := places(view.Page{ThisWeek: week})[0].Path; got != want {
			t.Errorf("in week %q it leads to %q, want %q", week, got, want)
		}
	}
}

// TestMessagesSayTheirTone in words, as colour alone does not.
func TestMessagesSayTheirTone(t *testing.T) {
	for kind, want := range map[view.MessageKind]string{view.Note: "Note:", view.Good: "Done.", view.Caution: "Mind:", view.Wrong: "Problem:"} {
		body := frame(t, view.Page{Messages: []view.Message{{Kind: kind, Text: "a < b"}}})
		if !strings.Contains(body, "<strong>"+want+"</strong>a &lt; b") {
			t.Errorf("message of tone %s does not begin with %q", kind, want)
		}
	}
	if strings.Contains(frame(t, view.Page{}), `role="status"`) {
		t.Error("a page without messages has a place for them")
	}
}
