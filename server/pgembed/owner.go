package pgembed

import (
	"errors"
	"fmt"
	"os"
	"os/user"
	"path/filepath"
	"runtime"
	"strconv"
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
			return account{}, fmt.Errorf("user %d has no entry in the system's user list, so Postgres cannot be started for it; name a running server in DATABASE_URL", uid)
		}
		return account{uid: uid, gid: os.Getegid(), name: u.Username}, nil
	}
	if info, err := os.Stat(filepath.Join(data, "PG_VERSION")); err == nil {
		if st, ok := info.Sys().(*syscall.Stat_t); ok && st.Uid != 0 {
			if u, err := user.LookupId(strconv.Itoa(int(st.Uid))); err == nil {
				return account{int(st.Uid), int(st.Gid), u.Username, true}, nil
			}
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

// reachable checks that another account can come down to dir: every folder
// above must let it pass.
func (a account) reachable(dir string) error {
	if !a.other {
		return nil
	}
	for d := filepath.Dir(dir); ; d = filepath.Dir(d) {
		info, err := os.Stat(d)
		if err == nil {
			st, ok := info.Sys().(*syscall.Stat_t)
			own := ok && int(st.Uid) == a.uid
			if !own && info.Mode().Perm()&0o001 == 0 {
				return fmt.Errorf("data folder %s: user %s, as whom the database runs, may not pass %s; choose another folder with CADENCEWRIGHT_DATA", dir, a.name, d)
			}
		}
		if d == filepath.Dir(d) {
			return nil
		}
	}
}

// prepare makes the folders, owned by the account.
func (a account) prepare(dir string) error {
	if err := a.reachable(dir); err != nil {
		return err
	}
	for _, d := range []string{dir, filepath.Join(dir, "run")} {
		if err := os.MkdirAll(d, 0o755); err != nil {
			return fmt.Errorf("data folder: %w", err)
		}
		if a.other {
			if err := os.Chown(d, a.uid, a.gid); err != nil {
				return fmt.Errorf("data folder: %w", err)
			}
		}
	}
	return os.Chmod(filepath.Join(dir, "run"), 0o700)
}

// maxSocketPath is the longest path of a socket on every Unix (macOS: 104
// bytes with the closing zero).
const maxSocketPath = 103

// socketDir is where the server's socket goes: inside the data folder, or in a
// folder of its own under /tmp where that path would be too long.
func (a account) socketDir(dir string) (string, error) {
	run := filepath.Join(dir, "run")
	if len(run)+len("/.s.PGSQL.5432") <= maxSocketPath {
		return run, nil
	}
	short := filepath.Join("/tmp", "cadencewright-"+strconv.FormatUint(hash(dir), 36))
	if err := os.Mkdir(short, 0o700); err != nil && !errors.Is(err, os.ErrExist) {
		return "", fmt.Errorf("folder for the database's socket: %w", err)
	}
	info, err := os.Lstat(short)
	if err != nil {
		return "", fmt.Errorf("folder for the database's socket: %w", err)
	}
	st, ok := info.Sys().(*syscall.Stat_t)
	if !info.IsDir() || !ok || int(st.Uid) != a.uid && int(st.Uid) != os.Geteuid() {
		return "", fmt.Errorf("folder for the database's socket: %s belongs to somebody else", short)
	}
	if a.other {
		if err := os.Chown(short, a.uid, a.gid); err != nil {
			return "", fmt.Errorf("folder for the database's socket: %w", err)
		}
	}
	return short, nil
}

// hash is FNV-1a.
func hash(s string) uint64 {
	h := uint64(14695981039346656037)
	for _, b := range []byte(s) {
		h = (h ^ uint64(b)) * 1099511628211
	}
	return h
}
