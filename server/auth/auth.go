package auth

import (
	"context"
	"errors"
	"net/http"
	"slices"
	"strings"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/store"
)

// Role is what somebody may do.
type Role string

// The roles. A key has the role RoleKey and one telescope.
const (
	RoleNone        Role = ""
	RoleReader      Role = "reader"
	RoleObserver    Role = "observer"
	RoleCoordinator Role = "coordinator"
	RoleKey         Role = "key"
)

// Identity is who asks.
type Identity struct {
	Name       string
	Role       Role
	Telescopes []string // of an observer or a key; empty for an observer: all
	PersonID   int64
}

// Actor is the name that the journal notes.
func (id Identity) Actor() string {
	if id.Role == RoleKey {
		return "key " + id.Name
	}
	return id.Name
}

// Telescope tells whether the identity may report for a telescope.
func (id Identity) Telescope(code string) bool {
	switch id.Role {
	case RoleCoordinator:
		return true
	case RoleKey:
		return slices.Contains(id.Telescopes, code)
	case RoleObserver:
		return len(id.Telescopes) == 0 || slices.Contains(id.Telescopes, code)
	}
	return false
}

type contextKey struct{}

// With puts who asks into a context.
func With(ctx context.Context, id Identity) context.Context {
	return context.WithValue(ctx, contextKey{}, id)
}

// From is who asks; the zero Identity for somebody unknown.
func From(ctx context.Context) Identity {
	id, _ := ctx.Value(contextKey{}).(Identity)
	return id
}

// Store is what auth needs of the database.
type Store interface {
	SessionPerson(ctx context.Context, tokenHash []byte) (store.Person, error)
	KeyByHash(ctx context.Context, tokenHash []byte) (store.Key, error)
	PersonByName(ctx context.Context, name string) (store.Person, error)
	AddSession(ctx context.Context, tokenHash []byte, person int64) error
	EndSession(ctx context.Context, tokenHash []byte) error
	UseLink(ctx context.Context, tokenHash []byte) (store.Person, error)
	AddLink(ctx context.Context, tokenHash []byte, person int64, life time.Duration) error
	NoteFailure(ctx context.Context, subject string) error
	Failures(ctx context.Context, subject string, within time.Duration) (int, error)
}

// Auth signs people in and finds out who asks.
type Auth struct {
	store  Store
	secure bool // cookies over https only
}

// New makes an Auth; secure says that people come over https.
func New(s Store, secure bool) *Auth { return &Auth{s, secure} }

const cookieName = "cadencewright_session"

// Identify finds out who a request is from: a bearer key, else a session's
// cookie. Nobody is no error; a key that is wrong is.
func (a *Auth) Identify(r *http.Request) (Identity, error) {
	if h := r.Header.Get("Authorization"); h != "" {
		token, ok := strings.CutPrefix(h, "Bearer ")
		if !ok {
			return Identity{}, scheduler.Errorf(scheduler.ErrUnauthenticated, "send the key as: Authorization: Bearer KEY")
		}
		k, err := a.store.KeyByHash(r.Context(), HashToken(strings.TrimSpace(token)))
		if errors.Is(err, scheduler.ErrNotFound) {
			return Identity{}, scheduler.Errorf(scheduler.ErrUnauthenticated, "this key is unknown or has been revoked")
		}
		return Identity{Name: k.Name, Role: RoleKey, Telescopes: []string{k.Telescope}}, err
	}
	c, err := r.Cookie(cookieName)
	if err != nil || c.Value == "" {
		return Identity{}, nil
	}
	p, err := a.store.SessionPerson(r.Context(), HashToken(c.Value))
	if errors.Is(err, scheduler.ErrNotFound) {
		return Identity{}, nil
	}
	return identityOf(p), err
}

func identityOf(p store.Person) Identity {
	return Identity{Name: p.Name, Role: Role(p.Role), Telescopes: p.Telescopes, PersonID: p.ID}
}

// How many wrong passwords a name, and an address, may give in a while.
const (
	failuresWithin  = 15 * time.Minute
	failuresPerName = 10
	failuresPerAddr = 50
)

// SignIn checks a name and password and begins a session.
func (a *Auth) SignIn(ctx context.Context, w http.ResponseWriter, name, password, addr string) (Identity, error) {
	byName, byAddr := "name "+strings.ToLower(name), "addr "+addr
	for subject, limit := range map[string]int{byName: failuresPerName, byAddr: failuresPerAddr} {
		n, err := a.store.Failures(ctx, subject, failuresWithin)
		if err != nil {
			return Identity{}, err
		}
		if n >= limit {
			return Identity{}, scheduler.Errorf(scheduler.ErrTooMany, "too many wrong passwords; wait %d minutes", int(failuresWithin.Minutes()))
		}
	}
	p, err := a.store.PersonByName(ctx, name)
	hash := absent
	switch {
	case err == nil && p.PasswordHash != nil && !p.Disabled:
		hash = *p.PasswordHash
	case err != nil && !errors.Is(err, scheduler.ErrNotFound):
		return Identity{}, err
	}
	ok, err := CheckPassword(hash, password)
	if err != nil {
		return Identity{}, err
	}
	if !ok || hash == absent {
		for _, subject := range []string{byName, byAddr} {
			if err := a.store.NoteFailure(ctx, subject); err != nil {
				return Identity{}, err
			}
		}
		return Identity{}, scheduler.Errorf(scheduler.ErrUnauthenticated, "name and password do not fit")
	}
	return identityOf(p), a.begin(ctx, w, p.ID)
}

// SignInByLink uses up a one-time link and begins a session.
func (a *Auth) SignInByLink(ctx context.Context, w http.ResponseWriter, token string) (Identity, error) {
	p, err := a.store.UseLink(ctx, HashToken(token))
	if errors.Is(err, scheduler.ErrNotFound) {
		return Identity{}, scheduler.Errorf(scheduler.ErrUnauthenticated, "this link is unknown, has been used or is too old; ask for another")
	}
	if err != nil {
		return Identity{}, err
	}
	return identityOf(p), a.begin(ctx, w, p.ID)
}

// begin makes a session and its cookie.
func (a *Auth) begin(ctx context.Context, w http.ResponseWriter, person int64) error {
	token, hash := NewToken()
	if err := a.store.AddSession(ctx, hash, person); err != nil {
		return err
	}
	http.SetCookie(w, a.cookie(token, 30*24*3600))
	return nil
}

func (a *Auth) cookie(value string, age int) *http.Cookie {
	return &http.Cookie{Name: cookieName, Value: value, Path: "/", MaxAge: age, HttpOnly: true, Secure: a.secure, SameSite: http.SameSiteLaxMode}
}

// SignOut ends the session of a request.
func (a *Auth) SignOut(w http.ResponseWriter, r *http.Request) error {
	if c, err := r.Cookie(cookieName); err == nil {
		if err := a.store.EndSession(r.Context(), HashToken(c.Value)); err != nil {
			return err
		}
	}
	http.SetCookie(w, a.cookie("", -1))
	return nil
}

// Link makes a one-time link's token for a person.
func (a *Auth) Link(ctx context.Context, person int64, life time.Duration) (string, error) {
	token, hash := NewToken()
	return token, a.store.AddLink(ctx, hash, person, life)
}
