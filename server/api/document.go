package api

import (
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"net/http"
	"sync"

	"github.com/go-chi/chi/v5"

	"cadencewright/server/httperr"
)

// DocumentPaths are where the description is served.
var DocumentPaths = []string{Prefix + "/openapi.json", Prefix + "/openapi.yaml"}

// YAML is the description of the API as YAML.
func (a *API) YAML() ([]byte, error) { return a.h.OpenAPI().YAML() }

// JSON is the description of the API as JSON.
func (a *API) JSON() ([]byte, error) {
	b, err := json.MarshalIndent(a.h.OpenAPI(), "", " ")
	return append(b, '\n'), err
}

// serveDocument serves the description. It is the same for as long as the
// program runs, so it is made once.
func (a *API) serveDocument(r chi.Router) {
	serve := func(path, contentType string, make func() ([]byte, error)) {
		document := sync.OnceValues(make)
		r.Get(path, func(w http.ResponseWriter, r *http.Request) {
			b, err := document()
			if err != nil {
				httperr.Write(w, r, err)
				return
			}
			sum := sha256.Sum256(b)
			tag := `"` + hex.EncodeToString(sum[:8]) + `"`
			w.Header().Set("ETag", tag)
			w.Header().Set("Cache-Control", "no-cache")
			if matches(r.Header.Get("If-None-Match"), tag) {
				w.WriteHeader(http.StatusNotModified)
				return
			}
			w.Header().Set("Content-Type", contentType)
			_, _ = w.Write(b) // a failure here is the client having gone
		})
	}
	serve(DocumentPaths[0], "application/vnd.oai.openapi+json;version=3.1", a.JSON)
	serve(DocumentPaths[1], "application/vnd.oai.openapi;version=3.1", a.YAML)
}
