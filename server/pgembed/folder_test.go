package pgembed

import (
	"errors"
	"os"
	"os/user"
	"path/filepath"
	"strconv"
	"strings"
	"syscall"
	"testing"
)

// put writes files into a folder, making folders as needed.
func put(t *testing.T, dir string, files ...string) {
	t.Helper()
	for _, f := range files {
		name := filepath.Join(dir, f)
		if err := os.MkdirAll(filepath.Dir(name), 0o755); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(name, []byte("15\n"), 0o644); err != nil {
			t.Fatal(err)
		}
	}
}

// Folders that are somebody else's are neither used nor reset.
func TestForeignFoldersAreLeftAlone(t *testing.T) {
	for _, x := range []struct {
		name  string
		files []string
		says  string
	}{
		{"a folder with other things", []string{"thesis.tex"}, "thesis.tex"},
		{"a system's own folder", []string{"run/lock", "lib/x", "log/y"}, "is no data folder of this program"},
		{"somebody's cluster", []string{"data/PG_VERSION", "data/base/1"}, "data"},
		{"somebody's cluster beside our lock", []string{lockName, "data/PG_VERSION", "data/pg_hba.conf"}, "was not made by this program"},
		{"somebody's data", []string{lockName, "data/measurements.csv"}, "was not made by this program"},
	} {
		dir := tempDir(t)
		put(t, dir, x.files...)
		_, err := Start(t.Context(), Options{Dir: dir, Unsafe: true})
		if err == nil || !strings.Contains(err.Error(), x.says) || !strings.Contains(err.Error(), "CADENCEWRIGHT_DATA") {
			t.Errorf("%s: start says %v", x.name, err)
		}
		if err := Reset(dir); err == nil || !strings.Contains(err.Error(), x.says) {
			t.Errorf("%s: reset says %v", x.name, err)
		}
		for _, f := range x.files {
			if b, err := os.ReadFile(filepath.Join(dir, f)); err != nil || string(b) != "15\n" {
				t.Errorf("%s: %s is now %q, %v", x.name, f, b, err)
			}
		}
		if info, err := os.Stat(dir); err != nil || info.Mode().Perm() != 0o755 || info.Sys().(*syscall.Stat_t).Uid != uint32(os.Geteuid()) {
			t.Errorf("%s: the folder itself was changed", x.name)
		}
	}
}

// A disk of its own has a folder lost+found, and people have hidden files.
func TestEmptyFoldersAreTaken(t *testing.T) {
	dir := tempDir(t)
	put(t, dir, ".hidden", "lost+found/x")
	if err := os.Mkdir(filepath.Join(dir, "data"), 0o755); err != nil {
		t.Fatal(err)
	}
	if err := claim(dir); err == nil {
		t.Error("a folder data without our lock is taken for ours")
	}
	if err := os.Remove(filepath.Join(dir, "data")); err != nil {
		t.Fatal(err)
	}
	c := start(t, dir)
	if got := query(t, c, "select 'made'"); got != "made" {
		t.Errorf("got %q", got)
	}
}

// What a start that was killed has left of a cluster is cleared away.
func TestHalfMadeClusterIsSwept(t *testing.T) {
	dir := tempDir(t)
	put(t, dir, lockName, "data.init-4711/PG_VERSION", "data.gone-4712/PG_VERSION")
	c := start(t, dir)
	if got := query(t, c, "select 'whole'"); got != "whole" {
		t.Errorf("got %q", got)
	}
	for _, f := range []string{"data.init-4711", "data.gone-4712"} {
		if _, err := os.Stat(filepath.Join(dir, f)); !errors.Is(err, os.ErrNotExist) {
			t.Errorf("%s is still there", f)
		}
	}
}

func TestReset(t *testing.T) {
	dir := madeDir(t)
	c := start(t, dir)
	if err := c.Stop(); err != nil {
		t.Fatal(err)
	}
	mine := filepath.Join(dir, "notes.txt")
	if err := os.WriteFile(mine, []byte("keep"), 0o600); err != nil {
		t.Fatal(err)
	}
	for range 2 { // the second time there is nothing to do
		if err := Reset(dir); err != nil {
			t.Fatal(err)
		}
	}
	for _, f := range []string{"data", "run", logName} {
		if _, err := os.Stat(filepath.Join(dir, f)); !errors.Is(err, os.ErrNotExist) {
			t.Errorf("%s is still there", f)
		}
	}
	if _, err := os.Stat(mine); err != nil {
		t.Error("reset removed a file that is not its own")
	}
	if err := Reset(filepath.Join(dir, "nowhere")); err != nil {
		t.Errorf("reset of nothing: %v", err)
	}
	if left, err := os.ReadDir(dir); err != nil || len(left) != 2 {
		t.Errorf("left behind: %v, %v", left, err)
	}
}

