package auth

import (
	"errors"
	"fmt"
	"net/http/httptest"
	"sync"
	"sync/atomic"
	"testing"

	"cadencewright/scheduler"
)

func TestThrottleByName(t *testing.T) {
	a, _, c := people(t)
	try := func(name, password, addr string) error {
		_, err := a.SignIn(t.Context(), httptest.NewRecorder(), name, password, addr)
		return err
	}
	for i := range failuresPerName { // from everywhere
		if err := try("Ada", "a wrong password", fmt.Sprintf("192.0.2.%d", i)); !errors.Is(err, scheduler.ErrUnauthenticated) {
			t.Fatalf("try %d: %v", i, err)
		}
	}
	if err := try("ADA", password, "192.0.2.200"); !errors.Is(err, scheduler.ErrTooMany) {
		t.Errorf("the right password after too many wrong ones: %v", err)
	}
	if err := try("Bo", password, "192.0.2.200"); err != nil {
		t.Errorf("another person: %v", err)
	}
	c.pass(failuresWithin + 1)
	if err := try("Ada", password, "192.0.2.200"); err != nil {
		t.Errorf("after the wait: %v", err)
	}
}

func TestThrottleByAddress(t *testing.T) {
	a, _, _ := people(t)
	for i := range failuresPerAddr {
		if _, err := a.SignIn(t.Context(), httptest.NewRecorder(), fmt.Sprintf("guess %d", i), "x", "192.0.2.1"); !errors.Is(err, scheduler.ErrUnauthenticated) {
			t.Fatalf("try %d: %v", i, err)
		}
	}
	if _, err := a.SignIn(t.Context(), httptest.NewRecorder(), "Bo", password, "192.0.2.1"); !errors.Is(err, scheduler.ErrTooMany) {
		t.Errorf("from an address that guessed: %v", err)
	}
	if _, err := a.SignIn(t.Context(), httptest.NewRecorder(), "Bo", password, "192.0.2.2"); err != nil {
		t.Errorf("from another address: %v", err)
	}
}

// Who guesses many times at once gains only as many tries as there are slots.
func TestThrottleHoldsUnderHaste(t *testing.T) {
	a, _, _ := people(t)
	var wg sync.WaitGroup
	var checked atomic.Int32
	for range 60 {
		wg.Go(func() {
			_, err := a.SignIn(t.Context(), httptest.NewRecorder(), "Ada", "a wrong password", "192.0.2.1")
			switch {
			case errors.Is(err, scheduler.ErrUnauthenticated):
				checked.Add(1)
			case !errors.Is(err, scheduler.ErrTooMany):
				t.Errorf("%v", err)
			}
		})
	}
	wg.Wait()
	if n := int(checked.Load()); n > failuresPerName+cap(slots) {
		t.Errorf("%d passwords were tried, want at most %d", n, failuresPerName+cap(slots))
	}
}

// The hash that stands in for nobody is one that can be checked, and opens nothing.
func TestAbsentIsReal(t *testing.T) {
	if ok, err := check(absent(), ""); !ok || err != nil {
		t.Errorf("the hash of nobody is not one: %v, %v", ok, err)
	}
	a, _, _ := people(t)
	if _, err := a.SignIn(t.Context(), httptest.NewRecorder(), "Zoe", "", "192.0.2.1"); !errors.Is(err, scheduler.ErrUnauthenticated) {
		t.Errorf("nobody signs in with the password of nobody: %v", err)
	}
}
