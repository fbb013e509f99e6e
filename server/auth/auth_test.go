package auth

import (
	"context"
	"errors"
	"net/http"
	"net/http/httptest"
	"sync"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/store"
	"cadencewright/server/store/storetest"
)

func TestMain(m *testing.M) { storetest.Run(m) }

// clock is a clock that tests set.
type clock struct {
	mu sync.Mutex
	t  time.Time
}

func (c *clock) now() time.Time { c.mu.Lock(); defer c.mu.Unlock(); return c.t }

func (c *clock) pass(d time.Duration) { c.mu.Lock(); defer c.mu.Unlock(); c.t = c.t.Add(d) }

// people is a store with some people, all of the same password.
const password = "a long password"

func people(t *testing.T) (*Auth, *store.Store, *clock) {
	t.Helper()
	c := &clock{t: time.Date(2027, 1, 18, 6, 0, 0, 0, time.UTC)}
	s := storetest.Open(t, c.now)
	hash := cheap(password, "0123456789abcdef")
	for _, p := range []struct {
		name, role string
		telescopes []string
		hash       string
	}{
		{"Ada", "coordinator", nil, hash}, {"Bo", "observer", []string{"BRM"}, hash}, {"Cy", "reader", nil, hash}, {"Di", "reader", nil, ""}, {"Ed", "reader", nil, hash},
	} {
		x, err := s.AddPerson(t.Context(), p.name, p.role, p.telescopes, p.hash, "test")
		if err != nil {
			t.Fatal(err)
		}
		if p.name == "Ed" {
			if err := s.SetDisabled(t.Context(), x.ID, true, "test"); err != nil {
				t.Fatal(err)
			}
		}
	}
	return New(s, true), s, c
}

// carrying is a request with the cookies of an answer.
func carrying(w *httptest.ResponseRecorder) *http.Request {
	r := httptest.NewRequest("GET", "/", nil)
	for _, c := range w.Result().Cookies() {
		if c.MaxAge >= 0 {
			r.AddCookie(c)
		}
	}
	return r
}

func TestSignIn(t *testing.T) {
	a, _, _ := people(t)
	for _, c := range []struct {
		name, password string
		role           Role
		err            error
	}{
		{"Ada", password, RoleCoordinator, nil},
		{"aDA", password, RoleCoordinator, nil},
		{"Bo", password, RoleObserver, nil},
		{"Ada", "another password", "", scheduler.ErrUnauthenticated},
		{"Ada", "", "", scheduler.ErrUnauthenticated},
		{"Zoe", password, "", scheduler.ErrUnauthenticated},
		{"", "", "", scheduler.ErrUnauthenticated},
		{"Di", "", "", scheduler.ErrUnauthenticated},       // by link only
		{"Ed", password, "", scheduler.ErrUnauthenticated}, // shut out
	} {
		w := httptest.NewRecorder()
		_, err := a.SignIn(t.Context(), w, c.name, c.password, "192.0.2.1")
		if !errors.Is(err, c.err) {
			t.Errorf("%s: %v, want %v", c.name, err, c.err)
			continue
		}
		if c.err != nil {
			if err.Error() != "name and password do not fit" || len(w.Result().Cookies()) != 0 {
				t.Errorf("%s: %q and %d cookies", c.name, err, len(w.Result().Cookies()))
			}
			continue
		}
		id, err := a.Identify(carrying(w))
		if err != nil || id.Role != c.role || id.PersonID == 0 {
			t.Errorf("%s is %+v afterwards, %v", c.name, id, err)
		}
	}
}

func TestCookie(t *testing.T) {
	a, _, _ := people(t)
	w := httptest.NewRecorder()
	if _, err := a.SignIn(t.Context(), w, "Ada", password, "192.0.2.1"); err != nil {
		t.Fatal(err)
	}
	c := w.Result().Cookies()[0]
	if !c.HttpOnly || !c.Secure || c.SameSite != http.SameSiteLaxMode || c.Path != "/" || c.Domain != "" || c.Name != CookieName {
		t.Errorf("the cookie is %+v", c)
	}
	a.secure = false
	w = httptest.NewRecorder()
	if _, err := a.SignIn(t.Context(), w, "Ada", password, "192.0.2.1"); err != nil {
		t.Fatal(err)
	}
	if w.Result().Cookies()[0].Secure {
		t.Error("the cookie cannot be used over http")
	}
}

func TestSignOut(t *testing.T) {
	a, _, _ := people(t)
	w := httptest.NewRecorder()
	if _, err := a.SignIn(t.Context(), w, "Cy", password, "192.0.2.1"); err != nil {
		t.Fatal(err)
	}
	r := carrying(w)
	out := httptest.NewRecorder()
	if err := a.SignOut(out, r); err != nil {
		t.Fatal(err)
	}
	if c := out.Result().Cookies(); len(c) != 1 || c[0].MaxAge >= 0 || c[0].Value != "" {
		t.Errorf("the browser keeps the cookie: %v", c)
	}
	if id, err := a.Identify(r); err != nil || id.Role != RoleNone { // the token was copied
		t.Errorf("the token still signs in: %+v, %v", id, err)
	}
	if err := a.SignOut(httptest.NewRecorder(), httptest.NewRequest("POST", "/", nil)); err != nil {
		t.Errorf("signing out twice: %v", err)
	}
}

