// Package httperr turns errors into answers: each kind of error has one
// status, in one table; clients get a problem document (RFC 9457), or what a
// page needs to say the same, with words meant for them; what is meant for the
// log stays in the log.
package httperr

import (
	"encoding/json"
	"errors"
	"fmt"
	"net/http"

	"cadencewright/scheduler"
	"cadencewright/server/store"
)

// ContentType is that of problem documents.
const ContentType = "application/problem+json"

// Problem is a problem document of RFC 9457. Beyond the members of the RFC it
// names the request, so that a person can point at a line of the log, and the
// fields that are wrong.
type Problem struct {
	Type     string  `json:"type" format:"uri-reference" doc:"names the kind of problem, for programs" example:"/api/v1/problems#invalid"`
	Title    string  `json:"title" doc:"the kind of problem, for people" example:"What was sent breaks a rule"`
	Status   int     `json:"status" doc:"the HTTP status" example:"422"`
	Detail   string  `json:"detail,omitempty" doc:"this problem, for people" example:"cause \"storm\": must be one of wind, snow, fault"`
	Instance string  `json:"request,omitempty" doc:"the request's id: tell it to whoever runs the service" example:"4b1c0ffee9d2a7e8"`
	Errors   []Field `json:"errors,omitempty" doc:"the fields that are wrong"`
	Current  int64   `json:"current_version,omitempty" doc:"version of a thing that was changed in the meantime" example:"3"`

	Advice string `json:"-"` // what to do, for pages
}

// Field is one bad field.
type Field struct {
	Pointer string `json:"pointer" doc:"JSON Pointer into the body that was sent, or the name of a parameter" example:"/cause"`
	Detail  string `json:"detail" doc:"what is wrong with it and what is allowed" example:"must be one of wind, snow, fault"`
}

// maxFields bounds how many bad fields one document names: a file of a hundred
// thousand mistakes is answered in short.
const maxFields = 100

// Of is the problem that an error is to a client. An error of no kind is a
// fault of the program: the client learns only that there was one.
func Of(err error) Problem {
	k := kindOf(err)
	p := Problem{Type: TypesPath + "#" + k.Name, Title: k.Title, Status: k.Status, Advice: k.Advice, Detail: err.Error()}
	switch {
	case k.Name == fault.Name:
		p.Detail = k.Advice
	case k.Status == http.StatusRequestEntityTooLarge:
		var too *http.MaxBytesError
		if errors.As(err, &too) {
			p.Detail = fmt.Sprintf("the request is larger than the %d bytes that are allowed here", too.Limit)
		}
	case errors.Is(err, http.ErrHandlerTimeout), k.Name == "too-slow", k.Name == "gone":
		p.Detail = k.Advice // the library's own words say nothing to a client
	}
	p.fields(err)
	return p
}

// fields adds what is known of single fields.
func (p *Problem) fields(err error) {
	var problems scheduler.Problems
	if errors.As(err, &problems) {
		p.Detail = fmt.Sprintf("%d fields are wrong", len(problems))
		if len(problems) == 1 {
			p.Detail = problems[0].Message
		}
		for i, x := range problems {
			if i == maxFields {
				p.Detail += fmt.Sprintf("; the first %d are named", maxFields)
				break
			}
			p.Errors = append(p.Errors, Field{x.Pointer, x.Message})
		}
	}
	var field *store.FieldError
	if errors.As(err, &field) && p.Status != http.StatusInternalServerError {
		p.Errors = append(p.Errors, Field{pointer(field.Field), field.Message})
	}
	var stale *store.StaleError
	if errors.As(err, &stale) {
		p.Current = stale.Current
	}
}

// pointer is the JSON Pointer of a body's field; a header stays a name.
func pointer(field string) string {
	if field == "" || field[0] == '/' || field == "Idempotency-Key" || field == "If-Match" {
		return field
	}
	return "/" + field
}

// Write answers with the problem document of an error.
func Write(w http.ResponseWriter, r *http.Request, err error) {
	p := Of(err)
	p.Instance = w.Header().Get("X-Request-Id")
	Headers(w.Header(), p.Status)
	w.Header().Set("Content-Type", ContentType)
	w.WriteHeader(p.Status)
	if r.Method != http.MethodHead {
		_ = json.NewEncoder(w).Encode(p) // a failure here is the client having gone
	}
}

// RetryAfterS is what a 503 and a 429 ask a client to wait, in seconds.
const RetryAfterS = "5"

// Headers sets what a status wants besides its body. Problems are never kept:
// the next answer may be better. What a good answer would have carried goes.
func Headers(h http.Header, status int) {
	for _, name := range []string{"ETag", "Content-Disposition", "Content-Length", "Last-Modified"} {
		h.Del(name)
	}
	h.Set("Cache-Control", "no-store")
	switch status {
	case http.StatusUnauthorized:
		h.Set("WWW-Authenticate", `Bearer realm="cadencewright"`)
	case http.StatusServiceUnavailable, http.StatusTooManyRequests:
		h.Set("Retry-After", RetryAfterS)
	}
}
