// Package static holds the styles, scripts and pictures that pages load, and
// serves them under addresses that carry a hash of the content, so that a
// browser may keep each one for good and still never sees a stale one.
// Everything is compressed once, at start.
package static

import (
	"bytes"
	"compress/gzip"
	"crypto/sha256"
	"embed"
	"encoding/hex"
	"fmt"
	"io/fs"
	"mime"
	"net/http"
	"path"
	"strconv"
	"strings"
)

//go:embed files
var files embed.FS

// Prefix is the path under which Handler must be mounted.
const Prefix = "/static/"

// styleSheets are joined, in this order, into app.css: one request on a poor
// line instead of several, while each file stays short enough to read.
var styleSheets = []string{
	"tokens.css", "base.css", "frame.css", "parts.css", "week.css", "plot.css", "pages.css", "print.css",
}

// asset is one served file.
type asset struct {
	kind       string // media type
	plain      []byte
	compressed []byte // nil where compression gains nothing
	etag       string
}

var (
	byPath = map[string]*asset{} // "app.1a2b3c4d5e6f.css"
	urls   = map[string]string{} // "app.css" to "/static/app.1a2b3c4d5e6f.css"
	_      = load(byPath, urls)  // at start: the embedded files cannot fail later
)

// load reads, hashes and compresses every embedded file. The files are part of
// the program: a fault here is a fault of the build, hence the panic.
func load(byPath map[string]*asset, urls map[string]string) bool {
	content := map[string][]byte{}
	entries, err := fs.ReadDir(files, "files")
	if err != nil {
		panic(err)
	}
	for _, e := range entries {
		b, err := files.ReadFile("files/" + e.Name())
		if err != nil {
			panic(err)
		}
		content[e.Name()] = b
	}
	var css bytes.Buffer
	for _, name := range styleSheets {
		b, ok := content[name]
		if !ok {
			panic("static: no style sheet " + name)
		}
		css.Write(b)
		delete(content, name)
	}
	content["app.css"] = css.Bytes()
	for name, b := range content {
		sum := sha256.Sum256(b)
		hash := hex.EncodeToString(sum[:6])
		ext := path.Ext(name)
		hashed := strings.TrimSuffix(name, ext) + "." + hash + ext
		byPath[hashed] = &asset{kind: kindOf(ext), plain: b, compressed: compress(b), etag: `"` + hash + `"`}
		urls[name] = Prefix + hashed
	}
	return true
}

// kindOf is the media type of an extension; the machine's own table is not
// asked for the ones that matter, as it may be missing or odd.
func kindOf(ext string) string {
	switch ext {
	case ".css":
		return "text/css; charset=utf-8"
	case ".js":
		return "text/javascript; charset=utf-8"
	case ".svg":
		return "image/svg+xml"
	}
	if t := mime.TypeByExtension(ext); t != "" {
		return t
	}
	return "application/octet-stream"
}

func compress(b []byte) []byte {
	var buf bytes.Buffer
	w, err := gzip.NewWriterLevel(&buf, gzip.BestCompression)
	if err != nil {
		panic(err)
	}
	_, _ = w.Write(b) // a bytes.Buffer takes everything
	w.Close()
	if buf.Len() >= len(b) {
		return nil
	}
	return buf.Bytes()
}

// URL is the address of a file, "/static/app.1a2b3c4d5e6f.css" for "app.css".
// An unknown name is a mistake in a page and panics, so that tests find it.
func URL(name string) string {
	u, ok := urls[name]
	if !ok {
		panic(fmt.Sprintf("static: no file %q", name))
	}
	return u
}

// Handler serves the files. It expects the whole path, Prefix included.
func Handler() http.Handler { return http.HandlerFunc(serve) }

func serve(w http.ResponseWriter, r *http.Request) {
	a, ok := byPath[strings.TrimPrefix(r.URL.Path, Prefix)]
	if !ok {
		http.NotFound(w, r)
		return
	}
	if r.Method != http.MethodGet && r.Method != http.MethodHead {
		w.Header().Set("Allow", "GET, HEAD")
		http.Error(w, "only GET and HEAD", http.StatusMethodNotAllowed)
		return
	}
	h := w.Header()
	h.Set("Cache-Control", "public, max-age=31536000, immutable")
	h.Set("ETag", a.etag)
	h.Set("Vary", "Accept-Encoding")
	if strings.Contains(r.Header.Get("If-None-Match"), a.etag) {
		w.WriteHeader(http.StatusNotModified)
		return
	}
	h.Set("Content-Type", a.kind)
	h.Set("X-Content-Type-Options", "nosniff")
	body := a.plain
	if a.compressed != nil && acceptsGzip(r.Header.Get("Accept-Encoding")) {
		h.Set("Content-Encoding", "gzip")
		body = a.compressed
	}
	h.Set("Content-Length", strconv.Itoa(len(body)))
	if r.Method == http.MethodGet {
		w.Write(body) // a failure here is the reader having gone
	}
}

// acceptsGzip reads the part of Accept-Encoding that matters: gzip named, and
// not with a weight of nought.
func acceptsGzip(accept string) bool {
	for part := range strings.SplitSeq(accept, ",") {
		name, params, _ := strings.Cut(strings.TrimSpace(part), ";")
		if name = strings.TrimSpace(name); name != "gzip" && name != "*" {
			continue
		}
		q, isQ := strings.CutPrefix(strings.ReplaceAll(params, " ", ""), "q=")
		weight, err := strconv.ParseFloat(q, 64)
		return !isQ || err == nil && weight > 0
	}
	return false
}