func TestSessionsEnd(t *testing.T) {
	a, s, c := people(t)
	w := httptest.NewRecorder()
	if _, err := a.SignIn(t.Context(), w, "Cy", password, "192.0.2.1"); err != nil {
		t.Fatal(err)
	}
	r := carrying(w)
	who := func() Role {
		t.Helper()
		id, err := a.Identify(r)
		if err != nil {
			t.Fatal(err)
		}
		return id.Role
	}
	for day := range 29 { // used every day
		if who() != RoleReader {
			t.Fatalf("the session ended on day %d", day)
		}
		c.pass(24 * time.Hour)
	}
	c.pass(25 * time.Hour)
	if who() != RoleNone {
		t.Error("a session outlives thirty days")
	}
	w = httptest.NewRecorder()
	if _, err := a.SignIn(t.Context(), w, "Cy", password, "192.0.2.1"); err != nil {
		t.Fatal(err)
	}
	r = carrying(w)
	c.pass(8 * 24 * time.Hour)
	if who() != RoleNone {
		t.Error("a session outlives a week without a request")
	}
	w = httptest.NewRecorder()
	if _, err := a.SignIn(t.Context(), w, "Cy", password, "192.0.2.1"); err != nil {
		t.Fatal(err)
	}
	r = carrying(w)
	p, err := s.PersonByName(t.Context(), "Cy")
	if err != nil {
		t.Fatal(err)
	}
	if err := s.SetDisabled(t.Context(), p.ID, true, "test"); err != nil {
		t.Fatal(err)
	}
	if who() != RoleNone {
		t.Error("somebody who was shut out is still in")
	}
}

func TestLinks(t *testing.T) {
	a, s, c := people(t)
	di, err := s.PersonByName(t.Context(), "Di")
	if err != nil {
		t.Fatal(err)
	}
	link := func() string {
		token, err := a.Link(t.Context(), di.ID, time.Hour)
		if err != nil {
			t.Fatal(err)
		}
		return token
	}
	use := func(token string) error {
		w := httptest.NewRecorder()
		id, err := a.SignInByLink(t.Context(), w, token)
		if err == nil {
			if again, ierr := a.Identify(carrying(w)); ierr != nil || again.Name != "Di" || id.Name != "Di" {
				t.Errorf("the link signs in %+v, %v", again, ierr)
			}
		}
		return err
	}
	once := link()
	if err := use(once); err != nil {
		t.Fatal(err)
	}
	old := link()
	c.pass(time.Hour + time.Second)
	for name, token := range map[string]string{"used": once, "too old": old, "unknown": "nobody's", "empty": ""} {
		if err := use(token); !errors.Is(err, scheduler.ErrUnauthenticated) {
			t.Errorf("a link that is %s: %v", name, err)
		}
	}
}

func TestKeys(t *testing.T) {
	a, s, _ := people(t)
	token, hash := NewToken()
	if _, err := s.AddKey(t.Context(), "BRM control", "BRM", hash, "test"); err != nil {
		t.Fatal(err)
	}
	ask := func(header string) (Identity, error) {
		r := httptest.NewRequest("GET", "/", nil)
		r.Header.Set("Authorization", header)
		return a.Identify(r)
	}
	for _, c := range []struct {
		header string
		role   Role
		err    error
	}{
		{"Bearer " + token, RoleKey, nil}, {"bearer  " + token + " ", RoleKey, nil},
		{"Bearer x" + token, "", scheduler.ErrUnauthenticated}, {"Bearer", "", scheduler.ErrUnauthenticated}, {"Bearer ", "", scheduler.ErrUnauthenticated},
		{"Basic YTpi", "", nil}, {token, "", nil},
	} {
		id, err := ask(c.header)
		if !errors.Is(err, c.err) || id.Role != c.role {
			t.Errorf("%q: %+v, %v", c.header, id, err)
		}
	}
	id, err := ask("Bearer " + token)
	if err != nil || !id.MayReport("BRM") || id.MayReport("KAV") || id.MaySee("KAV") || id.Actor() != "key BRM control" {
		t.Errorf("the key is %+v, %v", id, err)
	}
	if err := s.RevokeKey(t.Context(), "BRM control", "test"); err != nil {
		t.Fatal(err)
	}
	if _, err := ask("Bearer " + token); !errors.Is(err, scheduler.ErrUnauthenticated) {
		t.Errorf("a revoked key: %v", err)
	}
}

func TestWhoMayReport(t *testing.T) {
	for _, c := range []struct {
		id     Identity
		report bool
		see    bool
	}{
		{Identity{}, false, true}, {Identity{Role: RoleReader}, false, true}, {Identity{Role: RoleCoordinator}, true, true},
		{Identity{Role: RoleObserver}, false, true}, {Identity{Role: RoleObserver, Telescopes: []string{"BRM"}}, true, true},
		{Identity{Role: RoleObserver, Telescopes: []string{"KAV"}}, false, true},
		{Identity{Role: RoleKey}, false, false}, {Identity{Role: RoleKey, Telescopes: []string{"BRM"}}, true, true},
	} {
		if c.id.MayReport("BRM") != c.report || c.id.MaySee("BRM") != c.see {
			t.Errorf("%+v: report %v, see %v", c.id, c.id.MayReport("BRM"), c.id.MaySee("BRM"))
		}
	}
}

func TestContext(t *testing.T) {
	if id := From(context.Background()); id.Role != RoleNone {
		t.Errorf("nobody is %+v", id)
	}
	want := Identity{Name: "Ada", Role: RoleCoordinator, PersonID: 7}
	if id := From(With(context.Background(), want)); id.Name != want.Name || id.Role != want.Role || id.Actor() != "Ada" {
		t.Errorf("%+v", id)
	}
}
