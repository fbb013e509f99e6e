package pgembed

import (
	"bufio"
	"context"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"sync"
	"syscall"
	"testing"
	"time"

	"github.com/jackc/pgx/v5"
)

// roleEnv makes the test binary do another job: "hold DIR" starts a cluster and
// keeps it until it is killed or told to stop, "try DIR" starts one, says how
// that went and stops.
const roleEnv = "CADENCEWRIGHT_TEST_ROLE"

func TestMain(m *testing.M) {
	role, dir, _ := strings.Cut(os.Getenv(roleEnv), " ")
	switch role {
	case "hold", "try":
		os.Exit(playRole(role, dir))
	}
	code := m.Run()
	if dir, err := madeOnce(); err == nil {
		os.RemoveAll(dir)
	}
	os.Exit(code)
}

// playRole is the test binary as another program.
func playRole(role, dir string) int {
	c, err := Start(context.Background(), Options{Dir: dir, Unsafe: true, BinDir: os.Getenv("CADENCEWRIGHT_PG_BIN")})
	if err != nil {
		fmt.Println("error:", err)
		return 1
	}
	fmt.Println("ready", c.Owner())
	if role == "hold" && c.Owner() {
		go func() { // a line on its input ends it properly
			if _, err := bufio.NewReader(os.Stdin).ReadString('\n'); err == nil {
				if err := c.Stop(); err != nil {
					fmt.Println("error:", err)
				}
			}
		}()
		<-c.Done()
		return 0
	}
	if err := c.Stop(); err != nil {
		fmt.Println("error:", err)
		return 1
	}
	return 0
}

var found = sync.OnceValue(func() error {
	_, err := find(os.Getenv("CADENCEWRIGHT_PG_BIN"), 0)
	return err
})

// needPostgres skips the test where there is no Postgres; in CI it fails.
func needPostgres(t *testing.T) {
	t.Helper()
	if err := found(); err != nil {
		if os.Getenv("CI") == "true" {
			t.Fatal(err)
		}
		t.Skip(err)
	}
}

// needRoot skips a test that plays several users.
func needRoot(t *testing.T) {
	t.Helper()
	if os.Geteuid() != 0 {
		t.Skip("run this test as root, or in a container where you are: it starts programs as other users")
	}
}

// tempDir is a folder that the account of the server can reach.
func tempDir(t *testing.T) string {
	t.Helper()
	dir, err := os.MkdirTemp("", "cwpg")
	if err != nil {
		t.Fatal(err)
	}
	if err := os.Chmod(dir, 0o755); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { os.RemoveAll(dir) })
	return dir
}

// madeOnce makes a cluster that tests copy: making one takes longest of all.
var madeOnce = sync.OnceValues(func() (string, error) {
	dir, err := os.MkdirTemp("", "cwpg")
	if err != nil {
		return "", err
	}
	if err := os.Chmod(dir, 0o755); err != nil {
		return "", err
	}
	c, err := Start(context.Background(), Options{Dir: dir, Unsafe: true, BinDir: os.Getenv("CADENCEWRIGHT_PG_BIN")})
	if err != nil {
		return "", err
	}
	return dir, c.Stop()
})

// madeDir is a data folder with a cluster in it that does not run.
func madeDir(t *testing.T) string {
	t.Helper()
	needPostgres(t)
	from, err := madeOnce()
	if err != nil {
		t.Fatal(err)
	}
	dir := tempDir(t)
	if out, err := exec.Command("cp", "-a", from+"/.", dir).CombinedOutput(); err != nil {
		t.Fatalf("%v: %s", err, out)
	}
	return dir
}

// start starts a cluster for the length of the test.
func start(t *testing.T, dir string) *Cluster {
	t.Helper()
	needPostgres(t)
	c, err := Start(t.Context(), Options{Dir: dir, Unsafe: true, BinDir: os.Getenv("CADENCEWRIGHT_PG_BIN")})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := c.Stop(); err != nil {
			t.Error(err)
		}
	})
	return c
}

// query runs a statement that answers with one text.
func query(t *testing.T, c *Cluster, sql string) string {
	t.Helper()
	conn, err := pgx.Connect(t.Context(), c.DSN("postgres"))
	if err != nil {
		t.Fatal(err)
	}
	defer conn.Close(context.Background())
	var s string
	if err := conn.QueryRow(t.Context(), sql).Scan(&s); err != nil {
		t.Fatal(err)
	}
	return s
}

// serverOf is the process number of the server in a data folder.
func serverOf(t *testing.T, dir string) int {
	t.Helper()
	lines, err := (&Cluster{dir: dir}).pidFile()
	if err != nil {
		t.Fatal(err)
	}
	pid, err := strconv.Atoi(lines[0])
	if err != nil {
		t.Fatal(err)
	}
	return pid
}

// awaitEnd waits until a server has ended.
func awaitEnd(t *testing.T, dir string, pid int) {
	t.Helper()
	c := &Cluster{dir: dir}
	for deadline := time.Now().Add(20 * time.Second); c.process(pid) == server; time.Sleep(20 * time.Millisecond) {
		if time.Now().After(deadline) {
			t.Fatalf("Postgres process %d is still there", pid)
		}
	}
}

// awaitDone waits until a cluster says that its server has ended, and returns
// why.
func awaitDone(t *testing.T, c *Cluster) error {
	t.Helper()
	select {
	case <-c.Done():
		return c.Err()
	case <-time.After(20 * time.Second):
		t.Fatal("the end of the server went unnoticed")
		return nil
	}
}

// program is another process that works with a cluster.
type program struct {
	cmd   *exec.Cmd
	in    interface{ Write([]byte) (int, error) }
	lines *bufio.Reader
}

// begin starts the test binary in a role, as another user if uid is not
// negative.
func begin(t *testing.T, role, dir string, uid int, env ...string) *program {
	t.Helper()
	binary := os.Args[0]
	if uid >= 0 { // go test keeps it where nobody else may come
		binary = filepath.Join(tempDir(t), "program")
		if out, err := exec.Command("cp", os.Args[0], binary).CombinedOutput(); err != nil {
			t.Fatalf("%v: %s", err, out)
		}
	}
	cmd := exec.Command(binary)
	cmd.Dir = "/"
	cmd.Env = append(append(os.Environ(), roleEnv+"="+role+" "+dir), env...)
	if uid >= 0 {
		cmd.SysProcAttr = &syscall.SysProcAttr{Credential: &syscall.Credential{Uid: uint32(uid), Gid: uint32(uid)}}
	}
	in, err := cmd.StdinPipe()
	if err != nil {
		t.Fatal(err)
	}
	out, err := cmd.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		_ = cmd.Process.Kill() // it may have ended
		_ = cmd.Wait()
	})
	return &program{cmd, in, bufio.NewReader(out)}
}

// says is the next line that the program says.
func (p *program) says(t *testing.T) string {
	t.Helper()
	got := make(chan string, 1)
	go func() {
		s, err := p.lines.ReadString('\n')
		if err != nil {
			s += "(" + err.Error() + ")"
		}
		got <- strings.TrimSpace(s)
	}()
	select {
	case s := <-got:
		return s
	case <-time.After(60 * time.Second):
		t.Fatal("the other program says nothing")
		return ""
	}
}

// kill ends the program as kill -9 does.
func (p *program) kill(t *testing.T) {
	t.Helper()
	if err := p.cmd.Process.Kill(); err != nil {
		t.Fatal(err)
	}
	_ = p.cmd.Wait() // it says that it was killed
}
