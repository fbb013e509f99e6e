package logline

import (
	"context"
	"errors"
	"fmt"
	"log/slog"
	"strings"
	"sync"
	"testing"

	"cadencewright/scheduler"
)

// get is a value of the line as it would be written.
func get(l *Line, name string) string {
	for _, a := range l.Attrs() {
		if a.Key == name {
			return a.Value.String()
		}
	}
	return ""
}

func TestLineIsFilledInOnTheWay(t *testing.T) {
	l := &Line{ID: "r1"}
	ctx := With(context.Background(), l)
	inner, cancel := context.WithCancel(ctx)
	defer cancel()
	From(inner).Set("telescope", "BRM")
	From(inner).SetActor("ada")
	for name, want := range map[string]string{"request": "r1", "actor": "ada", "telescope": "BRM", "error": ""} {
		if got := get(l, name); got != want {
			t.Errorf("%s is %q, want %q", name, got, want)
		}
	}
	first := errors.New("first")
	From(inner).Fail(first)
	From(inner).Fail(errors.New("second"))
	if l.Err() != first || get(l, "error") != "first" {
		t.Errorf("the error is %v, want the first one", l.Err())
	}
}

func TestOutsideOfARequest(t *testing.T) {
	l := From(context.Background())
	l.Set("telescope", "BRM") // must not panic, and reaches nobody
	if got := get(From(context.Background()), "telescope"); got != "" {
		t.Errorf("two lines share a value: %q", got)
	}
}

func TestManyAtOnce(t *testing.T) {
	l := &Line{}
	var wg sync.WaitGroup
	for i := range 20 {
		wg.Go(func() {
			l.Set("n", i)
			l.Fail(fmt.Errorf("error %d", i))
			l.Attrs()
		})
	}
	wg.Wait()
	n := 0
	for _, a := range l.Attrs() {
		if a.Key == "n" && a.Value.Kind() == slog.KindInt64 {
			n++
		}
	}
	if n != 20 || l.Err() == nil {
		t.Errorf("%d values and the error %v, want 20 and one", n, l.Err())
	}
}

// hidden has a text for the client and a cause for the log.
type hidden struct{ cause error }

func (h hidden) Error() string   { return "the database is away" }
func (h hidden) Unwrap() []error { return []error{scheduler.ErrUnavailable, h.cause} }

func TestTheLogTellsTheCauses(t *testing.T) {
	for _, c := range []struct {
		name string
		err  error
		want string
	}{
		{"plain", errors.New("a"), "a"},
		{"wrapped in its text", fmt.Errorf("load: %w", errors.New("refused")), "load: refused"},
		{"hidden from the client", fmt.Errorf("load: %w", hidden{errors.New("dial 10.0.0.1: refused")}),
			"load: the database is away; caused by: unavailable; caused by: dial 10.0.0.1: refused"},
	} {
		l := &Line{}
		l.Fail(c.err)
		if got := get(l, "error"); got != c.want {
			t.Errorf("%s: %q, want %q", c.name, got, c.want)
		}
	}
}

// deep is an error without end.
type deep struct{}

func (deep) Error() string   { return "deep" }
func (d deep) Unwrap() error { return fmt.Errorf("one more %p: %w", new(int), d) }

func TestAnErrorWithoutEnd(t *testing.T) {
	l := &Line{}
	l.Fail(deep{})
	if got := get(l, "error"); strings.Count(got, "caused by") > maxCauses {
		t.Errorf("%d causes, want at most %d", strings.Count(got, "caused by"), maxCauses)
	}
}
