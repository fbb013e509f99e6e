package api

import (
	"context"
	"errors"
	"fmt"
	"io"
	"net/http"
	"reflect"
	"strings"

	"github.com/danielgtaylor/huma/v2"

	"cadencewright/scheduler"
	"cadencewright/server/httperr"
	"cadencewright/server/logline"
)

// The library makes its own errors (a body that does not fit its schema) by
// variables: they are set once for the whole program, before anything is served.
func init() {
	// A key in other letters is another key: of "state" and "State" in one
	// body nobody could say which was meant.
	huma.ValidateStrictCasing = true
	huma.NewError = func(status int, msg string, errs ...error) huma.StatusError {
		return libraryProblem(context.Background(), status, msg, errs)
	}
	huma.NewErrorWithContext = func(ctx huma.Context, status int, msg string, errs ...error) huma.StatusError {
		return libraryProblem(ctx.Context(), status, msg, errs)
	}
}

// statusProblem is a problem document as the library wants it.
type statusProblem struct {
	httperr.Problem
}

// Error is the detail.
func (p *statusProblem) Error() string { return p.Detail }

// GetStatus is the HTTP status.
func (p *statusProblem) GetStatus() int { return p.Status }

// ContentType is that of problem documents.
func (p *statusProblem) ContentType(string) string { return httperr.ContentType }

// fail turns an error of the layers below into a problem document with the
// headers that its status wants, and notes the error for the log.
func fail(ctx context.Context, err error) error {
	l := logline.From(ctx)
	l.Fail(err)
	p := &statusProblem{httperr.Of(err)}
	p.Instance = l.ID
	h := http.Header{}
	httperr.Headers(h, p.Status)
	return huma.ErrorWithHeaders(p, h)
}

// libraryProblem makes the library's own errors into our documents, with a
// pointer to each bad field. What is a fault tells the client nothing.
func libraryProblem(ctx context.Context, status int, msg string, errs []error) huma.StatusError {
	l := logline.From(ctx)
	l.Fail(errors.Join(append([]error{errors.New(msg)}, errs...)...))
	p := &statusProblem{httperr.Of(kindOfLibrary(status, msg, errs))}
	p.Instance = l.ID
	if p.Status >= http.StatusInternalServerError {
		return p
	}
	for _, err := range errs {
		var d huma.ErrorDetailer
		if errors.As(err, &d) {
			e := d.ErrorDetail()
			p.Errors = append(p.Errors, httperr.Field{Pointer: pointer(e.Location), Detail: e.Message})
		}
	}
	if len(p.Errors) == 1 {
		p.Detail = strings.TrimPrefix(p.Errors[0].Pointer+": "+p.Errors[0].Detail, ": ")
	}
	return p
}

// kindOfLibrary is our kind of an error that the library names by a status.
func kindOfLibrary(status int, msg string, errs []error) error {
	all := errors.Join(errs...)
	switch {
	case errors.As(all, new(*http.MaxBytesError)):
		return all
	case status == http.StatusRequestEntityTooLarge:
		return scheduler.Errorf(scheduler.ErrTooLarge, "%s", msg)
	case status == http.StatusUnprocessableEntity:
		return scheduler.Errorf(scheduler.ErrInvalid, "%d fields are wrong", len(errs))
	case status == http.StatusUnsupportedMediaType:
		return scheduler.Errorf(httperr.ErrMediaType, "send application/json")
	case errors.Is(all, io.ErrUnexpectedEOF), status == http.StatusRequestTimeout:
		return scheduler.Errorf(httperr.ErrMalformed, "the request ended early")
	case status >= 400 && status < 500:
		return scheduler.Errorf(httperr.ErrMalformed, "%s", msg)
	}
	return fmt.Errorf("%s: %w", msg, all)
}

// pointer turns the library's place of a body's field (body.state) into a JSON
// Pointer (/state), and that of a parameter (query.from) into its name.
func pointer(location string) string {
	where, rest, _ := strings.Cut(location, ".")
	switch where {
	case "path", "query", "header", "cookie":
		return rest
	case "body":
	default:
		rest = location
	}
	if rest == "" {
		return ""
	}
	return "/" + strings.NewReplacer(".", "/", "[", "/", "]", "").Replace(rest)
}

// schemaName names the schema of a type: parts of a run sheet have names of
// their own, since a sheet's scan is not a plan's scan.
func schemaName(t reflect.Type, hint string) string {
	name := huma.DefaultSchemaNamer(t, hint)
	for t.Kind() == reflect.Pointer || t.Kind() == reflect.Slice {
		t = t.Elem()
	}
	switch {
	case name == "StatusProblem":
		return "Problem"
	case strings.HasSuffix(t.PkgPath(), "/runsheet") && name != "Sheet":
		return "Sheet" + name
	}
	return name
}

// problems lists the kinds of problem, so that a document's type leads
// somewhere.
func (a *API) problems() {
	op := operation("service", http.MethodGet, "/problems", "list-problem-kinds", "The kinds of problem",
		"Every kind of problem document, with its status. A document's type is this address with the kind's name after #.")
	op.Security, op.Errors = []map[string][]string{}, []int{503}
	register(a, op, list[ProblemKind]{Items: problemKinds()[:1]}, func(context.Context, *struct{}) (*listOutput[ProblemKind], error) {
		return &listOutput[ProblemKind]{Body: list[ProblemKind]{Items: problemKinds()}}, nil
	})
}

// ProblemKind is a kind of problem document.
type ProblemKind struct {
	Name   string `json:"name" example:"stale"`
	Status int    `json:"status" example:"412"`
	Title  string `json:"title" example:"It has been changed in the meantime"`
	Advice string `json:"advice" doc:"what to do" example:"Read it again, look at what has changed, and decide again."`
}

func problemKinds() []ProblemKind {
	var out []ProblemKind
	for _, k := range httperr.Kinds() {
		out = append(out, ProblemKind(k))
	}
	return out
}
