package server

import (
	"bytes"
	"context"
	"io"
	"net/http"
	"strings"
	"testing"

	"github.com/getkin/kin-openapi/openapi3"
	"github.com/getkin/kin-openapi/openapi3filter"
	"github.com/getkin/kin-openapi/routers"
	"github.com/getkin/kin-openapi/routers/legacy"

	"cadencewright/server/api"
)

// contract holds every answer of the API that any test gets against the
// description that the service serves.
type contract struct {
	router  routers.Router
	checked int
}

func newContract(t testing.TB, s *Server) *contract {
	t.Helper()
	b, err := s.API().JSON()
	if err != nil {
		t.Fatal(err)
	}
	doc, err := openapi3.NewLoader().LoadFromData(b)
	if err != nil {
		t.Fatal(err)
	}
	doc.Servers = nil // wherever the test serves it
	r, err := legacy.NewRouter(doc)
	if err != nil {
		t.Fatal(err)
	}
	return &contract{router: r}
}

// check fails the test where an answer is none that the description foresees.
func (c *contract) check(t testing.TB, req *http.Request, res *http.Response, body []byte) {
	t.Helper()
	if !strings.HasPrefix(req.URL.Path, api.Prefix+"/") {
		return
	}
	if res.StatusCode >= 400 && res.Header.Get("Content-Type") != "application/problem+json" {
		t.Errorf("%s %s: %s is no problem document but %s: %s", req.Method, req.URL.Path, res.Status, res.Header.Get("Content-Type"), body)
	}
	route, params, err := c.router.FindRoute(&http.Request{Method: req.Method, URL: req.URL, Header: req.Header, Host: req.Host})
	if err != nil { // no operation
		if res.StatusCode < 400 && !strings.HasPrefix(req.URL.Path, api.Prefix+"/openapi.") {
			t.Errorf("%s %s answers %s and is not described", req.Method, req.URL.Path, res.Status)
		}
		return
	}
	in := &openapi3filter.ResponseValidationInput{
		RequestValidationInput: &openapi3filter.RequestValidationInput{Request: req, PathParams: params, Route: route},
		Status:                 res.StatusCode, Header: res.Header, Body: io.NopCloser(bytes.NewReader(body)),
		Options: &openapi3filter.Options{IncludeResponseStatus: res.StatusCode != http.StatusBadRequest, MultiError: true},
	}
	if err := openapi3filter.ValidateResponse(context.Background(), in); err != nil {
		t.Errorf("%s %s: %s is not what is described: %v", req.Method, req.URL.Path, res.Status, err)
	}
	c.checked++
}
