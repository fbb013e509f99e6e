package archtest

import (
	"bytes"
	"encoding/json"
	"errors"
	"io"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
)

type listed struct {
	ImportPath string
	Imports    []string
	GoFiles    []string
	Module     struct{ Path string }
	Dir        string
}

// packages lists the module's packages with their imports.
func packages(t *testing.T) []listed {
	t.Helper()
	cmd := exec.Command("go", "list", "-json=ImportPath,Imports,GoFiles,Module,Dir", "./...")
	cmd.Dir = moduleRoot(t)
	out, err := cmd.Output()
	var exit *exec.ExitError
	if errors.As(err, &exit) {
		t.Fatalf("go list: %v\n%s", err, exit.Stderr)
	} else if err != nil {
		t.Fatal(err)
	}
	var all []listed
	for dec := json.NewDecoder(bytes.NewReader(out)); ; {
		var p listed
		err := dec.Decode(&p)
		if errors.Is(err, io.EOF) {
			return all
		}
		if err != nil {
			t.Fatal(err)
		}
		all = append(all, p)
	}
}

func moduleRoot(t *testing.T) string {
	t.Helper()
	out, err := exec.Command("go", "env", "GOMOD").Output()
	if err != nil {
		t.Fatal(err)
	}
	return filepath.Dir(strings.TrimSpace(string(out)))
}

func TestImportsFollowTheArchitecture(t *testing.T) {
	all := packages(t)
	if len(all) < 10 {
		t.Fatalf("only %d packages found: the list is not the module", len(all))
	}
	for _, p := range all {
		for _, v := range Violations(p.Module.Path, p.ImportPath, p.Imports) {
			t.Error(v)
		}
	}
}

// The rules themselves must be able to fail.
func TestViolations(t *testing.T) {
	const m = "cadencewright"
	for _, c := range []struct {
		pkg, imp string
		bad      bool
	}{
		{"scheduler/verify", m + "/scheduler", false},
		{"scheduler/verify", m + "/scheduler/solve", true},
		{"scheduler/verify", m + "/scheduler/almanac", true},
		{"scheduler/solve", m + "/scheduler/feasible", false},
		{"scheduler", "time", false},
		{"scheduler", "os", true},
		{"astro/sky", "math/rand/v2", true},
		{"scheduler/solve", "math/rand/v2", false},
		{"astro/sky", m + "/scheduler", true},
		{"web/page", m + "/scheduler", true},
		{"web/page", "github.com/a-h/templ", false},
		{"server/pages", "github.com/a-h/templ", true},
		{"server/pages", m + "/web/view", false},
		{"server/pages", m + "/server/api", true},
		{"server/planning", "github.com/jackc/pgx/v5", true},
		{"server/store", "github.com/jackc/pgx/v5/pgxpool", false},
		{"astro/sky", "github.com/soniakeys/meeus/v3/solar", true},
		{"astro/internal/meeus", "github.com/soniakeys/meeus/v3/solar", false},
		{"astro/sky", "C", true},
		{"server", m + "/cmd/cadencewright", true},
		{"nowhere", "time", true},
	} {
		got := Violations(m, m+"/"+c.pkg, []string{c.imp})
		if (len(got) > 0) != c.bad {
			t.Errorf("%s imports %s: got %q, want a violation: %v", c.pkg, c.imp, got, c.bad)
		}
	}
}
