package pgembed

import (
	"errors"
	"fmt"
	"os"
	"os/user"
	"path/filepath"
	"strconv"
)

func accountName() (string, error) {
	u, err := user.LookupId(strconv.Itoa(os.Geteuid()))
	if err != nil {
		return "", err
	}
	return u.Username, nil
}

// Reset removes the cluster of a data folder, all of its data with it. It
// touches only what this package made there, and refuses while a program holds
// the folder or where the folder holds no cluster of ours.
func Reset(dir string) error {
	dir, err := folder(dir)
	if err != nil {
		return err
	}
	if _, err := os.Stat(dir); errors.Is(err, os.ErrNotExist) {
		return nil
	}
	c := &Cluster{dir: dir}
	if err := c.takeLock(); err != nil {
		return err
	}
	defer c.lock.Close()
	if acct, err := accountFor(filepath.Join(dir, "data")); err == nil {
		if c.socket, err = acct.socketDir(dir); err != nil {
			return err
		}
	}
	if adopted, err := c.orphan(); err != nil {
		return err
	} else if adopted {
		if err := c.stopAdopted(); err != nil {
			return err
		}
	}
	leftovers, _ := filepath.Glob(filepath.Join(dir, "data.init-*")) // the pattern is well-formed
	for _, d := range append(leftovers, filepath.Join(dir, "data"), filepath.Join(dir, "run"), filepath.Join(dir, "postgres.log")) {
		if err := os.RemoveAll(d); err != nil {
			return fmt.Errorf("data folder: %w", err)
		}
	}
	return nil
}
