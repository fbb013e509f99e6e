package static

import (
	"bytes"
	"compress/gzip"
	"io"
	"net/http"
	"net/http/httptest"
	"regexp"
	"strings"
	"testing"
)

// get asks the handler for a path.
func get(t *testing.T, method, path string, header map[string]string) *httptest.ResponseRecorder {
	t.Helper()
	r := httptest.NewRequest(method, path, nil)
	for k, v := range header {
		r.Header.Set(k, v)
	}
	w := httptest.NewRecorder()
	Handler().ServeHTTP(w, r)
	return w
}

// every is the files that pages load.
var every = []string{"app.css", "theme.js", "keys.js", "htmx.min.js", "favicon.svg"}

func TestFilesAreServedForGood(t *testing.T) {
	kinds := map[string]string{".css": "text/css; charset=utf-8", ".js": "text/javascript; charset=utf-8", "svg": "image/svg+xml"}
	for _, name := range every {
		w := get(t, http.MethodGet, URL(name), nil)
		if w.Code != http.StatusOK {
			t.Fatalf("%s: status %d", name, w.Code)
		}
		if got := w.Header().Get("Cache-Control"); !strings.Contains(got, "immutable") || !strings.Contains(got, "max-age=31536000") {
			t.Errorf("%s: Cache-Control %q", name, got)
		}
		for end, kind := range kinds {
			if strings.HasSuffix(name, end) && w.Header().Get("Content-Type") != kind {
				t.Errorf("%s: Content-Type %q, want %q", name, w.Header().Get("Content-Type"), kind)
			}
		}
		if w.Header().Get("X-Content-Type-Options") != "nosniff" {
			t.Errorf("%s: a browser may guess its type", name)
		}
	}
}

func TestURLCarriesTheHash(t *testing.T) {
	form := regexp.MustCompile(`^/static/app\.[0-9a-f]{12}\.css$`)
	if got := URL("app.css"); !form.MatchString(got) {
		t.Errorf("URL = %q, want the form %s", got, form)
	}
}

func TestURLOfNothingPanics(t *testing.T) {
	defer func() {
		if got, ok := recover().(string); !ok || !strings.Contains(got, "no.css") {
			t.Errorf("panic %q does not name the file", got)
		}
	}()
	URL("no.css")
}

func TestGzip(t *testing.T) {
	plain := get(t, http.MethodGet, URL("app.css"), nil).Body.Bytes()
	for _, c := range []struct {
		accept string
		packed bool
	}{
		{"gzip", true}, {"br, gzip;q=0.5", true}, {"*", true}, {"gzip;q=0", false}, {"gzip; q=0.0", false}, {"br", false}, {"", false},
		{"gzip;q=nonsense", false}, {"gzipped", false},
	} {
		w := get(t, http.MethodGet, URL("app.css"), map[string]string{"Accept-Encoding": c.accept})
		body := w.Body.Bytes()
		if packed := w.Header().Get("Content-Encoding") == "gzip"; packed != c.packed {
			t.Errorf("Accept-Encoding %q: packed %v, want %v", c.accept, packed, c.packed)
			continue
		}
		if c.packed {
			z, err := gzip.NewReader(bytes.NewReader(body))
			if err != nil {
				t.Fatal(err)
			}
			if body, err = io.ReadAll(z); err != nil {
				t.Fatal(err)
			}
		}
		if !bytes.Equal(body, plain) {
			t.Errorf("Accept-Encoding %q: another content", c.accept)
		}
		if w.Header().Get("Vary") != "Accept-Encoding" {
			t.Errorf("Accept-Encoding %q: a cache between could mix the two up", c.accept)
		}
	}
}

func TestUnchangedAndRefused(t *testing.T) {
	url := URL("app.css")
	etag := get(t, http.MethodGet, url, nil).Header().Get("ETag")
	for _, c := range []struct {
		name, method, path string
		header             map[string]string
		status             int
	}{
		{"same content", http.MethodGet, url, map[string]string{"If-None-Match": etag}, http.StatusNotModified},
		{"other content", http.MethodGet, url, map[string]string{"If-None-Match": `"x"`}, http.StatusOK},
		{"head", http.MethodHead, url, nil, http.StatusOK},
		{"post", http.MethodPost, url, nil, http.StatusMethodNotAllowed},
		{"without hash", http.MethodGet, "/static/app.css", nil, http.StatusNotFound},
		{"another hash", http.MethodGet, "/static/app.000000000000.css", nil, http.StatusNotFound},
		{"a part of app.css", http.MethodGet, "/static/tokens.css", nil, http.StatusNotFound},
		{"out of the folder", http.MethodGet, "/static/../static.go", nil, http.StatusNotFound},
	} {
		w := get(t, c.method, c.path, c.header)
		if w.Code != c.status {
			t.Errorf("%s: status %d, want %d", c.name, w.Code, c.status)
		}
		if c.method == http.MethodHead && w.Body.Len() > 0 {
			t.Errorf("%s: it has a body", c.name)
		}
	}
}

// TestEveryStyleSheetIsJoined finds a style sheet that was added and forgotten.
func TestEveryStyleSheetIsJoined(t *testing.T) {
	entries, err := files.ReadDir("files")
	if err != nil {
		t.Fatal(err)
	}
	joined := strings.Join(styleSheets, " ")
	for _, e := range entries {
		if strings.HasSuffix(e.Name(), ".css") && !strings.Contains(joined, e.Name()) {
			t.Errorf("%s is in no page: add it to styleSheets", e.Name())
		}
	}
}

// TestNothingFromElsewhere keeps styles and scripts to this server.
func TestNothingFromElsewhere(t *testing.T) {
	for _, name := range []string{"app.css", "theme.js", "keys.js"} {
		body := get(t, http.MethodGet, URL(name), nil).Body.String()
		for _, bad := range []string{"http://", "https://", "@import", "url("} {
			if strings.Contains(body, bad) {
				t.Errorf("%s contains %q", name, bad)
			}
		}
	}
}
