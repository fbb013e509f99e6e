package pgembed

import (
	"context"
	"fmt"
	"os"
	"os/exec"
	"os/user"
	"path/filepath"
	"strconv"
	"strings"
)

// initdb makes the cluster in a folder of its own and then gives it its name:
// one that was stopped halfway would look whole.
func (c *Cluster) initdb(ctx context.Context, bin binaries, acct account, unsafe bool) error {
	if err := c.sweep(); err != nil {
		return err
	}
	tmp := filepath.Join(c.dir, leftover("init"))
	if err := os.Mkdir(tmp, 0o700); err != nil {
		return folderError(c.dir, err)
	}
	defer os.RemoveAll(tmp) // there only if something went wrong
	if err := acct.give(tmp); err != nil {
		return folderError(c.dir, err)
	}
	args := []string{"-D", tmp, "-U", "postgres", "-E", "UTF8", "--locale=C", "--auth-local=peer", "--auth-host=scram-sha-256"}
	if unsafe {
		args = append(args, "-N")
	}
	limited, cancel := context.WithTimeout(ctx, initTimeout)
	defer cancel()
	cmd := exec.CommandContext(limited, filepath.Join(bin.dir, "initdb"), args...)
	cmd.SysProcAttr, cmd.Dir, cmd.Env = acct.attr(), "/", environment()
	if out, err := cmd.CombinedOutput(); err != nil {
		if limited.Err() != nil {
			err = limited.Err()
		}
		return folderError(c.dir, fmt.Errorf("initdb: %w: %s", cause(err, string(out)), lastLines(string(out), 3)))
	}
	if err := os.WriteFile(filepath.Join(tmp, markName), []byte(mark), 0o600); err != nil {
		return folderError(c.dir, err)
	}
	if err := acct.give(filepath.Join(tmp, markName)); err != nil {
		return folderError(c.dir, err)
	}
	if err := os.Rename(tmp, filepath.Join(c.dir, "data")); err != nil {
		return folderError(c.dir, err)
	}
	return nil
}

// access writes who may connect: the server's own user, ours and root, all as
// the database's superuser, over the socket only.
func (c *Cluster) access(acct account) error {
	names := []string{acct.name, "root"}
	if me, err := user.LookupId(strconv.Itoa(os.Geteuid())); err == nil && me.Username != acct.name && me.Username != "root" {
		names = append(names, me.Username)
	}
	ident := ""
	for _, n := range names {
		ident += "own " + quoteIdent(n) + " postgres\n"
	}
	for name, text := range map[string]string{"pg_hba.conf": "local all all peer map=own\n", "pg_ident.conf": ident} {
		file := filepath.Join(c.dir, "data", name)
		if err := os.WriteFile(file, []byte(text), 0o600); err != nil {
			return folderError(c.dir, err)
		}
		if err := acct.give(file); err != nil {
			return folderError(c.dir, err)
		}
	}
	return nil
}

func quoteIdent(s string) string { return `"` + strings.ReplaceAll(s, `"`, `""`) + `"` }

// lastLines are the last lines of a text, as one.
func lastLines(s string, n int) string {
	lines := strings.Split(strings.TrimSpace(s), "\n")
	return strings.Join(lines[max(0, len(lines)-n):], " | ")
}
