package api

import (
	"context"
	"errors"
	"fmt"
	"io"
	"net/http"
	"strconv"
	"strings"
	"testing"

	"github.com/danielgtaylor/huma/v2"
	"pgregory.net/rapid"

	"cadencewright/scheduler"
	"cadencewright/server/logline"
	"cadencewright/server/store"
)

func TestPointer(t *testing.T) {
	for in, want := range map[string]string{"body": "", "body.state": "/state", "body.a[3].b": "/a/3/b", "path.id": "id", "query.from": "from",
		"header.Idempotency-Key": "Idempotency-Key", "": "", "other.thing": "/other/thing"} {
		if got := pointer(in); got != want {
			t.Errorf("%q becomes %q, want %q", in, got, want)
		}
	}
}

func TestMatches(t *testing.T) {
	for _, c := range []struct {
		header, tag string
		want        bool
	}{{"", `"a"`, false}, {`"a"`, `"a"`, true}, {`W/"a"`, `"a"`, true}, {`"b", "a"`, `"a"`, true}, {`"b"`, `"a"`, false}, {"*", `"a"`, true}, {"a", `"a"`, false}} {
		if got := matches(c.header, c.tag); got != c.want {
			t.Errorf("%q against %q: %v", c.header, c.tag, got)
		}
	}
}

func TestWantedVersion(t *testing.T) {
	for header, want := range map[string]int64{`"3"`: 3, `W/"3"`: 3, `3`: 3, "*": 9, `"x", "4"`: 4, `"x"`: -1, `"-3"`: -1, `"0"`: -1, `""`: -1, `"99999999999999999999"`: -1} {
		if got := wantedVersion(header, 9); got != want {
			t.Errorf("If-Match %s wants %d, want %d", header, got, want)
		}
	}
}

// What the library finds wrong is answered in our words and kinds.
func TestLibraryProblems(t *testing.T) {
	detail := &huma.ErrorDetail{Location: "body.state", Message: "expected one of"}
	for _, c := range []struct {
		status int
		errs   []error
		want   int
		kind   string
		field  string
	}{
		{422, []error{detail}, 422, "invalid", "/state"},
		{400, []error{&huma.ErrorDetail{Location: "body", Message: "unexpected end"}}, 400, "malformed", ""},
		{413, nil, 413, "too-large", ""},
		{415, nil, 415, "media-type", ""},
		{408, nil, 400, "malformed", ""},
		{406, nil, 400, "malformed", ""},
		{500, []error{io.ErrUnexpectedEOF}, 400, "malformed", ""},
		{500, []error{&http.MaxBytesError{Limit: 10}}, 413, "too-large", ""},
		{500, []error{errors.New("secret words")}, 500, "fault", ""},
	} {
		l := &logline.Line{ID: "r9"}
		p := libraryProblem(logline.With(context.Background(), l), c.status, "words", c.errs).(*statusProblem)
		if p.GetStatus() != c.want || !strings.HasSuffix(p.Type, "#"+c.kind) || p.Instance != "r9" {
			t.Errorf("%d %v: %+v", c.status, c.errs, p.Problem)
		}
		if c.field != "" && (len(p.Errors) != 1 || p.Errors[0].Pointer != c.field) {
			t.Errorf("%d: fields %v, want %s", c.status, p.Errors, c.field)
		}
		if strings.Contains(fmt.Sprint(p.Problem), "secret") {
			t.Errorf("%d tells the client %+v", c.status, p.Problem)
		}
		if l.Err() == nil {
			t.Errorf("%d leaves nothing in the log", c.status)
		}
	}
}

func TestFail(t *testing.T) {
	for _, c := range []struct {
		err    error
		status int
		header string
	}{
		{scheduler.Errorf(scheduler.ErrUnavailable, "away"), 503, "Retry-After"},
		{scheduler.Errorf(scheduler.ErrTooMany, "slower"), 429, "Retry-After"},
		{&store.StaleError{What: "plan 1", Current: 2}, 412, "Cache-Control"},
		{errors.New("secret words"), 500, "Cache-Control"},
	} {
		l := &logline.Line{}
		err := fail(logline.With(context.Background(), l), c.err)
		var p huma.StatusError
		var h huma.HeadersError
		if !errors.As(err, &p) || p.GetStatus() != c.status || !errors.As(err, &h) || h.GetHeaders().Get(c.header) == "" {
			t.Errorf("%v: %v", c.err, err)
		}
		if strings.Contains(err.Error(), "secret") || l.Err() != c.err {
			t.Errorf("%v: the client learns %q, the log %v", c.err, err, l.Err())
		}
	}
}

// Whatever the list and the page size, the pages together are the list.
func TestPagesAreTheList(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		all := rapid.SliceOfNDistinct(rapid.IntRange(0, 999), 0, 40, rapid.ID[int]).Draw(t, "all")
		p := PageInput{Limit: rapid.IntRange(1, 12).Draw(t, "limit")}
		key := func(n *int) string { return strconv.Itoa(*n) }
		var got []int
		for range 50 {
			page, err := pageOf(all, p, key, nil)
			if err != nil || len(page.Items) > p.Limit || page.Items == nil {
				t.Fatalf("%v, %v", page, err)
			}
			got = append(got, page.Items...)
			if page.Next == "" {
				break
			}
			p.Cursor = page.Next
		}
		if fmt.Sprint(got) != fmt.Sprint(all) && len(all) > 0 {
			t.Fatalf("the pages give %v, want %v", got, all)
		}
	})
}

func TestCursors(t *testing.T) {
	all := []int{9, 7, 5, 3}
	key := func(n *int) string { return strconv.Itoa(*n) }
	below := func(n *int, key string) bool { k, err := strconv.Atoi(key); return err == nil && *n < k }
	for _, c := range []struct {
		name, cursor string
		past         func(*int, string) bool
		want         string
		bad          bool
	}{
		{"none", "", nil, "[9 7]", false},
		{"after an entry", cursorOf("7"), nil, "[5 3]", false},
		{"after the last", cursorOf("3"), nil, "[]", false},
		{"after one that is gone", cursorOf("6"), nil, "", true},
		{"after one that is gone, in an order that is known", cursorOf("6"), below, "[5 3]", false},
		{"after all of them", cursorOf("1"), below, "[]", false},
		{"not ours", "MTIz", nil, "", true},
		{"not even base64", "%%%", nil, "", true},
	} {
		page, err := pageOf(all, PageInput{Limit: 2, Cursor: c.cursor}, key, c.past)
		if c.bad != (err != nil) || err == nil && fmt.Sprint(page.Items) != c.want {
			t.Errorf("%s: %v, %v", c.name, page.Items, err)
		}
		if err != nil && !errors.Is(err, scheduler.ErrInvalid) {
			t.Errorf("%s: %v is of another kind", c.name, err)
		}
	}
}

func FuzzCursor(f *testing.F) {
	f.Add(cursorOf("7"))
	f.Add("")
	f.Fuzz(func(t *testing.T, cursor string) {
		page, err := pageOf([]int{1, 2, 3}, PageInput{Cursor: cursor}, func(n *int) string { return strconv.Itoa(*n) }, nil)
		if err == nil && page.Items == nil {
			t.Error("a page without a list")
		}
	})
}
