package api

import (
	"bytes"
	"context"
	"encoding/json"
	"flag"
	"net/http/httptest"
	"os"
	"strings"
	"testing"
	"time"

	"github.com/getkin/kin-openapi/openapi3"
	"github.com/go-chi/chi/v5"
)

var update = flag.Bool("update", false, "rewrite openapi.yaml")

// described is the API with no service behind it, and its description.
func described(t *testing.T) (*chi.Mux, []byte, *openapi3.T) {
	t.Helper()
	mux := chi.NewMux()
	b, err := Register(mux, nil, nil, nil, time.Now, "1").YAML()
	if err != nil {
		t.Fatal(err)
	}
	doc, err := openapi3.NewLoader().LoadFromData(b)
	if err != nil {
		t.Fatal(err)
	}
	return mux, b, doc
}

// The description that is served is the one that is committed.
func TestOpenAPIIsCurrent(t *testing.T) {
	_, b, _ := described(t)
	if *update {
		if err := os.WriteFile("openapi.yaml", b, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile("openapi.yaml")
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(b, want) {
		t.Error("openapi.yaml is not what is served: go test ./server/api -run OpenAPI -update")
	}
}

// It is a valid document, examples included, and says of every operation what
// a client must know.
func TestOpenAPIIsWhole(t *testing.T) {
	_, _, doc := described(t)
	if err := doc.Validate(context.Background(), openapi3.EnableExamplesValidation()); err != nil {
		t.Error(err)
	}
	seen := map[string]bool{}
	for path, item := range doc.Paths.Map() {
		for method, op := range item.Operations() {
			what := method + " " + path
			if op.Summary == "" || op.Description == "" || op.Security == nil || len(op.Tags) != 1 || doc.Tags.Get(op.Tags[0]) == nil {
				t.Errorf("%s lacks a summary, a description, its security or a known tag", what)
			}
			if op.OperationID == "" || seen[op.OperationID] {
				t.Errorf("%s has the id %q, which is empty or another's", what, op.OperationID)
			}
			seen[op.OperationID] = true
			if op.RequestBody != nil && op.RequestBody.Value.Content.Get("application/json").Example == nil {
				t.Errorf("%s lacks an example of what is sent", what)
			}
			for _, p := range op.Parameters {
				if p.Value.In == "path" && p.Value.Example == nil && p.Value.Schema.Value.Example == nil && len(p.Value.Schema.Value.Examples) == 0 {
					t.Errorf("%s: the parameter %s lacks an example", what, p.Value.Name)
				}
			}
			answers(t, what, op)
		}
	}
	if len(seen) < 20 {
		t.Errorf("only %d operations", len(seen))
	}
}

// answers checks an operation's answers: a good one with an example, and
// problem documents.
func answers(t *testing.T, what string, op *openapi3.Operation) {
	t.Helper()
	good, bad := 0, 0
	for status, r := range op.Responses.Map() {
		switch {
		case strings.HasPrefix(status, "2"):
			m := r.Value.Content.Get("application/json")
			if m == nil || m.Example == nil || m.Schema == nil {
				t.Errorf("%s: the answer %s lacks an example", what, status)
			}
			good++
		case strings.HasPrefix(status, "4"), strings.HasPrefix(status, "5"):
			m := r.Value.Content.Get("application/problem+json")
			if m == nil || m.Schema == nil || m.Schema.Ref != "#/components/schemas/Problem" {
				t.Errorf("%s: the answer %s is no problem document", what, status)
			}
			bad++
		}
	}
	if good != 1 || bad == 0 {
		t.Errorf("%s: %d good and %d bad answers", what, good, bad)
	}
}

func TestDocumentIsServed(t *testing.T) {
	mux, yaml, _ := described(t)
	for _, path := range DocumentPaths {
		w := httptest.NewRecorder()
		mux.ServeHTTP(w, httptest.NewRequest("GET", path, nil))
		if w.Code != 200 || w.Header().Get("ETag") == "" {
			t.Errorf("%s: %d %v", path, w.Code, w.Header())
		}
		if strings.HasSuffix(path, "yaml") && !bytes.Equal(w.Body.Bytes(), yaml) {
			t.Errorf("%s is not the document", path)
		}
		if strings.HasSuffix(path, "json") && !json.Valid(w.Body.Bytes()) {
			t.Errorf("%s is not JSON", path)
		}
		r := httptest.NewRequest("GET", path, nil)
		r.Header.Set("If-None-Match", w.Header().Get("ETag"))
		again := httptest.NewRecorder()
		mux.ServeHTTP(again, r)
		if again.Code != 304 || again.Body.Len() != 0 {
			t.Errorf("%s asked again: %d", path, again.Code)
		}
	}
}
