package main

import (
	"bytes"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"cadencewright/scheduler"
)

func TestOutputAppearsWholeOrNotAtAll(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, "plan.json")
	if err := os.WriteFile(path, []byte("old"), 0o640); err != nil {
		t.Fatal(err)
	}
	o, err := openOutput(stdio{}, path)
	if err != nil {
		t.Fatal(err)
	}
	if got, _ := os.ReadFile(path); string(got) != "old" {
		t.Errorf("before commit the file holds %q, want what it held before", got)
	}
	if err := o.commit([]byte("new")); err != nil {
		t.Fatal(err)
	}
	o.discard() // as a deferred call would
	if got, _ := os.ReadFile(path); string(got) != "new" {
		t.Errorf("after commit the file holds %q", got)
	}
	if info, _ := os.Stat(path); info.Mode().Perm() != 0o640 {
		t.Errorf("permissions became %v, want those of the file replaced", info.Mode().Perm())
	}
	onlyFile(t, dir, "plan.json")
}

func TestOutputDiscarded(t *testing.T) {
	dir := t.TempDir()
	o, err := openOutput(stdio{}, filepath.Join(dir, "plan.json"))
	if err != nil {
		t.Fatal(err)
	}
	o.discard()
	if entries, _ := os.ReadDir(dir); len(entries) != 0 {
		t.Errorf("left behind: %v", entries)
	}
}

func TestOutputThroughALink(t *testing.T) {
	dir := t.TempDir()
	target, link := filepath.Join(dir, "real.json"), filepath.Join(dir, "link.json")
	if err := os.WriteFile(target, []byte("old"), 0o600); err != nil {
		t.Fatal(err)
	}
	if err := os.Symlink("real.json", link); err != nil {
		t.Fatal(err)
	}
	o, err := openOutput(stdio{}, link)
	if err != nil {
		t.Fatal(err)
	}
	if err := o.commit([]byte("new")); err != nil {
		t.Fatal(err)
	}
	if info, err := os.Lstat(link); err != nil || info.Mode()&os.ModeSymlink == 0 {
		t.Errorf("the link was replaced: %v, %v", info, err)
	}
	if got, _ := os.ReadFile(target); string(got) != "new" {
		t.Errorf("the target holds %q", got)
	}
}

func TestOutputErrors(t *testing.T) {
	dir := t.TempDir()
	tests := []struct{ name, path, want string }{
		{"a folder", dir, "it is a folder"},
		{"no such folder", filepath.Join(dir, "none", "plan.json"), "no such file or directory"},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			_, err := openOutput(stdio{}, tt.path)
			if err == nil || !strings.Contains(err.Error(), tt.want) || !strings.Contains(err.Error(), tt.path) {
				t.Errorf("got %v, want it to name %s and say %q", err, tt.path, tt.want)
			}
		})
	}
	t.Run("a full disk", func(t *testing.T) {
		if _, err := os.Stat("/dev/full"); err != nil {
			t.Skip("needs the device /dev/full, which Linux has")
		}
		o, err := openOutput(stdio{}, "/dev/full")
		if err != nil {
			t.Fatal(err)
		}
		if err := o.commit([]byte("{}")); err == nil || !strings.Contains(err.Error(), "no space left") {
			t.Errorf("got %v, want the disk to be full", err)
		}
	})
	t.Run("a disk that is lost", func(t *testing.T) {
		o, err := openOutput(stdio{}, filepath.Join(dir, "plan.json"))
		if err != nil {
			t.Fatal(err)
		}
		o.temp.Close() // the next write fails, as on a lost disk
		if err := o.commit([]byte("{}")); err == nil || !strings.Contains(err.Error(), "the file was not changed") {
			t.Errorf("got %v", err)
		}
		if entries, _ := os.ReadDir(dir); len(entries) != 0 {
			t.Errorf("left behind: %v", entries)
		}
	})
}

func TestOutputToStandardOutput(t *testing.T) {
	var out bytes.Buffer
	o, err := openOutput(stdio{out: &out}, "-")
	if err != nil {
		t.Fatal(err)
	}
	if err := o.commit([]byte("{}\n")); err != nil || out.String() != "{}\n" {
		t.Errorf("got %q, %v", out.String(), err)
	}
	o.discard()
}

func TestReadInput(t *testing.T) {
	dir := t.TempDir()
	std := stdio{in: strings.NewReader("from a pipe")}
	if got, err := readInput(std, "-"); err != nil || string(got) != "from a pipe" {
		t.Errorf("standard input: got %q, %v", got, err)
	}
	for path, want := range map[string]string{
		dir:                        "it is a folder",
		filepath.Join(dir, "gone"): "no such file",
	} {
		if _, err := readInput(std, path); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%s: got %v, want %q", path, err, want)
		}
	}
}

// TestTooMuchThroughAPipe has no size to look at before reading.
func TestTooMuchThroughAPipe(t *testing.T) {
	std := stdio{in: io.LimitReader(zeros{}, scheduler.MaxFileBytes+1)}
	if _, err := readInput(std, "-"); err == nil || !strings.Contains(err.Error(), "standard input is larger than 64 MiB") {
		t.Errorf("got %v", err)
	}
}

// zeros never ends.
type zeros struct{}

func (zeros) Read(p []byte) (int, error) {
	clear(p)
	return len(p), nil
}

// onlyFile fails unless the folder holds the one file.
func onlyFile(t *testing.T, dir, name string) {
	t.Helper()
	entries, err := os.ReadDir(dir)
	if err != nil || len(entries) != 1 || entries[0].Name() != name {
		t.Errorf("the folder holds %v (%v), want only %s", entries, err, name)
	}
}
