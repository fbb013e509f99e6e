package httperr

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"net/http"
	"net/http/httptest"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"cadencewright/scheduler"
	"cadencewright/server/store"
)

func TestOf(t *testing.T) {
	for _, c := range []struct {
		err    error
		status int
		kind   string
		detail string
	}{
		{scheduler.Errorf(scheduler.ErrInvalid, "minutes is -3"), 422, "invalid", "minutes is -3"},
		{scheduler.Errorf(scheduler.ErrNotFound, "there is no telescope XYZ"), 404, "not-found", "there is no telescope XYZ"},
		{fmt.Errorf("wrapped: %w", scheduler.Errorf(scheduler.ErrConflict, "taken")), 409, "conflict", "wrapped: taken"},
		{&store.StaleError{What: "plan 3", Current: 7}, 412, "stale", "plan 3 has been changed"},
		{ErrNeedsVersion, 428, "no-version", "If-Match"},
		{scheduler.Errorf(scheduler.ErrUnauthenticated, "this key is unknown"), 401, "not-signed-in", "this key is unknown"},
		{scheduler.Errorf(scheduler.ErrForbidden, "a reader may not plan"), 403, "not-allowed", "a reader may not plan"},
		{scheduler.Errorf(scheduler.ErrTooMany, "wait"), 429, "too-many", "wait"},
		{scheduler.Errorf(scheduler.ErrUnavailable, "the database is away"), 503, "away", "the database is away"},
		{scheduler.Errorf(ErrMethod, "PUT is not possible"), 405, "method", "PUT is not possible"},
		{scheduler.Errorf(ErrMalformed, "the form cannot be read"), 400, "malformed", "the form cannot be read"},
		{fmt.Errorf("query: %w", context.DeadlineExceeded), 503, "too-slow", "Send it again"},
		{fmt.Errorf("query: %w", context.Canceled), 499, "gone", "Send it again"},
		{errors.New("password of user x is hunter2"), 500, "fault", "logged"},
		{fmt.Errorf("read: %w", &http.MaxBytesError{Limit: 512}), 413, "too-large", "larger than the 512 bytes"},
		{scheduler.Problems{{Pointer: "/sources/0/name", Message: "missing"}}, 422, "invalid", "missing"},
		{scheduler.Problems{{Pointer: "/a", Message: "x"}, {Pointer: "/b", Message: "y"}}, 422, "invalid", "2 fields are wrong"},
	} {
		p := Of(c.err)
		if p.Status != c.status || !strings.Contains(p.Detail, c.detail) || p.Type != TypesPath+"#"+c.kind {
			t.Errorf("%v: %d %s %q, want %d %s %q", c.err, p.Status, p.Type, p.Detail, c.status, c.kind, c.detail)
		}
		if strings.Contains(p.Detail, "hunter2") || strings.Contains(p.Detail, "query:") {
			t.Errorf("internals leak: %q", p.Detail)
		}
		if p.Title == "" || p.Advice == "" {
			t.Errorf("%v: no title or advice", c.err)
		}
	}
}

func TestFields(t *testing.T) {
	for _, c := range []struct {
		name string
		err  error
		want []Field
	}{
		{"of a file", scheduler.Problems{{Pointer: "/a/0", Message: "x"}, {Pointer: "", Message: "y"}}, []Field{{"/a/0", "x"}, {"", "y"}}},
		{"of the store", &store.FieldError{Field: "cause", Message: "a lost scan needs a cause"}, nil}, // of no kind: a fault
		{"none", scheduler.ErrNotFound, nil},
	} {
		got := Of(c.err).Errors
		if len(got) != len(c.want) {
			t.Errorf("%s: %v, want %v", c.name, got, c.want)
			continue
		}
		for i := range got {
			if got[i] != c.want[i] {
				t.Errorf("%s: %v, want %v", c.name, got[i], c.want[i])
			}
		}
	}
	if p := Of(&store.StaleError{What: "plan 3", Current: 7}); p.Current != 7 {
		t.Errorf("current version %d, want 7", p.Current)
	}
	many := make(scheduler.Problems, maxFields+50)
	if p := Of(many); len(p.Errors) != maxFields || !strings.Contains(p.Detail, "150 fields are wrong; the first 100") {
		t.Errorf("%d fields and %q", len(p.Errors), p.Detail)
	}
}

