package server

import (
	"compress/gzip"
	"errors"
	"fmt"
	"io"
	"log/slog"
	"net/http"
	"net/http/httptest"
	"strings"
	"testing"
	"time"

	"github.com/go-chi/chi/v5"
	"pgregory.net/rapid"

	"cadencewright/scheduler"
)

// bare is a service of a few handlers of the test's own, with all that stands
// before handlers.
func bare(routes func(s *Server, r chi.Router)) (*Server, http.Handler, *syncBuffer) {
	logs := &syncBuffer{}
	s := &Server{log: slog.New(slog.NewTextHandler(logs, nil)), origin: "https://plan.example.org"}
	mux := chi.NewMux()
	s.before(mux)
	routes(s, mux)
	mux.NotFound(s.answer(nothingHere))
	mux.MethodNotAllowed(s.answer(notPossible))
	return s, mux, logs
}

func ask(h http.Handler, method, path string, header ...string) *httptest.ResponseRecorder {
	r := httptest.NewRequest(method, path, nil)
	for i := 0; i+1 < len(header); i += 2 {
		r.Header.Set(header[i], header[i+1])
	}
	w := httptest.NewRecorder()
	h.ServeHTTP(w, r)
	return w
}

// One fault must not take the service down, nor tell the client of its inside.
func TestPanics(t *testing.T) {
	_, h, logs := bare(func(_ *Server, r chi.Router) {
		r.Get("/early/{x}", func(http.ResponseWriter, *http.Request) { panic("secret words") })
		r.Get("/held", func(w http.ResponseWriter, _ *http.Request) { fmt.Fprint(w, "half a page"); panic("secret words") })
		r.Get("/late", func(w http.ResponseWriter, _ *http.Request) {
			fmt.Fprint(w, strings.Repeat("half a page ", 1000))
			panic("secret words")
		})
	})
	for _, path := range []string{"/early/1", "/held"} { // a short answer is held back until it is whole
		w := ask(h, "GET", path, "Accept-Encoding", "gzip")
		if w.Code != 500 || strings.Contains(w.Body.String(), "secret") || strings.Contains(w.Body.String(), "half") ||
			!strings.Contains(w.Body.String(), w.Header().Get("X-Request-Id")) {
			t.Errorf("%s: %d %s", path, w.Code, w.Body)
		}
	}
	func() {
		defer func() {
			if p := recover(); p != http.ErrAbortHandler { // the server breaks the connection off
				t.Errorf("after half an answer: %v", p)
			}
		}()
		ask(h, "GET", "/late")
	}()
	if n := strings.Count(logs.String(), "secret words"); n != 3 || !strings.Contains(logs.String(), "route=/early/{x}") || !strings.Contains(logs.String(), "middleware_test.go") {
		t.Errorf("the log names %d panics:\n%s", n, logs)
	}
}

// Each request leaves one line, with what was learnt on the way and nothing
// secret.
func TestLogLine(t *testing.T) {
	_, h, logs := bare(func(s *Server, r chi.Router) {
		r.Get("/things/{name}", s.answer(func(http.ResponseWriter, *http.Request) error {
			return scheduler.Errorf(scheduler.ErrNotFound, "no such thing: %w", errors.New("row 7"))
		}))
	})
	w := ask(h, "GET", "/things/x?token=hunter2", "Authorization", "Bearer hunter2", "Cookie", "cadencewright_session=hunter2")
	line := logs.String()
	if strings.Count(line, "\n") != 1 || strings.Contains(line, "hunter2") {
		t.Errorf("the log:\n%s", line)
	}
	for _, want := range []string{"method=GET", "route=/things/{name}", "status=404", "took=", "request=" + w.Header().Get("X-Request-Id"), `error="no such thing: row 7`} {
		if !strings.Contains(line, want) {
			t.Errorf("%q is missing in %s", want, line)
		}
	}
}

