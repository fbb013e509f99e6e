package pgembed

import (
	"errors"
	"fmt"
	"hash/fnv"
	"io/fs"
	"os"
	"os/user"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"syscall"
)

// account is the system user that the server runs as. Postgres refuses to run
// as root, so root lends it another.
type account struct {
	uid, gid int
	name     string
	other    bool // not the user of this program
}

// accountFor chooses the account: ourselves, or for root the owner of the
// cluster, postgres, _postgres or nobody.
func accountFor(data string) (account, error) {
	uid := os.Geteuid()
	if uid != 0 {
		u, err := user.LookupId(strconv.Itoa(uid))
		if err != nil {
			return account{}, fmt.Errorf("user %d has no entry in the system's list of users, so Postgres cannot be started for it; name a running server in DATABASE_URL", uid)
		}
		return account{uid: uid, gid: os.Getegid(), name: u.Username}, nil
	}
	if info, err := os.Stat(filepath.Join(data, "PG_VERSION")); err == nil {
		if st, ok := info.Sys().(*syscall.Stat_t); ok && st.Uid != 0 {
			u, err := user.LookupId(strconv.Itoa(int(st.Uid)))
			if err != nil {
				return account{}, fmt.Errorf("the cluster %s belongs to user %d, who is not in the system's list of users", data, st.Uid)
			}
			return account{int(st.Uid), int(st.Gid), u.Username, true}, nil
		}
	}
	for _, name := range []string{"postgres", "_postgres", "nobody"} {
		if u, err := user.Lookup(name); err == nil {
			uid, _ := strconv.Atoi(u.Uid) // numbers on every Unix
			gid, _ := strconv.Atoi(u.Gid)
			return account{uid, gid, name, true}, nil
		}
	}
	return account{}, errors.New("running as root, and there is no user postgres, _postgres or nobody to run the database as; start the program as another user")
}

// attr is how a process of the account is started: in a group of its own, so
// that Ctrl-C reaches this program alone.
func (a account) attr() *syscall.SysProcAttr {
	attr := &syscall.SysProcAttr{Setpgid: true}
	if a.other {
		attr.Credential = &syscall.Credential{Uid: uint32(a.uid), Gid: uint32(a.gid)}
	}
	return attr
}

// environment is what the server's programs are started with: nothing that
// would change the cluster's ways (PGDATA, PGPORT, languages).
func environment() []string {
	env := slices.DeleteFunc(os.Environ(), func(s string) bool {
		return strings.HasPrefix(s, "PG") || strings.HasPrefix(s, "LC_") || strings.HasPrefix(s, "LANG")
	})
	return append(env, "LC_ALL=C")
}

// give makes the account the owner of a file or folder that we made.
func (a account) give(name string) error {
	if !a.other {
		return nil
	}
	return os.Lchown(name, a.uid, a.gid)
}

// reachable checks that another account can come down into dir: every folder
// on the way must let it pass.
func (a account) reachable(dir string) error {
	if !a.other {
		return nil
	}
	for d := dir; ; d = filepath.Dir(d) {
		if info, err := os.Stat(d); err == nil {
			st, ok := info.Sys().(*syscall.Stat_t)
			own := ok && int(st.Uid) == a.uid
			if !own && info.Mode().Perm()&0o001 == 0 {
				return folderError(dir, fmt.Errorf("user %s, as whom the database runs, may not pass %s", a.name, d))
			}
		}
		if d == filepath.Dir(d) {
			return nil
		}
	}
}

// prepare makes the data folder.
func (a account) prepare(dir string) error {
	if err := a.reachable(filepath.Dir(dir)); err != nil {
		return err
	}
	if _, err := os.Stat(dir); errors.Is(err, fs.ErrNotExist) {
		if err := os.MkdirAll(dir, 0o755); err != nil {
			return folderError(dir, err)
		}
		if a.other { // whatever the umask
			if err := os.Chmod(dir, 0o755); err != nil {
				return folderError(dir, err)
			}
		}
	}
	return a.reachable(dir)
}

// makeRun makes the socket's folder, which is the account's.
func (a account) makeRun(dir string) error {
	run := filepath.Join(dir, "run")
	err := os.Mkdir(run, 0o700)
	if errors.Is(err, fs.ErrExist) {
		return nil
	}
	if err == nil {
		err = a.give(run)
	}
	if err != nil {
		return folderError(dir, err)
	}
	return nil
}

// maxSocketPath is the longest path of a socket on every Unix (macOS: 104
// bytes with the closing zero).
const maxSocketPath = 103

const socketName = ".s.PGSQL.5432"

// socketDir is where the server's socket goes: inside the data folder, or in a
// folder of its own under /tmp where that path would be too long or holds a
// comma, which clients take for the end of a host's name.
func (a account) socketDir(dir string) (string, error) {
	run := filepath.Join(dir, "run")
	if len(filepath.Join(run, socketName)) <= maxSocketPath && !strings.Contains(run, ",") {
		return run, nil
	}
	bad := func(err error) (string, error) { return "", fmt.Errorf("folder for the database's socket: %w", err) }
	h := fnv.New64a()
	h.Write([]byte(dir))
	short := filepath.Join("/tmp", "cadencewright-"+strconv.FormatUint(h.Sum64(), 36))
	made := os.Mkdir(short, 0o700)
	if made != nil && !errors.Is(made, fs.ErrExist) {
		return bad(made)
	}
	info, err := os.Lstat(short)
	if err != nil {
		return bad(err)
	}
	st, ok := info.Sys().(*syscall.Stat_t)
	if !info.IsDir() || !ok || int(st.Uid) != a.uid && int(st.Uid) != os.Geteuid() || info.Mode().Perm() != 0o700 {
		return bad(fmt.Errorf("%s is there already and belongs to somebody else", short))
	}
	if err := a.give(short); err != nil {
		return bad(err)
	}
	return short, nil
}
