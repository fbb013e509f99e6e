// Package httperr turns errors into answers: each kind of error has one
// status, in one table; clients get a problem document (RFC 9457) or a page
// with words meant for them; what is meant for the log stays in the log.
package httperr

import (
	"encoding/json"
	"errors"
	"net/http"

	"cadencewright/scheduler"
	"cadencewright/server/store"
)

// Problem is an RFC 9457 problem document.
type Problem struct {
	Type     string  `json:"type"`
	Title    string  `json:"title"`
	Status   int     `json:"status"`
	Detail   string  `json:"detail"`
	Instance string  `json:"instance,omitempty"` // the request's id
	Errors   []Field `json:"errors,omitempty"`
	Current  int64   `json:"current_version,omitempty"` // of a thing that was changed meanwhile
}

// Field is one bad field.
type Field struct {
	Pointer string `json:"pointer"` // JSON Pointer into what was sent
	Detail  string `json:"detail"`
}

// kind is what the service answers to a kind of error.
type kind struct {
	err    error
	status int
	title  string
}

// kinds is the one table from kinds of error to answers.
var kinds = []kind{
	{scheduler.ErrInvalid, http.StatusUnprocessableEntity, "What was sent breaks a rule"},
	{scheduler.ErrNotFound, http.StatusNotFound, "There is no such thing"},
	{scheduler.ErrConflict, http.StatusConflict, "It does not fit what is already there"},
	{scheduler.ErrStale, http.StatusPreconditionFailed, "It has been changed in the meantime"},
	{ErrNeedsVersion, http.StatusPreconditionRequired, "A change must say which version it is of"},
	{scheduler.ErrUnauthenticated, http.StatusUnauthorized, "Not signed in"},
	{scheduler.ErrForbidden, http.StatusForbidden, "Not allowed"},
	{scheduler.ErrTooLarge, http.StatusRequestEntityTooLarge, "Too large"},
	{scheduler.ErrTooMany, http.StatusTooManyRequests, "Too many requests"},
	{scheduler.ErrUnavailable, http.StatusServiceUnavailable, "Away for the moment"},
}

// ErrNeedsVersion is a change without an If-Match header.
var ErrNeedsVersion = errors.New("send the ETag of what you read in If-Match")

// RetryAfterS is what a 503 and a 429 ask a client to wait, in seconds.
const RetryAfterS = "5"

// Of is the problem that an error is to a client. An error of no kind is a
// fault of the program: the client learns only that there was one.
func Of(err error) Problem {
	p := Problem{Type: "about:blank", Title: "Something went wrong here", Status: http.StatusInternalServerError,
		Detail: "The fault has been logged. Trying again may help; if not, tell whoever runs this service the request's id."}
	for _, k := range kinds {
		if errors.Is(err, k.err) {
			p.Title, p.Status, p.Detail = k.title, k.status, err.Error()
			break
		}
	}
	var too *http.MaxBytesError
	if errors.As(err, &too) {
		p.Title, p.Status, p.Detail = "Too large", http.StatusRequestEntityTooLarge, "the request is larger than allowed"
	}
	p.fields(err)
	return p
}

// fields adds what is known of single fields.
func (p *Problem) fields(err error) {
	var problems scheduler.Problems
	if errors.As(err, &problems) {
		p.Detail = "see errors"
		for _, x := range problems {
			p.Errors = append(p.Errors, Field{x.Pointer, x.Message})
		}
	}
	var field *store.FieldError
	if errors.As(err, &field) {
		p.Errors = append(p.Errors, Field{"/" + field.Field, field.Message})
	}
	var stale *store.StaleError
	if errors.As(err, &stale) {
		p.Current = stale.Current
	}
}

// Write answers with the problem document of an error.
func Write(w http.ResponseWriter, r *http.Request, err error) {
	p := Of(err)
	p.Instance = w.Header().Get("X-Request-Id")
	Headers(w, p.Status)
	w.Header().Set("Content-Type", "application/problem+json")
	w.Header().Set("Cache-Control", "no-store")
	w.WriteHeader(p.Status)
	if r.Method != http.MethodHead {
		_ = json.NewEncoder(w).Encode(p) // nobody is left to tell
	}
}

// Headers sets what a status wants besides its body.
func Headers(w http.ResponseWriter, status int) {
	switch status {
	case http.StatusUnauthorized:
		w.Header().Set("WWW-Authenticate", `Bearer realm="cadencewright"`)
	case http.StatusServiceUnavailable, http.StatusTooManyRequests:
		w.Header().Set("Retry-After", RetryAfterS)
	}
}
