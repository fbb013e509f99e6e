package server

import (
	"compress/gzip"
	"io"
	"mime"
	"net/http"
	"strconv"
	"strings"
	"sync"
)

// worthIt is the least size, in bytes, of an answer that is compressed: a
// shorter one fits into one packet anyway.
const worthIt = 1400

// gzipLevel trades processor for bytes; the highest levels gain 2 % for twice
// the time on our pages.
const gzipLevel = 5

var gzips = sync.Pool{New: func() any {
	w, _ := gzip.NewWriterLevel(io.Discard, gzipLevel) // fails for a wrong level only
	return w
}}

// compressed gzips answers that are text and long enough, for clients that
// take it. Answers of files that are compressed already pass through.
func compressed(next http.Handler) http.Handler {
	return http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		if !takesGzip(r.Header.Get("Accept-Encoding")) || r.Method == http.MethodHead {
			next.ServeHTTP(w, r)
			return
		}
		c := &compressor{ResponseWriter: w}
		defer c.end()
		next.ServeHTTP(c, r)
	})
}

// takesGzip tells whether an Accept-Encoding header takes gzip.
func takesGzip(accept string) bool {
	for part := range strings.SplitSeq(accept, ",") {
		name, params, _ := strings.Cut(strings.ToLower(strings.TrimSpace(part)), ";")
		if strings.TrimSpace(name) != "gzip" {
			continue
		}
		q, isQ := strings.CutPrefix(strings.TrimSpace(params), "q=")
		weight, err := strconv.ParseFloat(q, 64)
		return !isQ || err == nil && weight > 0
	}
	return false
}

// compressor holds an answer back until it is long enough to decide.
type compressor struct {
	http.ResponseWriter
	status  int
	held    []byte
	decided bool
	gz      *gzip.Writer // nil: passed through
}

// Unwrap lets http.ResponseController reach the connection.
func (c *compressor) Unwrap() http.ResponseWriter { return c.ResponseWriter }

func (c *compressor) WriteHeader(status int) {
	switch {
	case status < 200: // not the answer yet
		c.ResponseWriter.WriteHeader(status)
	case c.status == 0:
		c.status = status
	}
}

func (c *compressor) Write(b []byte) (int, error) {
	if c.status == 0 {
		c.status = http.StatusOK
	}
	if !c.decided {
		if len(c.held)+len(b) < worthIt {
			c.held = append(c.held, b...)
			return len(b), nil
		}
		if err := c.decide(true); err != nil {
			return 0, err
		}
	}
	if c.gz != nil {
		return c.gz.Write(b)
	}
	return c.ResponseWriter.Write(b)
}

// decide sends the header, compressed or not, and what was held back.
func (c *compressor) decide(long bool) error {
	c.decided = true
	h := c.Header()
	if long && c.status != http.StatusPartialContent && h.Get("Content-Encoding") == "" && isText(h.Get("Content-Type")) {
		h.Set("Content-Encoding", "gzip")
		h.Del("Content-Length")
		// The bytes are others than those that the tag names, the meaning is not.
		if tag := h.Get("ETag"); tag != "" && !strings.HasPrefix(tag, "W/") {
			h.Set("ETag", "W/"+tag)
		}
		c.gz = gzips.Get().(*gzip.Writer)
		c.gz.Reset(c.ResponseWriter)
	}
	c.ResponseWriter.WriteHeader(c.status)
	if len(c.held) == 0 {
		return nil
	}
	var err error
	if c.gz != nil {
		_, err = c.gz.Write(c.held)
	} else {
		_, err = c.ResponseWriter.Write(c.held)
	}
	c.held = nil
	return err
}

// FlushError sends what there is, for answers that go on and on.
func (c *compressor) FlushError() error {
	if c.status == 0 {
		c.status = http.StatusOK
	}
	if !c.decided {
		if err := c.decide(false); err != nil {
			return err
		}
	}
	if c.gz != nil {
		if err := c.gz.Flush(); err != nil {
			return err
		}
	}
	return http.NewResponseController(c.ResponseWriter).Flush()
}

// end finishes the answer. A handler that panicked before anything was sent
// has its answer thrown away: the 500 comes in its place.
func (c *compressor) end() {
	if p := recover(); p != nil {
		if c.gz != nil {
			c.gz.Reset(io.Discard)
			gzips.Put(c.gz)
		}
		panic(p)
	}
	if !c.decided && c.status != 0 {
		_ = c.decide(false) // a failure is the client having gone
	}
	if c.gz != nil {
		_ = c.gz.Close()
		c.gz.Reset(io.Discard)
		gzips.Put(c.gz)
	}
}

// isText tells whether a kind of answer gains by compression.
func isText(contentType string) bool {
	kind, _, err := mime.ParseMediaType(contentType)
	if err != nil {
		return false
	}
	return strings.HasPrefix(kind, "text/") || strings.HasSuffix(kind, "json") || strings.HasSuffix(kind, "+xml") ||
		strings.HasPrefix(kind, "application/vnd.oai.openapi")
}
