package server

import (
	"bytes"
	"encoding/json"
	"fmt"
	"math/rand/v2"
	"net/http"
	"net/url"
	"os"
	"slices"
	"strconv"
	"strings"
	"testing"

	"github.com/getkin/kin-openapi/openapi3"

	"cadencewright/server/auth"
)

// drawer draws requests from the API's description: right ones, and ones that
// are wrong in type, size or form.
type drawer struct {
	*rand.Rand
	codes []string
}

// oddities are texts that programs stumble over.
var oddities = []string{"", "0", "-1", "1e309", "NaN", "null", "true", "9223372036854775807", "9223372036854775808", "2027-W53", "2027-W00", "0000-W01", "9999-W52",
	"2027-01-18", "2027-02-30", "2027-01-18T00:00:00Z", "0001-01-01T00:00:00Z", "9999-12-31T23:59:59.999999999Z", "2027-01-18T00:00:00+24:00", "'; drop table scan; --",
	"\x00", "a\x00b", "\xff\xfe", "ä≈🔭", "../../etc/passwd", "%", "%00", "<script>", "${x}", strings.Repeat("x", 3000), "[]", "{}", "*", `"1"`, "W/\"1\""}

func pick[T any](r *rand.Rand, list []T) T { return list[r.IntN(len(list))] }

// text is a value for a parameter.
func (d *drawer) text(p *openapi3.Parameter) string {
	switch d.IntN(4) {
	case 0:
		return pick(d.Rand, oddities)
	case 1:
		return strconv.Itoa(d.IntN(60))
	}
	s := p.Schema.Value
	switch {
	case p.Name == "code":
		return pick(d.Rand, d.codes)
	case p.Name == "week":
		return "2027-W0" + strconv.Itoa(1+d.IntN(6))
	case p.Name == "night":
		return "2027-01-" + strconv.Itoa(10+d.IntN(20))
	case s.Type.Is("integer"):
		return strconv.Itoa(1 + d.IntN(5))
	case s.Format == "date-time":
		return fmt.Sprintf("2027-01-%02dT%02d:00:00Z", 1+d.IntN(31), d.IntN(24))
	}
	return fmt.Sprint(s.Example)
}

// value is a value for a schema, wrong one time in five.
func (d *drawer) value(s *openapi3.Schema, depth int) any {
	if d.IntN(5) == 0 || depth > 4 {
		return pick(d.Rand, []any{nil, true, -1, 0, 1e300, "", "x", pick(d.Rand, oddities), []any{}, []any{[]any{1}}, map[string]any{}, map[string]any{"state": 1}})
	}
	switch {
	case len(s.Enum) > 0:
		return pick(d.Rand, s.Enum)
	case s.Type.Is("object"):
		m := map[string]any{}
		for name, p := range s.Properties {
			if slices.Contains(s.Required, name) || d.IntN(2) == 0 {
				m[name] = d.value(p.Value, depth+1)
			}
		}
		if d.IntN(12) == 0 {
			m["colour"] = "red"
		}
		return m
	case s.Format == "date-time":
		return fmt.Sprintf("2027-01-%02dT%02d:%02d:00Z", 1+d.IntN(31), d.IntN(24), d.IntN(60))
	case s.Type.Is("integer"):
		return d.IntN(1000)
	case s.Type.Is("number"):
		return d.ExpFloat64() * 100
	}
	return pick(d.Rand, oddities[:20])
}

// request draws a call of an operation.
func (d *drawer) request(method, path string, op *openapi3.Operation) (string, []byte, http.Header) {
	query, header := url.Values{}, http.Header{}
	for _, p := range op.Parameters {
		v := d.text(p.Value)
		switch {
		case p.Value.In == "path":
			path = strings.ReplaceAll(path, "{"+p.Value.Name+"}", url.PathEscape(v))
		case d.IntN(2) == 0:
		case p.Value.In == "query":
			query.Set(p.Value.Name, v)
		case p.Value.In == "header":
			header.Set(p.Value.Name, strings.Map(func(r rune) rune {
				if r < ' ' || r > '~' {
					return 'x'
				}
				return r
			}, v))
		}
	}
	if len(query) > 0 {
		path += "?" + query.Encode()
	}
	var body []byte
	if op.RequestBody != nil {
		body, _ = json.Marshal(d.value(op.RequestBody.Value.Content.Get("application/json").Schema.Value, 0)) // draws are all JSON
		switch d.IntN(8) {
		case 0:
			body = body[:d.IntN(len(body)+1)]
		case 1:
			body = []byte(pick(d.Rand, oddities))
		case 2:
			body = []byte(strings.Repeat("[", 20_000))
		}
	}
	return path, body, header
}

// Whatever is sent to the API, it answers what it describes, never with a
// fault, and tells nothing of its inside.
func TestAPIWithDrawnRequests(t *testing.T) {
	n := 600
	if os.Getenv("NIGHTLY") == "1" {
		n = 20_000
	} else if testing.Short() {
		n = 150
	}
	w := newWorld(t)
	b, err := w.srv.API().JSON()
	if err != nil {
		t.Fatal(err)
	}
	doc, err := openapi3.NewLoader().LoadFromData(b)
	if err != nil {
		t.Fatal(err)
	}
	type call struct {
		method, path string
		op           *openapi3.Operation
	}
	var calls []call
	for path, item := range doc.Paths.Map() {
		for method, op := range item.Operations() {
			calls = append(calls, call{method, path, op})
		}
	}
	slices.SortFunc(calls, func(a, b call) int { return strings.Compare(a.path+a.method, b.path+b.method) })
	ada, script := w.as(auth.RoleCoordinator), w.as(auth.RoleKey)
	plan := w.plan(ada, "2027-W03")
	if res, b := ada.do("POST", "/api/v1/plans/"+itoa(plan)+"/issue", nil, "If-Match", "*"); res.StatusCode != 200 {
		t.Fatalf("issue: %s %s", res.Status, b)
	}
	const seed = 20270118
	d := &drawer{rand.New(rand.NewPCG(seed, 1)), append(w.telescopes(), "NONE")}
	statuses := map[int]int{}
	for i := range n {
		c, who := calls[i%len(calls)], ada
		if i%3 == 0 {
			who = script
		}
		path, body, header := d.request(c.method, c.path, c.op)
		var flat []string
		for k, v := range header {
			flat = append(flat, k, v[0])
		}
		var sent any
		if body != nil {
			sent = string(body)
		}
		res, answer := who.do(c.method, path, sent, flat...)
		statuses[res.StatusCode]++
		leak := bytes.Contains(answer, []byte("SQLSTATE")) || bytes.Contains(answer, []byte(".go:")) || bytes.Contains(answer, []byte("pgx"))
		if res.StatusCode >= 500 || leak {
			t.Errorf("draw %d: %s %s %v %.300s: %s %s", i, c.method, path, header, body, res.Status, answer)
		}
		if t.Failed() {
			t.Fatalf("stopped at draw %d: %s %s %v %.300s", i, c.method, path, header, body)
		}
	}
	t.Logf("%d requests to %d operations, by status: %v; answers held against the description: %d", n, len(calls), statuses, w.api.checked)
	if statuses[200] == 0 || statuses[422] == 0 || statuses[404] == 0 {
		t.Errorf("the draws are of one sort only: %v", statuses)
	}
}
