package server

import (
	"context"
	"io"
	"log/slog"
	"net"
	"net/http"
	"net/http/httptest"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"sync"
	"testing"
	"time"

	"cadencewright/server/demo"
	"cadencewright/server/store"
	"cadencewright/server/store/storetest"
)

// gate stands between the service and its database, and can be shut.
type gate struct {
	mu    sync.Mutex
	shut  bool
	conns []net.Conn
}

// openGate makes a socket through which the database of a DSN is reached, and
// gives the DSN to use it.
func openGate(t *testing.T, dsn string) (*gate, string) {
	t.Helper()
	host := regexp.MustCompile(`host='([^']+)'`)
	found := host.FindStringSubmatch(dsn)
	if found == nil {
		t.Fatalf("no socket folder in %s", dsn)
	}
	dir, err := os.MkdirTemp("", "cwgate")
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { os.RemoveAll(dir) })
	l, err := net.Listen("unix", filepath.Join(dir, ".s.PGSQL.5432"))
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { l.Close() })
	g := &gate{}
	go func() {
		for {
			c, err := l.Accept()
			if err != nil {
				return
			}
			go g.join(c, filepath.Join(found[1], ".s.PGSQL.5432"))
		}
	}()
	return g, host.ReplaceAllString(dsn, "host='"+dir+"'")
}

// join carries bytes both ways until the gate is shut.
func (g *gate) join(c net.Conn, to string) {
	defer c.Close()
	d, err := net.Dial("unix", to)
	if err != nil {
		return
	}
	defer d.Close()
	g.mu.Lock()
	if g.shut {
		g.mu.Unlock()
		return
	}
	g.conns = append(g.conns, c, d)
	g.mu.Unlock()
	go func() { _, _ = io.Copy(d, c); d.Close() }()
	_, _ = io.Copy(c, d)
}

// set shuts the gate, breaking every connection, or opens it.
func (g *gate) set(shut bool) {
	g.mu.Lock()
	defer g.mu.Unlock()
	g.shut = shut
	if shut {
		for _, c := range g.conns {
			c.Close()
		}
		g.conns = nil
	}
}

// While the database is away, reads and writes answer 503 with Retry-After and
// say nothing of its whereabouts; the program is alive but not ready. When it
// is back, so is the service, by itself.
func TestDatabaseAway(t *testing.T) {
	g, dsn := openGate(t, storetest.DSN(t))
	ctx := t.Context()
	s, err := store.Open(ctx, dsn, store.Options{MaxConns: 4})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(s.Close)
	if _, err := s.ImportCampaign(ctx, demo.Generate(1, monday), "test"); err != nil {
		t.Fatal(err)
	}
	logs := &syncBuffer{}
	w := &world{t: t, store: s, logs: logs}
	w.srv = New(Deps{Store: s, Log: slog.New(slog.NewTextHandler(logs, nil)), Version: "test"})
	w.api = newContract(t, w.srv)
	if w.ref, err = s.LiveCampaign(ctx); err != nil {
		t.Fatal(err)
	}
	w.http = httptest.NewServer(w.srv.Handler())
	t.Cleanup(w.http.Close)
	ada, script := w.as("coordinator"), w.as("key")
	code := w.telescopes()[0]
	calls := []struct {
		c            *client
		method, path string
		back         int
	}{
		{script, "GET", "/api/v1/telescopes/" + code + "/now", 200}, {script, "POST", "/api/v1/scans/1/outcome", 404}, {ada, "GET", "/api/v1/sources", 200},
		{ada, "GET", "/telescopes", 200}, {ada, "POST", "/sign-in", 401}, {ada, "GET", "/readyz", 200},
	}
	try := func(want func(i int) int) {
		t.Helper()
		for i, call := range calls {
			var body any
			if call.method == "POST" && strings.HasPrefix(call.path, "/api") {
				body = `{"state":"done"}`
			}
			res, b := call.c.do(call.method, call.path, body)
			if res.StatusCode != want(i) {
				t.Errorf("%s %s: %s %.300s, want %d", call.method, call.path, res.Status, b, want(i))
			}
			if res.StatusCode == 503 && (res.Header.Get("Retry-After") == "" || strings.Contains(string(b), "PGSQL") || strings.Contains(string(b), "cwgate")) {
				t.Errorf("%s %s: Retry-After %q, body %.500s", call.method, call.path, res.Header.Get("Retry-After"), b)
			}
		}
	}
	back := func(i int) int { return calls[i].back }
	try(back)
	g.set(true)
	try(func(int) int { return 503 })
	if res, _ := ada.do("GET", "/livez", nil); res.StatusCode != 200 {
		t.Errorf("/livez: %s", res.Status)
	}
	if res, _ := script.do("GET", "/api/v1/openapi.json", nil); res.StatusCode != 200 {
		t.Errorf("the description: %s", res.Status)
	}
	g.set(false)
	try(back)
	if !strings.Contains(logs.String(), "cwgate") {
		t.Error("the log does not say why the database was away")
	}
}

