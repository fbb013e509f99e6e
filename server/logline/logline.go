// Package logline is the one line that each request leaves in the log. The
// outermost handler puts an empty Line into the request's context; whoever
// learns something worth keeping on the way (who asks, which route, what went
// wrong) adds it; the outermost handler writes the line when the request is
// over.
package logline

import (
	"context"
	"log/slog"
	"sync"
)

// Line is the log line of one request. It may be filled in from several
// goroutines.
type Line struct {
	ID string // the request's, which its answer names too

	mu    sync.Mutex
	actor string
	attrs []slog.Attr
	err   error
}

type key struct{}

// With puts a line into a context.
func With(ctx context.Context, l *Line) context.Context {
	return context.WithValue(ctx, key{}, l)
}

// From is the line of a request's context. Outside of a request it is one that
// nobody will write.
func From(ctx context.Context) *Line {
	if l, ok := ctx.Value(key{}).(*Line); ok {
		return l
	}
	return &Line{}
}

// Set adds a value. Names are few and fixed (telescope, week, plan), so that a
// log can be searched by them; never a token or a password.
func (l *Line) Set(name string, value any) {
	l.mu.Lock()
	defer l.mu.Unlock()
	l.attrs = append(l.attrs, slog.Any(name, value))
}

// SetActor notes who asks.
func (l *Line) SetActor(name string) {
	l.mu.Lock()
	defer l.mu.Unlock()
	l.actor = name
}

// Fail notes why the request fails, with the causes that its answer does not
// tell. The first one stays: a later one is only the first in other words.
func (l *Line) Fail(err error) {
	l.mu.Lock()
	defer l.mu.Unlock()
	if l.err == nil {
		l.err = err
	}
}

// Err is why the request failed; nil if it did not.
func (l *Line) Err() error {
	l.mu.Lock()
	defer l.mu.Unlock()
	return l.err
}

// Attrs are the values to write: the request's id, who asked, what was added,
// and the error last.
func (l *Line) Attrs() []slog.Attr {
	l.mu.Lock()
	defer l.mu.Unlock()
	list := []slog.Attr{slog.String("request", l.ID)}
	if l.actor != "" {
		list = append(list, slog.String("actor", l.actor))
	}
	list = append(list, l.attrs...)
	if l.err != nil {
		list = append(list, slog.String("error", causes(l.err)))
	}
	return list
}

// causes is an error's text with the causes that the text leaves out: errors
// for people say one thing to the client and keep another for the log.
func causes(err error) string {
	text := err.Error()
	for _, c := range walk(err, nil) {
		if s := c.Error(); !contains(text, s) {
			text += "; caused by: " + s
		}
	}
	return text
}