// Every kind of error that the layers below know has a row of its own.
func TestEveryKindHasARow(t *testing.T) {
	for _, k := range []error{scheduler.ErrInvalid, scheduler.ErrNotFound, scheduler.ErrConflict, scheduler.ErrStale, scheduler.ErrUnauthenticated,
		scheduler.ErrForbidden, scheduler.ErrTooLarge, scheduler.ErrTooMany, scheduler.ErrUnavailable} {
		if p := Of(k); p.Status == 500 {
			t.Errorf("%v has no status", k)
		}
	}
	seen := map[string]bool{}
	for _, k := range Kinds() {
		if seen[k.Name] {
			t.Errorf("two kinds have the name %s", k.Name)
		}
		seen[k.Name] = true
		if k.Title == "" || k.Advice == "" || http.StatusText(k.Status) == "" {
			t.Errorf("%+v lacks something", k)
		}
	}
	if !seen["fault"] || seen["gone"] {
		t.Error("the list must hold faults, and not what nobody sees")
	}
}

func TestWrite(t *testing.T) {
	for _, c := range []struct {
		name   string
		method string
		err    error
		status int
		header map[string]string
	}{
		{"fields", "GET", scheduler.Problems{{Pointer: "/a", Message: "bad"}}, 422, map[string]string{"Cache-Control": "no-store", "ETag": ""}},
		{"away", "GET", scheduler.ErrUnavailable, 503, map[string]string{"Retry-After": RetryAfterS}},
		{"too many", "POST", scheduler.ErrTooMany, 429, map[string]string{"Retry-After": RetryAfterS}},
		{"not signed in", "GET", scheduler.ErrUnauthenticated, 401, map[string]string{"WWW-Authenticate": `Bearer realm="cadencewright"`}},
		{"head", "HEAD", scheduler.ErrNotFound, 404, nil},
	} {
		w := httptest.NewRecorder()
		w.Header().Set("X-Request-Id", "abc")
		w.Header().Set("ETag", `"stale"`) // what a good answer would have said
		Write(w, httptest.NewRequest(c.method, "/", nil), c.err)
		if w.Code != c.status || w.Header().Get("Content-Type") != ContentType {
			t.Errorf("%s: %d %v", c.name, w.Code, w.Header())
		}
		for k, v := range c.header {
			if w.Header().Get(k) != v {
				t.Errorf("%s: %s is %q, want %q", c.name, k, w.Header().Get(k), v)
			}
		}
		if c.method == "HEAD" {
			if w.Body.Len() != 0 {
				t.Errorf("%s: a body of %d bytes", c.name, w.Body.Len())
			}
			continue
		}
		var p Problem
		if err := json.Unmarshal(w.Body.Bytes(), &p); err != nil || p.Instance != "abc" || p.Status != c.status {
			t.Errorf("%s: %v, %+v", c.name, err, p)
		}
	}
}

// Whatever words a fault has, none of them reaches a client.
func TestFaultsTellNothing(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		words := rapid.StringMatching(`[a-z]{3,12} [0-9]{4,8}x`).Draw(t, "words")
		var err error = errors.New(words)
		for range rapid.IntRange(0, 3).Draw(t, "wraps") {
			err = fmt.Errorf("while %s: %w", words, err)
		}
		b, merr := json.Marshal(Of(err))
		if merr != nil || strings.Contains(string(b), words) {
			t.Fatalf("%v: %s", merr, b)
		}
	})
}