// Answers under way are finished after a stop; new requests are refused.
func TestGracefulStop(t *testing.T) {
	begun, finish := make(chan struct{}), make(chan struct{})
	h := http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		close(begun)
		<-finish
		_, _ = io.WriteString(w, "whole")
	})
	l, err := Listen("127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	ctx, stop := context.WithCancel(t.Context())
	ended := make(chan error, 1)
	go func() { ended <- serve(ctx, l, h, slog.New(slog.DiscardHandler), 30*time.Second) }()
	got := make(chan string, 1)
	go func() {
		res, err := http.Get("http://" + l.Addr().String())
		if err != nil {
			got <- err.Error()
			return
		}
		defer res.Body.Close()
		b, _ := io.ReadAll(res.Body)
		got <- string(b)
	}()
	<-begun
	stop()
	for { // until nobody listens any more
		c, err := net.Dial("tcp", l.Addr().String())
		if err != nil {
			break
		}
		c.Close()
		time.Sleep(time.Millisecond)
	}
	close(finish)
	if s := <-got; s != "whole" {
		t.Errorf("the answer under way is %q", s)
	}
	if err := <-ended; err != nil {
		t.Error(err)
	}
}

// A stop does not wait for ever.
func TestStopHasADeadline(t *testing.T) {
	begun := make(chan struct{})
	h := http.HandlerFunc(func(_ http.ResponseWriter, r *http.Request) { close(begun); <-r.Context().Done() })
	l, err := Listen("127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	ctx, stop := context.WithCancel(t.Context())
	ended := make(chan error, 1)
	go func() { ended <- serve(ctx, l, h, slog.New(slog.DiscardHandler), 20*time.Millisecond) }()
	broken := make(chan error, 1)
	go func() {
		res, err := http.Get("http://" + l.Addr().String())
		if err == nil {
			res.Body.Close()
		}
		broken <- err
	}()
	<-begun
	stop()
	if err := <-broken; err == nil {
		t.Error("an answer that never came was taken for one")
	}
	if err := <-ended; err != nil {
		t.Error(err)
	}
}

func TestListen(t *testing.T) {
	l, err := Listen("127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	defer l.Close()
	for _, c := range []struct {
		listen func(string) (net.Listener, error)
		addr   string
		want   []string
	}{
		{Listen, l.Addr().String(), []string{"cannot listen on " + l.Addr().String(), "another program does", "CADENCEWRIGHT_ADDR"}},
		{ListenMetrics, l.Addr().String(), []string{"another program does", "CADENCEWRIGHT_METRICS_ADDR"}},
		{Listen, "192.0.2.1:1", []string{"cannot listen on 192.0.2.1:1", "CADENCEWRIGHT_ADDR"}},
	} {
		got, err := c.listen(c.addr)
		if err == nil {
			got.Close()
			t.Errorf("%s: no error", c.addr)
			continue
		}
		for _, want := range c.want {
			if !strings.Contains(err.Error(), want) {
				t.Errorf("%s: %q does not say %q", c.addr, err, want)
			}
		}
	}
}
