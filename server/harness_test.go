package server

import (
	"bytes"
	"context"
	"encoding/json"
	"io"
	"log/slog"
	"net/http"
	"net/http/cookiejar"
	"net/http/httptest"
	"net/url"
	"strings"
	"sync"
	"testing"
	"time"

	"cadencewright/server/auth"
	"cadencewright/server/demo"
	"cadencewright/server/jobs"
	"cadencewright/server/planning"
	"cadencewright/server/store"
	"cadencewright/server/store/storetest"
)

func TestMain(m *testing.M) { storetest.Run(m) }

// clock is a clock that tests set.
type clock struct {
	mu sync.Mutex
	t  time.Time
}

func (c *clock) now() time.Time {
	c.mu.Lock()
	defer c.mu.Unlock()
	return c.t
}

func (c *clock) set(t time.Time) {
	c.mu.Lock()
	defer c.mu.Unlock()
	c.t = t
}

// world is a running service with the demo campaign in it.
type world struct {
	t     testing.TB
	store *store.Store
	srv   *Server
	http  *httptest.Server
	clock *clock
	logs  *syncBuffer
	ref   store.CampaignRef
	api   *contract
}

// syncBuffer is a buffer that several goroutines may write to.
type syncBuffer struct {
	mu sync.Mutex
	b  bytes.Buffer
}

func (s *syncBuffer) Write(p []byte) (int, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.b.Write(p)
}

func (s *syncBuffer) String() string {
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.b.String()
}

// monday is the start of the demo's week in tests.
var monday = time.Date(2027, 1, 18, 0, 0, 0, 0, time.UTC)

func newWorld(t testing.TB) *world {
	t.Helper()
	w := &world{t: t, clock: &clock{t: monday.Add(6 * time.Hour)}, logs: &syncBuffer{}}
	w.store = storetest.Open(t, w.clock.now)
	ctx := context.Background()
	if _, err := w.store.ImportCampaign(ctx, demo.Generate(1, monday), "test"); err != nil {
		t.Fatal(err)
	}
	var err error
	if w.ref, err = w.store.LiveCampaign(ctx); err != nil {
		t.Fatal(err)
	}
	log := slog.New(slog.NewTextHandler(w.logs, &slog.HandlerOptions{Level: slog.LevelDebug}))
	queue, err := jobs.New(w.store, &planning.Planner{Store: w.store, Effort: 200, Workers: 1}, log)
	if err != nil {
		t.Fatal(err)
	}
	if err := queue.Start(ctx); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		c, cancel := context.WithTimeout(ctx, 10*time.Second)
		defer cancel()
		if err := queue.Stop(c); err != nil {
			t.Error(err)
		}
	})
	w.srv = New(Deps{Store: w.store, Planner: queue, Log: log, Clock: w.clock.now, Version: "test"})
	w.api = newContract(t, w.srv)
	w.http = httptest.NewServer(w.srv.Handler())
	t.Cleanup(w.http.Close)
	return w
}

// client is somebody who talks to the service.
type client struct {
	w   *world
	c   *http.Client
	key string
}

// as signs somebody in with a role.
func (w *world) as(role auth.Role) *client {
	w.t.Helper()
	ctx := context.Background()
	jar, err := cookiejar.New(nil)
	if err != nil {
		w.t.Fatal(err)
	}
	c := &client{w: w, c: &http.Client{Jar: jar, Timeout: 30 * time.Second, CheckRedirect: func(*http.Request, []*http.Request) error { return http.ErrUseLastResponse }}}
	switch role {
	case auth.RoleNone:
	case auth.RoleKey:
		token, hash := auth.NewToken()
		if _, err := w.store.AddKey(ctx, "key "+token[:6], w.telescopes()[0], hash, "test"); err != nil {
			w.t.Fatal(err)
		}
		c.key = token
	default:
		name := string(role) + " " + time.Duration(len(w.logs.String())).String()
		p, err := w.store.PersonByName(ctx, name)
		if err != nil {
			var named []string
			if role == auth.RoleObserver {
				named = w.telescopes()[:1]
			}
			if p, err = w.store.AddPerson(ctx, name, string(role), named, "", "test"); err != nil {
				w.t.Fatal(err)
			}
		}
		token, hash := auth.NewToken()
		if err := w.store.AddSession(ctx, hash, p.ID); err != nil {
			w.t.Fatal(err)
		}
		u, _ := url.Parse(w.http.URL)
		jar.SetCookies(u, []*http.Cookie{{Name: "cadencewright_session", Value: token, Path: "/"}})
	}
	return c
}

