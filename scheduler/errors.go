package scheduler

import (
	"errors"
	"fmt"
)

// The kinds of failure that a caller may have to tell apart. Every layer below
// the HTTP service wraps one of them (see Errorf), and the service turns each
// kind into one status; errors of no kind are faults of the program.
var (
	// ErrInvalid is input that breaks a rule of the model. Problems is of
	// this kind.
	ErrInvalid = errors.New("invalid")
	// ErrNotFound is a thing that does not exist (or that the caller may not
	// know of).
	ErrNotFound = errors.New("not found")
	// ErrConflict is a change that does not fit what is already there: a name
	// taken, blocks that overlap, an issued plan that would change.
	ErrConflict = errors.New("conflict")
	// ErrStale is a change based on a version that is no longer the newest.
	ErrStale = errors.New("stale")
	// ErrUnauthenticated is a caller who has not shown who they are.
	ErrUnauthenticated = errors.New("not signed in")
	// ErrForbidden is a caller whose role does not allow it.
	ErrForbidden = errors.New("not allowed")
	// ErrTooLarge is input beyond a stated size.
	ErrTooLarge = errors.New("too large")
	// ErrTooMany is a caller who must slow down.
	ErrTooMany = errors.New("too many requests")
	// ErrUnavailable is a service that is away for now; trying again helps.
	ErrUnavailable = errors.New("unavailable")
)

// kinds in the order in which KindOf looks for them.
var kinds = []error{
	ErrInvalid, ErrNotFound, ErrConflict, ErrStale, ErrUnauthenticated,
	ErrForbidden, ErrTooLarge, ErrTooMany, ErrUnavailable,
}

// kindError is a message for people together with its kind and its cause.
type kindError struct {
	kind    error
	message string
	cause   error
}

// Error is the message alone: a kind is for programs.
func (e *kindError) Error() string { return e.message }

// Unwrap gives errors.Is and errors.As both the kind and the cause.
func (e *kindError) Unwrap() []error {
	if e.cause == nil {
		return []error{e.kind}
	}
	return []error{e.kind, e.cause}
}

// Errorf makes an error of the given kind. Its text is the message alone,
// without the kind's own name; %w keeps a cause as in fmt.Errorf.
func Errorf(kind error, format string, args ...any) error {
	err := fmt.Errorf(format, args...)
	return &kindError{kind: kind, message: err.Error(), cause: errors.Unwrap(err)}
}

// KindOf is the kind of err, one of the sentinels above, or nil where it has
// none.
func KindOf(err error) error {
	for _, k := range kinds {
		if errors.Is(err, k) {
			return k
		}
	}
	return nil
}
