package scheduler

import (
	"encoding/json"
	"errors"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
)

// campaignFiles are the campaigns kept for tests.
const campaignFiles = "../testdata/campaigns"

// readTestFile reads a file of the campaigns kept for tests.
func readTestFile(t testing.TB, name string) []byte {
	t.Helper()
	data, err := os.ReadFile(filepath.Join(campaignFiles, name))
	if err != nil {
		t.Fatal(err)
	}
	return data
}

// everyField is a small campaign that has every field of the format.
func everyField(t testing.TB) *Campaign {
	t.Helper()
	c, err := ReadCampaign(readTestFile(t, "every-field.json"))
	if err != nil {
		t.Fatal(err)
	}
	return c
}

// fataler is what helpers need of an ordinary test or of a property.
type fataler interface {
	Helper()
	Fatal(args ...any)
	Fatalf(format string, args ...any)
}

// unset, as a new value, takes a key away.
var unset = &struct{ string }{"unset"}

// edited is a document with one value set, by JSON Pointer. A last step of "-"
// appends to a list.
func edited(t fataler, document []byte, pointer string, value any) []byte {
	t.Helper()
	var root any
	if err := json.Unmarshal(document, &root); err != nil {
		t.Fatal(err)
	}
	steps := strings.Split(pointer, "/")[1:]
	for i := range steps {
		steps[i] = strings.NewReplacer("~1", "/", "~0", "~").Replace(steps[i])
	}
	root = set(t, root, steps, value)
	out, err := json.Marshal(root)
	if err != nil {
		t.Fatal(err)
	}
	return out
}

// set returns node with the value at the steps changed.
func set(t fataler, node any, steps []string, value any) any {
	t.Helper()
	if len(steps) == 0 {
		return value
	}
	switch n := node.(type) {
	case map[string]any:
		if len(steps) == 1 && value == unset {
			delete(n, steps[0])
			return n
		}
		n[steps[0]] = set(t, n[steps[0]], steps[1:], value)
		return n
	case []any:
		if steps[0] == "-" {
			return append(n, value)
		}
		i, err := strconv.Atoi(steps[0])
		if err != nil || i >= len(n) {
			t.Fatalf("no item %s in a list of %d", steps[0], len(n))
		}
		n[i] = set(t, n[i], steps[1:], value)
		return n
	}
	t.Fatalf("nothing at %v in %v", steps, node)
	return nil
}

// problemsOf is the list that an error must be.
func problemsOf(t testing.TB, err error) Problems {
	t.Helper()
	var p Problems
	if err == nil {
		t.Fatal("no error, problems expected")
	}
	if !errors.As(err, &p) {
		t.Fatalf("error %T %v, Problems expected", err, err)
	}
	return p
}

// pointers are the places of problems.
func pointers(p Problems) []string {
	var list []string
	for _, x := range p {
		list = append(list, x.Pointer)
	}
	return list
}
