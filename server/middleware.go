package server

import (
	"context"
	"crypto/rand"
	"encoding/hex"
	"fmt"
	"log/slog"
	"net/http"
	"runtime/debug"
	"strings"
	"time"

	"github.com/go-chi/chi/v5"

	"cadencewright/scheduler"
	"cadencewright/server/logline"
)

// recorder notes the status and size of an answer.
type recorder struct {
	http.ResponseWriter
	status int
	bytes  int64
}

func (w *recorder) WriteHeader(status int) {
	if w.status == 0 && status >= 200 { // a 1xx is not the answer yet
		w.status = status
	}
	w.ResponseWriter.WriteHeader(status)
}

func (w *recorder) Write(b []byte) (int, error) {
	if w.status == 0 {
		w.status = http.StatusOK
	}
	n, err := w.ResponseWriter.Write(b)
	w.bytes += int64(n)
	return n, err
}

// Unwrap lets http.ResponseController reach the connection.
func (w *recorder) Unwrap() http.ResponseWriter { return w.ResponseWriter }

// logged gives the request its id, writes its line when it is over, and turns
// a panic into a 500: one fault must not take the service down.
func (s *Server) logged(next http.Handler) http.Handler {
	return http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		start := time.Now()
		l := &logline.Line{ID: requestID()}
		rec := &recorder{ResponseWriter: w}
		rec.Header().Set("X-Request-Id", l.ID)
		r = r.WithContext(logline.With(r.Context(), l))
		defer func() {
			p := recover()
			if p != nil && p != http.ErrAbortHandler {
				err := fmt.Errorf("panic: %v\n%s", p, debug.Stack())
				l.Fail(err)
				if rec.status == 0 {
					s.answerError(rec, r, err)
				} else { // half an answer is out: the client must not take it for a whole one
					p = http.ErrAbortHandler
				}
			}
			s.writeLine(r, rec, l, time.Since(start))
			if p == http.ErrAbortHandler {
				panic(p)
			}
		}()
		next.ServeHTTP(rec, r)
	})
}

func (s *Server) writeLine(r *http.Request, rec *recorder, l *logline.Line, took time.Duration) {
	pattern, status := chi.RouteContext(r.Context()).RoutePattern(), rec.status
	switch {
	case r.Context().Err() == context.Canceled && (status == 0 || status >= 500):
		status = 499 // nobody waited for the answer
	case status == 0:
		status = http.StatusOK // a handler that writes nothing
	}
	level := slog.LevelInfo
	switch {
	case status >= 500:
		level = slog.LevelError
	case pattern == "/livez" || pattern == "/readyz" || pattern == "/static/*":
		level = slog.LevelDebug
	}
	attrs := append([]slog.Attr{slog.String("method", r.Method), slog.String("route", pattern), slog.Int("status", status),
		slog.Int64("bytes", rec.bytes), slog.Duration("took", took.Round(10*time.Microsecond))}, l.Attrs()...)
	s.log.LogAttrs(r.Context(), level, "request", attrs...)
	if s.metrics != nil {
		s.metrics.request(r.Method, pattern, status, took)
	}
}

func requestID() string {
	var b [8]byte
	rand.Read(b[:])
	return hex.EncodeToString(b[:])
}

// policy is what a browser may load and do: scripts, styles and pictures come
// from here and nowhere else, and never from within a page.
const policy = "default-src 'self'; base-uri 'none'; form-action 'self'; frame-ancestors 'none'; object-src 'none'"

// secured sets what every answer says to a browser about safety.
func secured(next http.Handler) http.Handler {
	return http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		h := w.Header()
		h.Set("Content-Security-Policy", policy)
		h.Set("X-Content-Type-Options", "nosniff")
		h.Set("Referrer-Policy", "same-origin")
		h.Set("Cross-Origin-Opener-Policy", "same-origin")
		h.Set("Cross-Origin-Resource-Policy", "same-origin")
		h.Set("Vary", "Cookie, Authorization, Accept-Encoding")
		next.ServeHTTP(w, r)
	})
}

const (
	// maxBody bounds what a request may send, in bytes.
	maxBody = 2 << 20
	// workTimeout bounds how long a request may be worked on.
	workTimeout = 25 * time.Second
)

// bounded limits the size of what is sent and the time that an answer may take.
func bounded(next http.Handler) http.Handler {
	return http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		r.Body = http.MaxBytesReader(w, r.Body, maxBody)
		ctx, cancel := context.WithTimeout(r.Context(), workTimeout)
		defer cancel()
		next.ServeHTTP(w, r.WithContext(ctx))
	})
}

// sameOrigin refuses changes that another site's page asks for. Behind a proxy
// the address that people use may be another than the one a request names.
func (s *Server) sameOrigin() func(http.Handler) http.Handler {
	guard := http.NewCrossOriginProtection()
	if s.origin != "" {
		if err := guard.AddTrustedOrigin(s.origin); err != nil {
			s.log.Warn("the base URL is no origin", "base_url", s.origin, "error", err)
		}
	}
	guard.SetDenyHandler(s.answer(func(http.ResponseWriter, *http.Request) error {
		return scheduler.Errorf(scheduler.ErrForbidden, "this change was asked for by a page of another site")
	}))
	return guard.Handler
}

// plainPath has the router read a path with its escapes undone, so that a name
// is the same however a client escaped it. Only an escaped slash stays: it is
// part of a name, not of the route.
func plainPath(next http.Handler) http.Handler {
	return http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		if !strings.Contains(strings.ToLower(r.URL.RawPath), "%2f") {
			r.URL.RawPath = ""
		}
		next.ServeHTTP(w, r)
	})
}
