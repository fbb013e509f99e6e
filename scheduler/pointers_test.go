package scheduler

import (
	"encoding/json"
	"strconv"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

// resolve follows a JSON Pointer (RFC 6901) into a document. parent reports
// whether the place it names is in an object or list that exists, so that a
// missing key has a place too.
func resolve(root any, pointer string) (value any, exists, parent bool) {
	value, exists, parent = root, true, true
	if pointer == "" {
		return value, true, true
	}
	if pointer[0] != '/' {
		return nil, false, false
	}
	for _, step := range strings.Split(pointer[1:], "/") {
		step = strings.ReplaceAll(strings.ReplaceAll(step, "~1", "/"), "~0", "~")
		parent = exists
		switch node := value.(type) {
		case map[string]any:
			value, exists = node[step]
		case []any:
			i, err := strconv.Atoi(step)
			if exists = err == nil && i >= 0 && i < len(node) && strconv.Itoa(i) == step; exists {
				value = node[i]
			}
		default:
			return nil, false, false
		}
	}
	return value, exists, parent
}

func TestResolve(t *testing.T) {
	var root any
	if err := json.Unmarshal([]byte(`{"a/b": [{"~": 1}, 2], "": 3}`), &root); err != nil {
		t.Fatal(err)
	}
	for _, x := range []struct {
		pointer        string
		exists, parent bool
	}{
		{"", true, true}, {"/a~1b", true, true}, {"/a~1b/0/~0", true, true}, {"/a~1b/1", true, true},
		{"/a~1b/2", false, true}, {"/a~1b/01", false, true},
		{"/", true, true}, {"/absent", false, true}, {"/absent/x", false, false}, {"/a~1b/1/x", false, false},
		{"a", false, false},
	} {
		if _, exists, parent := resolve(root, x.pointer); exists != x.exists || parent != x.parent {
			t.Errorf("%q: exists %v, parent %v", x.pointer, exists, parent)
		}
	}
}

// Every problem of a broken file is at a place of that file: one that exists,
// or a key missing from an object that exists. Messages are one line and never
// empty, and no problem is told twice.
func TestProblemsPointIntoTheFile(t *testing.T) {
	f := formats(t)[0]
	all := visits(t, f)
	values := []any{-1.0, 1e9, 0.3, "", "nobody", "ALT#1", nil, unset, true, []any{}, []any{"L", "L"}, []any{1.0},
		[]any{nil}, map[string]any{}, map[string]any{"a/b~c": 1.0},
		"2027-01-05T00:00:00Z", "1900-01-01T00:00:00Z"}
	broken := 0
	rapid.Check(t, func(t *rapid.T) {
		document := f.document
		var places []string
		for range rapid.IntRange(1, 6).Draw(t, "changes") {
			v := rapid.SampledFrom(all).Draw(t, "key")
			clash := false
			for _, p := range places {
				clash = clash || strings.HasPrefix(p+"/", v.pointer+"/") || strings.HasPrefix(v.pointer+"/", p+"/")
			}
			if !clash {
				places = append(places, v.pointer)
				document = edited(t, document, v.pointer, rapid.SampledFrom(values).Draw(t, "value"))
			}
		}
		_, err := ReadCampaign(document)
		if err == nil {
			return
		}
		broken++
		var root any
		if err := json.Unmarshal(document, &root); err != nil {
			t.Fatal(err)
		}
		seen := map[Problem]bool{}
		for _, p := range err.(Problems) { //nolint:errorlint // ReadCampaign returns nothing else
			_, exists, parent := resolve(root, p.Pointer)
			if !exists && (!parent || !strings.Contains(p.Message, "is missing")) {
				t.Fatalf("the problem %q has no place in the file:\n%s", p, document)
			}
			if p.Message == "" || strings.ContainsAny(p.Message, "\n\r") || strings.Contains(p.Message, "%!") {
				t.Fatalf("the message at %s is %q", p.Pointer, p.Message)
			}
			if seen[p] {
				t.Fatalf("the problem %q is told twice", p)
			}
			seen[p] = true
		}
	})
	if broken < 20 {
		t.Errorf("only %d broken files were tried", broken)
	}
}

// A place with a wrong value of its own is told once: rules between values do
// not add a second problem to it.
func TestOnePlaceHasOneProblem(t *testing.T) {
	f := formats(t)[0]
	for _, v := range visits(t, f) {
		for _, value := range []any{-1e9, 1e9, "nobody", []any{}, []any{"x", "x"}, []any{9.0, 9.0}} {
			_, err := ReadCampaign(edited(t, f.document, v.pointer, value))
			if err == nil {
				continue
			}
			n := map[string]int{}
			for _, p := range problemsOf(t, err) {
				if n[p.Pointer]++; n[p.Pointer] > 1 {
					t.Errorf("%s = %v: two problems at %s\n%v", v.pointer, value, p.Pointer, err)
				}
			}
		}
	}
}
