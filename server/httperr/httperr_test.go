package httperr

import (
	"encoding/json"
	"errors"
	"fmt"
	"net/http"
	"net/http/httptest"
	"strings"
	"testing"

	"cadencewright/scheduler"
	"cadencewright/server/store"
)

func TestOf(t *testing.T) {
	for _, c := range []struct {
		err    error
		status int
		detail string
	}{
		{scheduler.Errorf(scheduler.ErrNotFound, "there is no telescope XYZ"), 404, "there is no telescope XYZ"},
		{fmt.Errorf("wrapped: %w", scheduler.Errorf(scheduler.ErrConflict, "taken")), 409, "wrapped: taken"},
		{&store.StaleError{What: "plan 3", Current: 7}, 412, "plan 3 has been changed"},
		{ErrNeedsVersion, 428, "If-Match"},
		{errors.New("pq: password of user x is hunter2"), 500, "logged"},
		{&http.MaxBytesError{Limit: 5}, 413, "larger"},
		{scheduler.Problems{{Pointer: "/sources/0/name", Message: "missing"}}, 422, "see errors"},
	} {
		p := Of(c.err)
		if p.Status != c.status || !strings.Contains(p.Detail, c.detail) {
			t.Errorf("%v: %d %q, want %d %q", c.err, p.Status, p.Detail, c.status, c.detail)
		}
		if strings.Contains(p.Detail, "hunter2") {
			t.Error("internals leak")
		}
	}
	if p := Of(&store.StaleError{What: "plan 3", Current: 7}); p.Current != 7 {
		t.Errorf("current version %d, want 7", p.Current)
	}
}

// Every kind of error that the layers below know has a status.
func TestEveryKindHasAStatus(t *testing.T) {
	for _, k := range []error{scheduler.ErrInvalid, scheduler.ErrNotFound, scheduler.ErrConflict, scheduler.ErrStale, scheduler.ErrUnauthenticated,
		scheduler.ErrForbidden, scheduler.ErrTooLarge, scheduler.ErrTooMany, scheduler.ErrUnavailable} {
		if p := Of(k); p.Status == 500 {
			t.Errorf("%v has no status", k)
		}
	}
}

func TestWrite(t *testing.T) {
	w := httptest.NewRecorder()
	w.Header().Set("X-Request-Id", "abc")
	Write(w, httptest.NewRequest("GET", "/", nil), scheduler.Problems{{Pointer: "/a", Message: "bad"}})
	var p Problem
	if err := json.Unmarshal(w.Body.Bytes(), &p); err != nil {
		t.Fatal(err)
	}
	if w.Header().Get("Content-Type") != "application/problem+json" || p.Instance != "abc" || len(p.Errors) != 1 || p.Errors[0].Pointer != "/a" {
		t.Errorf("%v %+v", w.Header(), p)
	}
	w = httptest.NewRecorder()
	Write(w, httptest.NewRequest("GET", "/", nil), scheduler.ErrUnavailable)
	if w.Code != 503 || w.Header().Get("Retry-After") == "" {
		t.Errorf("%d %v", w.Code, w.Header())
	}
}