func TestNothingHere(t *testing.T) {
	_, h, _ := bare(func(_ *Server, r chi.Router) {
		r.Get("/a", func(http.ResponseWriter, *http.Request) {})
		r.Post("/a", func(http.ResponseWriter, *http.Request) {})
		r.Post("/b/{x}", func(http.ResponseWriter, *http.Request) {})
	})
	for _, c := range []struct {
		method, path, accept string
		status               int
		allow                string
	}{
		{"GET", "/nowhere", "", 404, ""}, {"GET", "/api/v1/nowhere", "text/html", 404, ""}, {"GET", "/nowhere.csv", "text/html", 404, ""},
		{"PUT", "/a", "", 405, "GET, HEAD, POST"}, {"GET", "/b/1", "", 405, "POST"}, {"HEAD", "/a", "", 200, ""}, {"BREW", "/a", "", 405, "GET, HEAD, POST"},
	} {
		w := ask(h, c.method, c.path, "Accept", c.accept)
		if w.Code != c.status || w.Header().Get("Allow") != c.allow {
			t.Errorf("%s %s: %d, Allow %q; want %d, %q", c.method, c.path, w.Code, w.Header().Get("Allow"), c.status, c.allow)
		}
		if c.status >= 400 && w.Header().Get("Content-Type") != "application/problem+json" {
			t.Errorf("%s %s: %s", c.method, c.path, w.Header().Get("Content-Type"))
		}
	}
}

func TestSameOrigin(t *testing.T) {
	_, h, _ := bare(func(_ *Server, r chi.Router) {
		r.Get("/a", func(http.ResponseWriter, *http.Request) {})
		r.Post("/a", func(http.ResponseWriter, *http.Request) {})
	})
	for _, c := range []struct {
		method string
		header []string
		status int
	}{
		{"POST", nil, 200}, // a script
		{"POST", []string{"Sec-Fetch-Site", "same-origin"}, 200},
		{"POST", []string{"Sec-Fetch-Site", "cross-site"}, 403},
		{"POST", []string{"Sec-Fetch-Site", "same-site"}, 403},
		{"POST", []string{"Origin", "https://evil.example"}, 403},
		{"POST", []string{"Origin", "null"}, 403},
		{"POST", []string{"Origin", "https://plan.example.org"}, 200}, // the base URL, through a proxy
		{"POST", []string{"Origin", "http://example.com"}, 200},       // the address that the request names
		{"GET", []string{"Sec-Fetch-Site", "cross-site"}, 200},        // a link from elsewhere
	} {
		if w := ask(h, c.method, "/a", c.header...); w.Code != c.status {
			t.Errorf("%s %v: %d, want %d", c.method, c.header, w.Code, c.status)
		}
	}
}

func TestBounds(t *testing.T) {
	_, h, _ := bare(func(s *Server, r chi.Router) {
		r.Post("/", s.answer(func(w http.ResponseWriter, r *http.Request) error {
			if _, ok := r.Context().Deadline(); !ok {
				t.Error("a request may be worked on for ever")
			}
			_, err := io.Copy(io.Discard, r.Body)
			return err
		}))
	})
	for size, want := range map[int]int{maxBody: 200, maxBody + 1: 413} {
		w := httptest.NewRecorder()
		h.ServeHTTP(w, httptest.NewRequest("POST", "/", strings.NewReader(strings.Repeat("x", size))))
		if w.Code != want {
			t.Errorf("%d bytes: %d, want %d", size, w.Code, want)
		}
	}
}

// A name in a path is the same however it was escaped.
func TestPlainPath(t *testing.T) {
	var got string
	_, h, _ := bare(func(_ *Server, r chi.Router) {
		r.Get("/sources/{name}", func(_ http.ResponseWriter, r *http.Request) { got = r.PathValue("name") })
	})
	for path, want := range map[string]string{
		"/sources/SIM%20J0412+1833": "SIM J0412+1833", "/sources/SIM%20J0412%2B1833": "SIM J0412+1833", "/sources/%53IM": "SIM", "/%73ources/x": "x", "/sources/a%2Fb": "a%2Fb",
	} {
		got = ""
		if w := ask(h, "GET", path); w.Code != 200 || got != want {
			t.Errorf("%s: %d, %q, want %q", path, w.Code, got, want)
		}
	}
}