func (w *world) telescopes() []string {
	c, _, err := w.store.LoadCampaign(context.Background(), w.ref.ID)
	if err != nil {
		w.t.Fatal(err)
	}
	var codes []string
	for _, t := range c.Telescopes {
		codes = append(codes, t.Code)
	}
	return codes
}

// do sends a request; body may be url.Values (a form), anything else JSON.
func (c *client) do(method, path string, body any, header ...string) (*http.Response, []byte) {
	c.w.t.Helper()
	var r io.Reader
	kind := ""
	switch b := body.(type) {
	case nil:
	case url.Values:
		r, kind = strings.NewReader(b.Encode()), "application/x-www-form-urlencoded"
	case string:
		r, kind = strings.NewReader(b), "application/json"
	default:
		j, err := json.Marshal(b)
		if err != nil {
			c.w.t.Fatal(err)
		}
		r, kind = bytes.NewReader(j), "application/json"
	}
	req, err := http.NewRequest(method, c.w.http.URL+path, r)
	if err != nil {
		c.w.t.Fatal(err)
	}
	if kind != "" {
		req.Header.Set("Content-Type", kind)
	}
	if c.key != "" {
		req.Header.Set("Authorization", "Bearer "+c.key)
	} else if !strings.HasPrefix(path, "/api/") {
		req.Header.Set("Accept", "text/html")
	}
	for i := 0; i+1 < len(header); i += 2 {
		req.Header.Set(header[i], header[i+1])
	}
	res, err := c.c.Do(req)
	if err != nil {
		c.w.t.Fatal(err)
	}
	defer res.Body.Close()
	b, err := io.ReadAll(res.Body)
	if err != nil {
		c.w.t.Fatal(err)
	}
	c.w.api.check(c.w.t, req, res, b)
	return res, b
}

// allOf fetches a whole list, page by page.
func allOf[T any](c *client, path string) []T {
	c.w.t.Helper()
	var all []T
	cursor := ""
	for range 200 {
		var page struct {
			Items []T
			Next  string
		}
		c.get(path+cursor, &page)
		all = append(all, page.Items...)
		if page.Next == "" {
			return all
		}
		cursor = "&cursor=" + url.QueryEscape(page.Next)
	}
	c.w.t.Fatalf("%s has no end", path)
	return nil
}

// get fetches JSON into v and wants status 200.
func (c *client) get(path string, v any, header ...string) *http.Response {
	c.w.t.Helper()
	res, b := c.do("GET", path, nil, header...)
	if res.StatusCode != 200 {
		c.w.t.Fatalf("GET %s: %s: %s", path, res.Status, b)
	}
	if err := json.Unmarshal(b, v); err != nil {
		c.w.t.Fatalf("GET %s: %v: %s", path, err, b)
	}
	return res
}

// plan plans a week and waits for the draft; it returns the plan's id.
func (w *world) plan(c *client, week string) int64 {
	w.t.Helper()
	res, b := c.do("POST", "/api/v1/weeks/"+week+"/plan", map[string]any{"seed": 1})
	if res.StatusCode != http.StatusAccepted {
		w.t.Fatalf("plan: %s: %s", res.Status, b)
	}
	var job struct {
		ID      int64  `json:"id"`
		State   string `json:"state"`
		Plan    int64  `json:"plan"`
		Problem string `json:"problem"`
	}
	if err := json.Unmarshal(b, &job); err != nil {
		w.t.Fatal(err)
	}
	for deadline := time.Now().Add(3 * time.Minute); ; time.Sleep(50 * time.Millisecond) {
		c.get("/api/v1/jobs/"+itoa(job.ID), &job)
		switch job.State {
		case "done":
			return job.Plan
		case "failed", "cancelled":
			w.t.Fatalf("the job ended as %s: %s", job.State, job.Problem)
		}
		if time.Now().After(deadline) {
			w.t.Fatalf("the job is still %s; log:\n%s", job.State, w.logs)
		}
	}
}
