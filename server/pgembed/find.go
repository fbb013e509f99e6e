package pgembed

import (
	"context"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"time"
)

// minMajor is the oldest Postgres that works: 14 brought multirange types and
// the lock behaviour that the job queue relies on.
const minMajor = 14

// ErrNoBinaries says that no Postgres server is installed where one could be
// found, and names the ways out.
var ErrNoBinaries = errors.New("no Postgres server programs found (initdb and postgres, version 14 or newer). " +
	"Install them (Debian, Ubuntu: apt-get install postgresql; macOS: brew install postgresql@17), " +
	"or name their folder in CADENCEWRIGHT_PG_BIN, or name a running server in DATABASE_URL")

// binaries is a folder with the server's programs.
type binaries struct {
	dir   string
	major int
}

// globs are where packages put the programs; the newest version is taken.
var globs = []string{
	"/usr/lib/postgresql/*/bin", "/usr/pgsql-*/bin", "/usr/libexec/postgresql*",
	"/opt/homebrew/opt/postgresql@*/bin", "/usr/local/opt/postgresql@*/bin",
	"/Applications/Postgres.app/Contents/Versions/*/bin",
}

// find looks for the programs: in the named folder only, if one is named, else
// in PATH, by pg_config and where packages put them. A cluster that exists
// fixes the version.
func find(named string, clusterMajor int) (binaries, error) {
	if named != "" {
		b, err := inspect(named)
		if err != nil {
			return b, fmt.Errorf("CADENCEWRIGHT_PG_BIN: %w", err)
		}
		if clusterMajor != 0 && b.major != clusterMajor {
			return b, fmt.Errorf("CADENCEWRIGHT_PG_BIN: %s holds Postgres %d, but the data folder was made by Postgres %d", named, b.major, clusterMajor)
		}
		return b, nil
	}
	var found []binaries
	for _, dir := range candidates() {
		if b, err := inspect(dir); err == nil && b.major >= minMajor {
			found = append(found, b)
		}
	}
	slices.SortStableFunc(found, func(a, b binaries) int { return b.major - a.major })
	for _, b := range found {
		if clusterMajor == 0 || b.major == clusterMajor {
			return b, nil
		}
	}
	if clusterMajor != 0 && len(found) > 0 {
		return binaries{}, fmt.Errorf("the data folder was made by Postgres %d, which is not installed (found: %d); install that version, or move the data with pg_dump", clusterMajor, found[0].major)
	}
	return binaries{}, ErrNoBinaries
}

func candidates() []string {
	var dirs []string
	if p, err := exec.LookPath("postgres"); err == nil {
		if real, err := filepath.EvalSymlinks(p); err == nil {
			dirs = append(dirs, filepath.Dir(real))
		}
	}
	if out, err := run("pg_config", "--bindir"); err == nil {
		dirs = append(dirs, out)
	}
	for _, g := range globs {
		m, _ := filepath.Glob(g) // the patterns are well-formed
		dirs = append(dirs, m...)
	}
	return dirs
}

// inspect checks that a folder holds both programs and asks for their version.
func inspect(dir string) (binaries, error) {
	for _, name := range []string{"initdb", "postgres"} {
		if _, err := os.Stat(filepath.Join(dir, name)); err != nil {
			return binaries{}, fmt.Errorf("%s holds no %s", dir, name)
		}
	}
	out, err := run(filepath.Join(dir, "postgres"), "--version")
	if err != nil {
		return binaries{}, fmt.Errorf("%s: %w", filepath.Join(dir, "postgres"), err)
	}
	for _, f := range strings.Fields(out) {
		if n, err := strconv.Atoi(strings.SplitN(f, ".", 2)[0]); err == nil {
			return binaries{dir, n}, nil
		}
	}
	return binaries{}, fmt.Errorf("%s says its version is %q", dir, out)
}

// toolTimeout bounds the programs that only say something.
const toolTimeout = 10 * time.Second

// run runs a program that says one line.
func run(name string, args ...string) (string, error) {
	ctx, cancel := context.WithTimeout(context.Background(), toolTimeout)
	defer cancel()
	out, err := exec.CommandContext(ctx, name, args...).Output()
	return strings.TrimSpace(string(out)), err
}

// clusterMajor is the version that made a data folder; 0 where there is none.
func clusterMajor(data string) (int, error) {
	b, err := os.ReadFile(filepath.Join(data, "PG_VERSION"))
	if errors.Is(err, os.ErrNotExist) {
		return 0, nil
	}
	if err != nil {
		return 0, err
	}
	n, err := strconv.Atoi(strings.SplitN(strings.TrimSpace(string(b)), ".", 2)[0])
	if err != nil {
		return 0, fmt.Errorf("%s: not a Postgres version: %q", filepath.Join(data, "PG_VERSION"), b)
	}
	return n, nil
}