func TestCompression(t *testing.T) {
	long := strings.Repeat("elevation ", 1000)
	_, h, _ := bare(func(_ *Server, r chi.Router) {
		r.Get("/{kind}/{size}", func(w http.ResponseWriter, r *http.Request) {
			w.Header().Set("Content-Type", map[string]string{"text": "text/html; charset=utf-8", "json": "application/problem+json", "png": "image/png"}[r.PathValue("kind")])
			w.Header().Set("ETag", `"7"`)
			w.WriteHeader(http.StatusAccepted)
			n := map[string]int{"long": len(long), "short": 100, "none": 0}[r.PathValue("size")]
			for at := 0; at < n; at += 50 {
				_, _ = io.WriteString(w, long[at:min(n, at+50)])
			}
		})
	})
	for _, c := range []struct {
		path, accept string
		gzip         bool
		size         int
	}{
		{"/text/long", "gzip", true, len(long)}, {"/json/long", "br, gzip;q=0.5", true, len(long)}, {"/text/long", "", false, len(long)},
		{"/text/long", "gzip;q=0", false, len(long)}, {"/text/long", "br", false, len(long)}, {"/text/short", "gzip", false, 100}, {"/png/long", "gzip", false, len(long)}, {"/text/none", "gzip", false, 0},
	} {
		w := ask(h, "GET", c.path, "Accept-Encoding", c.accept)
		body, tag := io.Reader(w.Body), `"7"`
		if got := w.Header().Get("Content-Encoding") == "gzip"; got != c.gzip {
			t.Errorf("%s for %q: compressed %v", c.path, c.accept, got)
			continue
		}
		if c.gzip {
			tag = `W/"7"`
			if w.Body.Len() > c.size/4 {
				t.Errorf("%s: %d bytes are left of %d", c.path, w.Body.Len(), c.size)
			}
			var err error
			if body, err = gzip.NewReader(w.Body); err != nil {
				t.Fatal(err)
			}
		}
		b, err := io.ReadAll(body)
		if err != nil || string(b) != long[:c.size] || w.Code != 202 || w.Header().Get("ETag") != tag {
			t.Errorf("%s for %q: %d, %d bytes, %v, %s", c.path, c.accept, w.Code, len(b), err, w.Header().Get("ETag"))
		}
		if !strings.Contains(w.Header().Get("Vary"), "Accept-Encoding") {
			t.Errorf("%s: Vary is %q", c.path, w.Header().Get("Vary"))
		}
	}
}

// An answer that goes on and on reaches the client piece by piece.
func TestFlushing(t *testing.T) {
	next := make(chan struct{})
	_, h, _ := bare(func(_ *Server, r chi.Router) {
		r.Get("/", func(w http.ResponseWriter, _ *http.Request) {
			w.Header().Set("Content-Type", "text/event-stream")
			for i := range 3 {
				fmt.Fprintf(w, "data: %d\n\n", i)
				if err := http.NewResponseController(w).Flush(); err != nil {
					t.Error(err)
				}
				<-next
			}
		})
	})
	srv := httptest.NewServer(h)
	defer srv.Close()
	res, err := (&http.Client{Timeout: 20 * time.Second}).Get(srv.URL)
	if err != nil {
		t.Fatal(err)
	}
	defer res.Body.Close()
	for i := range 3 {
		b := make([]byte, len("data: 0\n\n"))
		if _, err := io.ReadFull(res.Body, b); err != nil || string(b) != fmt.Sprintf("data: %d\n\n", i) {
			t.Fatalf("piece %d: %q, %v", i, b, err)
		}
		next <- struct{}{}
	}
}

// Whatever pieces an answer is written in, the client gets it as it was.
func TestCompressionByDrawing(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		pieces := rapid.SliceOfN(rapid.StringN(0, 200, 800), 0, 30).Draw(t, "pieces")
		h := compressed(http.HandlerFunc(func(w http.ResponseWriter, _ *http.Request) {
			w.Header().Set("Content-Type", "text/plain")
			for _, p := range pieces {
				if n, err := io.WriteString(w, p); n != len(p) || err != nil {
					t.Fatalf("%d of %d, %v", n, len(p), err)
				}
			}
		}))
		w := ask(h, "GET", "/", "Accept-Encoding", "gzip")
		body := io.Reader(w.Body)
		if w.Header().Get("Content-Encoding") == "gzip" {
			var err error
			if body, err = gzip.NewReader(w.Body); err != nil {
				t.Fatal(err)
			}
		}
		if b, err := io.ReadAll(body); err != nil || string(b) != strings.Join(pieces, "") {
			t.Fatalf("%q, %v", b, err)
		}
	})
}
