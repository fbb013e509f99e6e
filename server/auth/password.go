// Package auth knows who is asking: sessions of people, keys of control
// scripts, passwords, one-time links, and what each role may touch. Which role
// may call which route is the route table's business.
package auth

import (
	"context"
	"crypto/rand"
	"crypto/subtle"
	"encoding/base64"
	"errors"
	"fmt"
	"strings"
	"sync"
	"unicode/utf8"

	"golang.org/x/crypto/argon2"

	"cadencewright/scheduler"
)

// Parameters of argon2id for new passwords: 19 MiB, two passes, one lane, the
// least that OWASP's password storage cheat sheet advises. A stored hash keeps
// its own, so that these may be raised.
const (
	memoryKiB = 19 * 1024
	passes    = 2
	lanes     = 1
	saltLen   = 16
	hashLen   = 32
)

// slots bound how many hashes are worked on at once: each takes 19 MiB and a
// processor for about 25 ms.
var slots = make(chan struct{}, 4)

// turn waits for a slot, as long as ctx lasts. The function that it returns
// gives the slot back.
func turn(ctx context.Context) (func(), error) {
	select {
	case slots <- struct{}{}:
		return func() { <-slots }, nil
	case <-ctx.Done():
		return nil, scheduler.Errorf(scheduler.ErrTooMany, "too many people are signing in at once; try again: %w", ctx.Err())
	}
}

// MinPassword, in characters, and MaxPassword, in bytes, bound a password.
const (
	MinPassword = 10
	MaxPassword = 200
)

// HashPassword hashes a new password into a PHC string.
func HashPassword(password string) (string, error) {
	if utf8.RuneCountInString(password) < MinPassword || len(password) > MaxPassword {
		return "", scheduler.Errorf(scheduler.ErrInvalid, "a password has at least %d characters and at most %d bytes", MinPassword, MaxPassword)
	}
	done, err := turn(context.Background()) // commands hash one at a time
	if err != nil {
		return "", err
	}
	defer done()
	salt := make([]byte, saltLen)
	rand.Read(salt) // it never fails
	return phc{memoryKiB, passes, lanes, salt}.hash(password), nil
}

// CheckPassword tells whether a password is the one of a stored hash.
func CheckPassword(ctx context.Context, hash, password string) (bool, error) {
	done, err := turn(ctx)
	if err != nil {
		return false, err
	}
	defer done()
	return check(hash, password)
}

// check is CheckPassword for who has a slot.
func check(hash, password string) (bool, error) {
	p, err := parsePHC(hash)
	if err != nil {
		return false, err
	}
	if len(password) > MaxPassword {
		return false, nil // no password is so long: not worth the work
	}
	return subtle.ConstantTimeCompare([]byte(p.hash(password)), []byte(hash)) == 1, nil
}

// phc is what a PHC string says besides the hash: how it was made.
type phc struct {
	memoryKiB, passes uint32
	lanes             uint8
	salt              []byte
}

// hash is the PHC string of a password.
func (p phc) hash(password string) string {
	h := argon2.IDKey([]byte(password), p.salt, p.passes, p.memoryKiB, p.lanes, hashLen)
	b := base64.RawStdEncoding
	return fmt.Sprintf("$argon2id$v=%d$m=%d,t=%d,p=%d$%s$%s", argon2.Version, p.memoryKiB, p.passes, p.lanes, b.EncodeToString(p.salt), b.EncodeToString(h))
}

// parsePHC reads a PHC string. Parameters that would take gigabytes or minutes
// are refused: they are not ours.
func parsePHC(s string) (phc, error) {
	var p phc
	var version int
	parts := strings.Split(s, "$")
	if len(parts) != 6 || parts[0] != "" || parts[1] != "argon2id" {
		return p, errors.New("password hash: unknown form")
	}
	if _, err := fmt.Sscanf(parts[2], "v=%d", &version); err != nil || version != argon2.Version {
		return p, errors.New("password hash: unknown version")
	}
	_, err := fmt.Sscanf(parts[3], "m=%d,t=%d,p=%d", &p.memoryKiB, &p.passes, &p.lanes)
	if err != nil || p.memoryKiB < 8 || p.memoryKiB > 1<<20 || p.passes < 1 || p.passes > 100 || p.lanes < 1 {
		return p, errors.New("password hash: bad parameters")
	}
	if p.salt, err = base64.RawStdEncoding.DecodeString(parts[4]); err != nil {
		return p, errors.New("password hash: bad salt")
	}
	return p, nil
}

// absent is checked against for a name that nobody has, so that the answer
// takes as long as for one that somebody has.
var absent = sync.OnceValue(func() string {
	return phc{memoryKiB, passes, lanes, make([]byte, saltLen)}.hash("")
})
