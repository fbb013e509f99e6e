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

// Roles are all there are, nobody's first.
var Roles = []Role{RoleNone, RoleReader, RoleObserver, RoleCoordinator, RoleKey}

// String is the role in a sentence.
func (r Role) String() string {
	switch r {
	case RoleNone:
		return "somebody who has not signed in"
	case RoleKey:
		return "control script's key"
	}
	return string(r)
}

// Identity is who asks.
type Identity struct {
	Name       string
	Role       Role
	Telescopes []string // those that an observer, or a key, may report for
	PersonID   int64    // 0: a key, or nobody
}

// Actor is the name that the journal notes.
func (id Identity) Actor() string {
	if id.Role == RoleKey {
		return "key " + id.Name
	}
	return id.Name
}

// MayReport tells whether the identity may report for a telescope: a
// coordinator for all, an observer and a key for those that they are named
// for.
func (id Identity) MayReport(telescope string) bool {
	switch id.Role {
	case RoleCoordinator:
		return true
	case RoleKey, RoleObserver:
		return slices.Contains(id.Telescopes, telescope)
	}
	return false
}

// MaySee tells whether the identity may look at what is a telescope's: a key
// at its own alone, people at all.
func (id Identity) MaySee(telescope string) bool {
	return id.Role != RoleKey || slices.Contains(id.Telescopes, telescope)
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

// New makes an Auth; secure says that cookies go over https only.
func New(s Store, secure bool) *Auth { return &Auth{s, secure} }

// Identify finds out who a request is from: a bearer key, else a session's
// cookie. Nobody is no error; a key that is wrong is. Credentials of another
// scheme are somebody else's, such as a proxy's, and are passed over.
func (a *Auth) Identify(r *http.Request) (Identity, error) {
	if token, ok := bearer(r); ok {
		k, err := a.store.KeyByHash(r.Context(), HashToken(token))
		if errors.Is(err, scheduler.ErrNotFound) {
			return Identity{}, scheduler.Errorf(scheduler.ErrUnauthenticated, "this key is unknown or has been revoked")
		}
		if err != nil {
			return Identity{}, err
		}
		return Identity{Name: k.Name, Role: RoleKey, Telescopes: []string{k.Telescope}}, nil
	}
	c, err := r.Cookie(CookieName)
	if err != nil || c.Value == "" {
		return Identity{}, nil
	}
	p, err := a.store.SessionPerson(r.Context(), HashToken(c.Value))
	if errors.Is(err, scheduler.ErrNotFound) { // ended: nobody
		return Identity{}, nil
	}
	if err != nil {
		return Identity{}, err
	}
	return identityOf(p), nil
}

// bearer is the key that a request carries.
func bearer(r *http.Request) (string, bool) {
	scheme, token, _ := strings.Cut(r.Header.Get("Authorization"), " ")
	return strings.TrimSpace(token), strings.EqualFold(scheme, "Bearer")
}

func identityOf(p store.Person) Identity {
	return Identity{Name: p.Name, Role: Role(p.Role), Telescopes: p.Telescopes, PersonID: p.ID}
}