// On a full disk the message says so, and nothing half-made stays.
func TestFullDisk(t *testing.T) {
	needPostgres(t)
	needRoot(t)
	dir := tempDir(t)
	if err := mount(dir, "8m"); err != nil {
		t.Skipf("cannot make a small disk to fill (%v): run this test where mounting is allowed", err)
	}
	t.Cleanup(func() { _ = syscall.Unmount(dir, 0) })
	_, err := Start(t.Context(), Options{Dir: dir, Unsafe: true})
	if !errors.Is(err, syscall.ENOSPC) || !strings.Contains(err.Error(), "make room on the disk") {
		t.Errorf("on a full disk: %v", err)
	}
	if left, _ := filepath.Glob(filepath.Join(dir, "data*")); len(left) > 0 {
		t.Errorf("left behind: %v", left)
	}
}

// Everything that cannot be is one clear message that says what to do.
func TestRefusals(t *testing.T) {
	needPostgres(t)
	dir := tempDir(t)
	put(t, dir, "file", "old/"+lockName, "old/data/PG_VERSION", "old/data/"+markName, "odd/"+lockName, "odd/data/PG_VERSION", "odd/data/"+markName)
	for name, version := range map[string]string{"old": "9.6\n", "odd": "fifteen\n"} {
		if err := os.WriteFile(filepath.Join(dir, name, "data", "PG_VERSION"), []byte(version), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	for _, x := range []struct {
		name string
		o    Options
		says []string
	}{
		{"a folder without programs", Options{Dir: filepath.Join(dir, "new"), BinDir: dir}, []string{"CADENCEWRIGHT_PG_BIN", "initdb"}},
		{"a folder inside a file", Options{Dir: filepath.Join(dir, "file", "sub")}, []string{"file", "CADENCEWRIGHT_DATA"}},
		{"a file", Options{Dir: filepath.Join(dir, "file")}, []string{"file", "CADENCEWRIGHT_DATA"}},
		{"a cluster of a version that is not there", Options{Dir: filepath.Join(dir, "old")}, []string{"Postgres 9", "pg_dump"}},
		{"a cluster of no version", Options{Dir: filepath.Join(dir, "odd")}, []string{"fifteen"}},
	} {
		_, err := Start(t.Context(), x.o)
		if err == nil {
			t.Errorf("%s: started", x.name)
			continue
		}
		for _, s := range x.says {
			if !strings.Contains(err.Error(), s) || strings.Contains(err.Error(), "\n") {
				t.Errorf("%s: %q does not say %q in one line", x.name, err, s)
			}
		}
	}
	if _, err := os.Stat(filepath.Join(dir, "new")); !errors.Is(err, os.ErrNotExist) {
		t.Error("a start without programs made a folder")
	}
}

// Without Postgres the message names all three ways out.
func TestNoBinaries(t *testing.T) {
	kept := globs
	t.Cleanup(func() { globs = kept })
	globs = nil
	t.Setenv("PATH", t.TempDir())
	dir := filepath.Join(tempDir(t), "new")
	_, err := Start(t.Context(), Options{Dir: dir})
	if !errors.Is(err, ErrNoBinaries) {
		t.Fatalf("without programs: %v", err)
	}
	for _, way := range []string{"apt-get install postgresql", "brew install postgresql", "DATABASE_URL", "CADENCEWRIGHT_PG_BIN"} {
		if !strings.Contains(err.Error(), way) {
			t.Errorf("%q does not name %q", err, way)
		}
	}
	if _, err := os.Stat(dir); !errors.Is(err, os.ErrNotExist) {
		t.Error("a folder was made")
	}
}

// uidOf is the number of a user of the system.
func uidOf(t *testing.T, name string) int {
	t.Helper()
	u, err := user.Lookup(name)
	if err != nil {
		t.Skipf("no user %s: add one to run this test", name)
	}
	uid, err := strconv.Atoi(u.Uid)
	if err != nil {
		t.Fatal(err)
	}
	return uid
}

// The same as another user than root: it works in a folder of theirs, and says
// what to do in one that is not, and for a user that the system does not know.
func TestOtherUsers(t *testing.T) {
	needPostgres(t)
	needRoot(t)
	nobody := uidOf(t, "nobody")
	theirs, ours, unknowns := tempDir(t), tempDir(t), tempDir(t)
	if err := errors.Join(os.Chown(theirs, nobody, nobody), os.Chown(unknowns, 54321, 54321)); err != nil {
		t.Fatal(err)
	}
	p := begin(t, "hold", theirs, nobody)
	if s := p.says(t); s != "ready true" {
		t.Fatalf("user nobody in a folder of their own: %q", s)
	}
	pid := serverOf(t, theirs)
	p.kill(t)
	awaitEnd(t, theirs, pid)
	// Root takes the folder over as its owner's, not as its own.
	c := start(t, theirs)
	info, err := os.Stat(filepath.Join("/proc", strconv.Itoa(serverOf(t, theirs))))
	if err == nil && info.Sys().(*syscall.Stat_t).Uid != uint32(nobody) {
		t.Errorf("the server runs as user %d, want %d", info.Sys().(*syscall.Stat_t).Uid, nobody)
	}
	if got := query(t, c, "select 'root may'"); got != "root may" {
		t.Errorf("got %q", got)
	}
	for _, x := range []struct {
		name, dir string
		uid       int
		says      []string
	}{
		{"a folder that may not be written", filepath.Join(ours, "sub"), nobody, []string{"permission denied", "CADENCEWRIGHT_DATA"}},
		{"a user that is not known", unknowns, 54321, []string{"54321", "DATABASE_URL"}},
	} {
		says := begin(t, "try", x.dir, x.uid).says(t)
		for _, s := range x.says {
			if !strings.Contains(says, s) {
				t.Errorf("%s: %q does not say %q", x.name, says, s)
			}
		}
	}
}

// Root may keep its data where the server's account cannot come.
func TestFolderOutOfReach(t *testing.T) {
	needPostgres(t)
	needRoot(t)
	dir := tempDir(t)
	hidden := filepath.Join(dir, "hidden")
	if err := os.Mkdir(hidden, 0o700); err != nil {
		t.Fatal(err)
	}
	for _, d := range []string{hidden, filepath.Join(hidden, "data")} {
		_, err := Start(t.Context(), Options{Dir: d})
		if err == nil || !strings.Contains(err.Error(), "may not pass "+hidden) || !strings.Contains(err.Error(), "CADENCEWRIGHT_DATA") {
			t.Errorf("%s: %v", d, err)
		}
	}
	if left, _ := os.ReadDir(hidden); len(left) > 0 {
		t.Errorf("left behind: %v", left)
	}
}

// A folder for sockets that somebody else has put into /tmp is not used.
func TestSocketFolderOfSomebodyElse(t *testing.T) {
	needRoot(t)
	a := account{uid: uidOf(t, "nobody"), gid: uidOf(t, "nobody"), name: "nobody", other: true}
	long := filepath.Join("/", strings.Repeat("long", 30), strconv.Itoa(os.Getpid()))
	dir, err := a.socketDir(long)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { os.RemoveAll(dir) })
	if again, err := a.socketDir(long); err != nil || again != dir {
		t.Errorf("a second time: %s, %v", again, err)
	}
	for name, change := range map[string]func() error{
		"another's":    func() error { return os.Chown(dir, 12345, 12345) },
		"open to all":  func() error { return errors.Join(os.Chown(dir, a.uid, a.gid), os.Chmod(dir, 0o777)) },
		"not a folder": func() error { return errors.Join(os.Remove(dir), os.WriteFile(dir, nil, 0o700)) },
	} {
		if err := change(); err != nil {
			t.Fatal(err)
		}
		if name == "not a folder" {
			continue // checked below, last
		}
		if _, err := a.socketDir(long); err == nil {
			t.Errorf("a folder that is %s is used", name)
		}
	}
}
