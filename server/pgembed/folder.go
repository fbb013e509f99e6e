package pgembed

import (
	"context"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"syscall"
)

// What lies in a data folder:
//
//	owner.lock           held by the program that owns the server
//	data/                the cluster, with the mark that we made it
//	data.init-PID/       a cluster in the making
//	data.gone-PID/       a cluster being removed
//	run/                 the server's socket
//	postgres.log[.old]   what the server said in this run and the one before
const (
	lockName = "owner.lock"
	markName = "cadencewright.txt"
	mark     = "This Postgres cluster was made by cadencewright and is removed by its --reset.\n"
	logName  = "postgres.log"
)

// DefaultDir is where the private cluster lives if nobody says otherwise.
func DefaultDir() (string, error) {
	if os.Geteuid() == 0 {
		return "/var/lib/cadencewright", nil
	}
	if d := os.Getenv("XDG_DATA_HOME"); d != "" {
		return filepath.Join(d, "cadencewright"), nil
	}
	home, err := os.UserHomeDir()
	if err != nil {
		return "", fmt.Errorf("no folder for the data: %w; name one in CADENCEWRIGHT_DATA", err)
	}
	if runtime.GOOS == "darwin" {
		return filepath.Join(home, "Library", "Application Support", "cadencewright"), nil
	}
	return filepath.Join(home, ".local", "share", "cadencewright"), nil
}

// folder is the data folder as a whole path.
func folder(dir string) (string, error) {
	if dir == "" {
		var err error
		if dir, err = DefaultDir(); err != nil {
			return "", err
		}
	}
	abs, err := filepath.Abs(dir)
	if err != nil {
		return "", fmt.Errorf("data folder %s: %w", dir, err)
	}
	return abs, nil
}

// folderError is an error of the data folder, with the way out.
func folderError(dir string, err error) error {
	advice := "choose another folder with CADENCEWRIGHT_DATA"
	switch {
	case errors.Is(err, syscall.ENOSPC), errors.Is(err, syscall.EDQUOT):
		advice = "make room on the disk and start again"
	case errors.Is(err, context.Canceled):
		return err
	}
	return fmt.Errorf("data folder %s: %w; %s", dir, err, advice)
}

// claim checks that a folder is ours or can become ours: it does not exist yet,
// is empty, or was made by this package. A folder with anything else in it is
// somebody else's and is left alone, and so is a cluster that we did not make.
func claim(dir string) error {
	entries, err := os.ReadDir(dir)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nil
	case err != nil:
		return folderError(dir, err)
	}
	ours, others := false, ""
	for _, e := range entries {
		switch name := e.Name(); {
		case name == lockName:
			ours = true
		case name == "lost+found" || strings.HasPrefix(name, "."): // a disk of its own
		case others == "":
			others = name
		}
	}
	if !ours && others != "" {
		return folderError(dir, fmt.Errorf("it holds other things (%s) and is no data folder of this program", others))
	}
	return claimCluster(dir)
}

// claimCluster checks that a cluster in the folder was made by us.
func claimCluster(dir string) error {
	data := filepath.Join(dir, "data")
	entries, err := os.ReadDir(data)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nil
	case err != nil:
		return folderError(dir, err)
	case len(entries) == 0:
		return nil
	}
	if _, err := os.Stat(filepath.Join(data, markName)); errors.Is(err, fs.ErrNotExist) {
		return folderError(dir, errors.New("its folder data was not made by this program and is left alone"))
	} else if err != nil {
		return folderError(dir, err)
	}
	return nil
}

// Reset removes the cluster of a data folder, all of its data with it. It
// touches only what this package made there, and refuses while a program holds
// the folder or where the folder is not ours.
func Reset(dir string) error {
	dir, err := folder(dir)
	if err != nil {
		return err
	}
	if _, err := os.Stat(dir); errors.Is(err, fs.ErrNotExist) {
		return nil
	}
	if err := claim(dir); err != nil {
		return err
	}
	acct, err := accountFor(filepath.Join(dir, "data"))
	if err != nil {
		return err
	}
	c := &Cluster{dir: dir}
	if err := c.takeLock(); err != nil {
		return err
	}
	defer c.lock.Close()
	if c.socket, err = acct.socketDir(dir); err != nil {
		return err
	}
	if err := c.endOrphan(); err != nil {
		return err
	}
	return c.remove()
}

// remove takes the cluster away. It loses its name first: half of one must not
// look like a whole.
func (c *Cluster) remove() error {
	data := filepath.Join(c.dir, "data")
	if err := os.Rename(data, filepath.Join(c.dir, leftover("gone"))); err != nil && !errors.Is(err, fs.ErrNotExist) {
		return folderError(c.dir, err)
	}
	if err := c.sweep(); err != nil {
		return err
	}
	for _, d := range []string{filepath.Join(c.dir, "run"), filepath.Join(c.dir, logName), filepath.Join(c.dir, logName+".old"), c.socket} {
		if err := os.RemoveAll(d); err != nil {
			return folderError(c.dir, err)
		}
	}
	return nil
}

// leftover names a folder that a run which is killed leaves behind.
func leftover(what string) string { return fmt.Sprintf("data.%s-%d", what, os.Getpid()) }

// sweep removes what runs that were killed have left. The lock is ours, so
// nobody is at work on it.
func (c *Cluster) sweep() error {
	for _, pattern := range []string{"data.init-*", "data.gone-*"} {
		list, _ := filepath.Glob(filepath.Join(escapeGlob(c.dir), pattern)) // the pattern is well-formed
		for _, d := range list {
			if err := os.RemoveAll(d); err != nil {
				return folderError(c.dir, err)
			}
		}
	}
	return nil
}

func escapeGlob(s string) string {
	return strings.NewReplacer(`\`, `\\`, `*`, `\*`, `?`, `\?`, `[`, `\[`).Replace(s)
}
