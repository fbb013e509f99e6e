package api

import (
	"bytes"
	"context"
	"flag"
	"net/http/httptest"
	"os"
	"testing"
	"time"

	"github.com/getkin/kin-openapi/openapi3"
	"github.com/go-chi/chi/v5"
)

var update = flag.Bool("update", false, "rewrite openapi.yaml")

// The description that is served is the one that is committed, and it is a
// valid OpenAPI document.
func TestOpenAPIIsCurrent(t *testing.T) {
	mux := chi.NewMux()
	h := Register(mux, nil, nil, nil, time.Now, "1")
	var b bytes.Buffer
	if err := Document(h, &b); err != nil {
		t.Fatal(err)
	}
	if *update {
		if err := os.WriteFile("openapi.yaml", b.Bytes(), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile("openapi.yaml")
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(b.Bytes(), want) {
		t.Error("openapi.yaml is not what is served: go test ./server/api -run OpenAPI -update")
	}
	doc, err := openapi3.NewLoader().LoadFromData(b.Bytes())
	if err != nil {
		t.Fatal(err)
	}
	if err := doc.Validate(context.Background(), openapi3.DisableExamplesValidation()); err != nil {
		t.Error(err)
	}
	for path, item := range doc.Paths.Map() {
		for method, op := range item.Operations() {
			if op.Summary == "" || op.Description == "" || op.Security == nil || len(*op.Security) == 0 {
				t.Errorf("%s %s lacks a summary, a description or its security", method, path)
			}
		}
	}
	w := httptest.NewRecorder()
	mux.ServeHTTP(w, httptest.NewRequest("GET", Prefix+"/openapi.json", nil))
	if w.Code != 200 {
		t.Errorf("openapi.json: %d", w.Code)
	}
}

func TestPointer(t *testing.T) {
	for in, want := range map[string]string{"body": "", "body.state": "/state", "body.a[3].b": "/a/3/b", "path.id": "/id", "query.from": "/from", "": "/"} {
		if got := pointer(in); got != want {
			t.Errorf("%q becomes %q, want %q", in, got, want)
		}
	}
}

func TestMatches(t *testing.T) {
	for _, c := range []struct {
		header, tag string
		want        bool
	}{{"", `"a"`, false}, {`"a"`, `"a"`, true}, {`W/"a"`, `"a"`, true}, {`"b", "a"`, `"a"`, true}, {`"b"`, `"a"`, false}, {"*", `"a"`, true}} {
		if got := matches(c.header, c.tag); got != c.want {
			t.Errorf("%q against %q: %v", c.header, c.tag, got)
		}
	}
}
