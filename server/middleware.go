package server

import (
	"context"
	"crypto/rand"
	"encoding/hex"
	"fmt"
	"log/slog"
	"net/http"
	"net/url"
	"runtime/debug"
	"strings"
	"time"

	"cadencewright/server/api"
	"cadencewright/server/httperr"
)

// logLine is the one line that a request leaves in the log, filled in as the
// request goes.
type logLine struct {
	id, pattern, actor string
	err                error
}

type lineKey struct{}

// line is the request's log line.
func line(r *http.Request) *logLine {
	if l, ok := r.Context().Value(lineKey{}).(*logLine); ok {
		return l
	}
	return &logLine{}
}

// recorder notes the status and size of an answer.
type recorder struct {
	http.ResponseWriter
	status int
	bytes  int64
}

func (w *recorder) WriteHeader(status int) {
	if w.status == 0 {
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
		l := &logLine{id: requestID()}
		rec := &recorder{ResponseWriter: w}
		rec.Header().Set("X-Request-Id", l.id)
		r = r.WithContext(context.WithValue(r.Context(), lineKey{}, l))
		defer func() {
			if p := recover(); p != nil {
				if p == http.ErrAbortHandler {
					panic(p)
				}
				l.err = fmt.Errorf("panic: %v\n%s", p, debug.Stack())
				if rec.status == 0 {
					s.answerError(rec, r, l.err)
				}
			}
			s.writeLine(r, rec, l, time.Since(start))
		}()
		next.ServeHTTP(rec, r)
	})
}

func (s *Server) writeLine(r *http.Request, rec *recorder, l *logLine, took time.Duration) {
	level := slog.LevelInfo
	switch {
	case rec.status >= 500:
		level = slog.LevelError
	case l.pattern == "/livez" || l.pattern == "/readyz" || l.pattern == "/static/*":
		level = slog.LevelDebug
	}
	attrs := []slog.Attr{slog.String("method", r.Method), slog.String("route", l.pattern), slog.Int("status", rec.status),
		slog.Int64("bytes", rec.bytes), slog.Duration("took", took.Round(10*time.Microsecond)), slog.String("id", l.id)}
	if l.actor != "" {
		attrs = append(attrs, slog.String("actor", l.actor))
	}
	if l.err != nil {
		attrs = append(attrs, slog.Any("error", l.err))
	}
	s.log.LogAttrs(r.Context(), level, "request", attrs...)
	if s.metrics != nil {
		s.metrics.request(r.Method, l.pattern, rec.status, took)
	}
}

func requestID() string {
	var b [8]byte
	rand.Read(b[:])
	return hex.EncodeToString(b[:])
}

// secured sets what every answer says to a browser about safety. Scripts,
// styles and pictures come from here and nowhere else, and never from within a
// page.
func secured(next http.Handler) http.Handler {
	const policy = "default-src 'self'; base-uri 'none'; form-action 'self'; frame-ancestors 'none'; object-src 'none'"
	return http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		h := w.Header()
		h.Set("Content-Security-Policy", policy)
		h.Set("X-Content-Type-Options", "nosniff")
		h.Set("Referrer-Policy", "same-origin")
		h.Set("Cross-Origin-Opener-Policy", "same-origin")
		h.Set("Vary", "Cookie, Authorization, Accept-Encoding")
		next.ServeHTTP(w, r)
	})
}

// maxBody bounds what a request may send.
const maxBody = 2 << 20

// bounded limits the size of what is sent and the time that an answer may take.
func bounded(next http.Handler) http.Handler {
	return http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		r.Body = http.MaxBytesReader(w, r.Body, maxBody)
		ctx, cancel := context.WithTimeout(r.Context(), 25*time.Second)
		defer cancel()
		next.ServeHTTP(w, r.WithContext(ctx))
	})
}

// wantsPage tells a browser from a script.
func wantsPage(r *http.Request) bool {
	return !strings.HasPrefix(r.URL.Path, api.Prefix) && !strings.HasSuffix(r.URL.Path, ".csv") &&
		r.Header.Get("Authorization") == "" && strings.Contains(r.Header.Get("Accept"), "text/html")
}

// answerError answers with a page or a problem document, and keeps what only
// the log may know.
func (s *Server) answerError(w http.ResponseWriter, r *http.Request, err error) {
	line(r).err = err
	if wantsPage(r) && s.pages != nil {
		p := httperr.Of(err)
		p.Instance = w.Header().Get("X-Request-Id")
		httperr.Headers(w.Header(), p.Status)
		s.pages.Error(w, r, p)
		return
	}
	httperr.Write(w, r, err)
}

func urlQuery(s string) string { return url.QueryEscape(s) }
