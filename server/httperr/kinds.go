package httperr

import (
	"context"
	"errors"
	"net/http"

	"cadencewright/scheduler"
)

// TypesPath is where the kinds of problem are described. A document's type is
// this path with the kind's name as its fragment.
const TypesPath = "/api/v1/problems"

// Kind is what the service answers to a kind of error.
type Kind struct {
	Name   string // for programs; stays as it is
	Status int
	Title  string // for people; the same for every problem of the kind
	Advice string // what whoever asked can do
}

// ErrNeedsVersion is a change without an If-Match header.
var ErrNeedsVersion = scheduler.Errorf(errNeedsVersion, "send the ETag of what you read in If-Match, so that nobody's change is overwritten unawares")

var errNeedsVersion = errors.New("no version")

// ErrMethod is a method that a path does not have.
var ErrMethod = errors.New("method not allowed")

// ErrMalformed is a request that cannot be read at all: broken JSON, a form
// that is none, a body that ended early.
var ErrMalformed = errors.New("malformed")

// ErrMediaType is a body in a form that is not understood.
var ErrMediaType = errors.New("media type")

// fault is the kind of every error that has none: a fault of the program.
var fault = Kind{"fault", http.StatusInternalServerError, "Something went wrong here",
	"The fault has been logged. Trying again may help; if not, tell whoever runs this service the request's id."}

// statusGone is the status, in the log alone, of a request whose client did
// not wait for the answer.
const statusGone = 499

// kinds is the one table from kinds of error to answers. The first that fits
// is taken.
var kinds = []struct {
	err error
	Kind
}{
	{scheduler.ErrInvalid, Kind{"invalid", http.StatusUnprocessableEntity, "What was sent breaks a rule", "Correct the fields that are named and send it again."}},
	{ErrMalformed, Kind{"malformed", http.StatusBadRequest, "What was sent cannot be read", "Send what the description of the operation asks for."}},
	{ErrMediaType, Kind{"media-type", http.StatusUnsupportedMediaType, "What was sent has a form that is not understood", "Send application/json."}},
	{scheduler.ErrNotFound, Kind{"not-found", http.StatusNotFound, "There is no such thing", "Check the address, or look the thing up in its list."}},
	{ErrMethod, Kind{"method", http.StatusMethodNotAllowed, "This cannot be done here", "The Allow header says what can."}},
	{scheduler.ErrConflict, Kind{"conflict", http.StatusConflict, "It does not fit what is already there", "Look at what is there now, and decide again."}},
	{scheduler.ErrStale, Kind{"stale", http.StatusPreconditionFailed, "It has been changed in the meantime", "Read it again, look at what has changed, and decide again."}},
	{errNeedsVersion, Kind{"no-version", http.StatusPreconditionRequired, "A change must say which version it is of", "Read the thing first and send its ETag in If-Match."}},
	{scheduler.ErrUnauthenticated, Kind{"not-signed-in", http.StatusUnauthorized, "Not signed in", "Sign in, or send a key as: Authorization: Bearer KEY."}},
	{scheduler.ErrForbidden, Kind{"not-allowed", http.StatusForbidden, "Not allowed", "Ask a coordinator."}},
	{scheduler.ErrTooLarge, Kind{"too-large", http.StatusRequestEntityTooLarge, "Too large", "Send less at once."}},
	{scheduler.ErrTooMany, Kind{"too-many", http.StatusTooManyRequests, "Too many requests", "Wait as long as Retry-After says."}},
	{scheduler.ErrUnavailable, Kind{"away", http.StatusServiceUnavailable, "Away for the moment", "Send it again after a moment. Nothing that was acknowledged is lost."}},
	{context.DeadlineExceeded, Kind{"too-slow", http.StatusServiceUnavailable, "It took too long", "Send it again after a moment, or ask for less at once."}},
	{context.Canceled, Kind{"gone", statusGone, "Nobody waits for the answer", "Send it again."}},
}

// Kinds lists every kind, for people and programs to look up.
func Kinds() []Kind {
	list := make([]Kind, 0, len(kinds)+1)
	for _, k := range kinds {
		if k.Status != statusGone { // nobody ever sees that one
			list = append(list, k.Kind)
		}
	}
	return append(list, fault)
}

// kindOf is the kind of an error. A request that was larger than allowed comes
// first: what was read of it is wrong in other ways too.
func kindOf(err error) Kind {
	var too *http.MaxBytesError
	if errors.As(err, &too) {
		err = scheduler.ErrTooLarge
	}
	for _, k := range kinds {
		if errors.Is(err, k.err) {
			return k.Kind
		}
	}
	return fault
}
