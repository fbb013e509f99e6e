package scheduler

import (
	"errors"
	"fmt"
	"io/fs"
	"strings"
	"testing"
)

// An error of a kind shows its message alone, and keeps kind and cause.
func TestErrorf(t *testing.T) {
	err := Errorf(ErrConflict, "block %s: %w", "B1", fs.ErrExist)
	if err.Error() != "block B1: file already exists" {
		t.Errorf("message %q", err)
	}
	if !errors.Is(err, ErrConflict) || !errors.Is(err, fs.ErrExist) || errors.Is(err, ErrStale) {
		t.Error("kind or cause is lost, or another is claimed")
	}
	if plain := Errorf(ErrNotFound, "no plan"); !errors.Is(plain, ErrNotFound) || plain.Error() != "no plan" {
		t.Errorf("an error without a cause: %v", plain)
	}
}

func TestKindOf(t *testing.T) {
	for _, k := range kinds {
		if got := KindOf(fmt.Errorf("saving: %w", Errorf(k, "x"))); !errors.Is(got, k) {
			t.Errorf("the kind of a wrapped %q is %v", k, got)
		}
		if !errors.Is(KindOf(k), k) {
			t.Errorf("the kind of %q itself is %v", k, KindOf(k))
		}
	}
	if KindOf(errors.New("x")) != nil || KindOf(nil) != nil {
		t.Error("an error of no kind has one")
	}
	if !errors.Is(KindOf(Problems{{"/a", "b"}}), ErrInvalid) {
		t.Error("problems are invalid input")
	}
}

func TestProblemsError(t *testing.T) {
	p := Problems{{"", "the file is empty"}, {"/a~1b/0", "x"}}
	if got := p.Error(); got != "/: the file is empty\n/a~1b/0: x" {
		t.Errorf("%q", got)
	}
	var r reporter
	if r.err() != nil {
		t.Error("no problems, but an error")
	}
	for i := range MaxProblems + 1 {
		r.add("/x", "problem %d", i)
	}
	lines := strings.Split(r.err().Error(), "\n")
	if len(lines) != MaxProblems+1 || lines[MaxProblems] != "/: and 1 more problem" {
		t.Errorf("%d lines, the last %q", len(lines), lines[len(lines)-1])
	}
}

// A rule between values is left out where one of them, or what holds it, is
// already wrong.
func TestReporterKnowsBadPlaces(t *testing.T) {
	var r reporter
	r.add("/blocks/1", "x")
	for at, want := range map[string]bool{"/blocks/1": true, "/blocks/1/start": true, "/blocks/1/lost/0/1": true,
		"/blocks/10": false, "/blocks": false, "": false} {
		if r.isBad(at) != want {
			t.Errorf("isBad(%q) is %v", at, !want)
		}
	}
}

func TestSuggest(t *testing.T) {
	names := []string{"azimuth_range_deg", "rate_az_deg_s", "mount", "SIM J0412+1833", "ab"}
	for got, want := range map[string]string{
		"azimut_range_deg": "azimuth_range_deg", "rate_ax_deg_s": "rate_az_deg_s", "SIM J0412-1833": "SIM J0412+1833",
		"azimuth_range":    "azimuth_range_deg",
		"wholly different": "", "aa": "ab", "zz": "", strings.Repeat("x", 5000): "",
	} {
		var r reporter
		s := r.suggest(got, names)
		if want != "" {
			want = `; did you mean "` + want + `"?`
		}
		if s != want {
			t.Errorf("for %.40q: %q, want %q", got, s, want)
		}
	}
}
