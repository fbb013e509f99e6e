// Package auth knows who is asking: sessions of people, keys of control
// scripts, passwords, one-time links, and which role may do what.
package auth

import (
	"crypto/rand"
	"crypto/sha256"
	"crypto/subtle"
	"encoding/base64"
	"errors"
	"fmt"
	"strings"

	"golang.org/x/crypto/argon2"

	"cadencewright/scheduler"
)

// Parameters of argon2id for new passwords: OWASP's 19 MiB, two passes, one
// lane. A stored hash keeps its own, so that these may be raised.
const (
	memoryKiB = 19 * 1024
	passes    = 2
	lanes     = 1
	saltLen   = 16
	hashLen   = 32
)

// hashing bounds how many hashes are worked on at once: each takes 19 MiB.
var hashing = make(chan struct{}, 4)

// MinPassword and MaxPassword bound a password's length in bytes.
const (
	MinPassword = 10
	MaxPassword = 200
)

// HashPassword hashes a new password (PHC string).
func HashPassword(password string) (string, error) {
	if len(password) < MinPassword || len(password) > MaxPassword {
		return "", scheduler.Errorf(scheduler.ErrInvalid, "a password has %d to %d characters", MinPassword, MaxPassword)
	}
	salt := make([]byte, saltLen)
	rand.Read(salt)
	return encode(password, salt, memoryKiB, passes, lanes), nil
}

func encode(password string, salt []byte, memory, time uint32, threads uint8) string {
	hashing <- struct{}{}
	defer func() { <-hashing }()
	h := argon2.IDKey([]byte(password), salt, time, memory, threads, hashLen)
	b := base64.RawStdEncoding
	return fmt.Sprintf("$argon2id$v=%d$m=%d,t=%d,p=%d$%s$%s", argon2.Version, memory, time, threads, b.EncodeToString(salt), b.EncodeToString(h))
}

// CheckPassword tells whether a password is the one of a stored hash.
func CheckPassword(hash, password string) (bool, error) {
	parts := strings.Split(hash, "$")
	var version int
	var memory, time uint32
	var threads uint8
	if len(parts) != 6 || parts[1] != "argon2id" {
		return false, errors.New("password hash: unknown form")
	}
	if _, err := fmt.Sscanf(parts[2], "v=%d", &version); err != nil || version != argon2.Version {
		return false, errors.New("password hash: unknown version")
	}
	if _, err := fmt.Sscanf(parts[3], "m=%d,t=%d,p=%d", &memory, &time, &threads); err != nil || memory > 1<<20 || time > 100 || time == 0 || threads == 0 {
		return false, errors.New("password hash: bad parameters")
	}
	salt, err := base64.RawStdEncoding.DecodeString(parts[4])
	if err != nil {
		return false, errors.New("password hash: bad salt")
	}
	if len(password) > MaxPassword {
		return false, nil
	}
	return subtle.ConstantTimeCompare([]byte(encode(password, salt, memory, time, threads)), []byte(hash)) == 1, nil
}

// absent is checked against for a name that nobody has, so that the answer
// takes as long as for one that somebody has.
var absent = encode("", make([]byte, saltLen), memoryKiB, passes, lanes)

// NewToken makes a token, 32 random bytes, and the hash under which it is kept.
func NewToken() (token string, hash []byte) {
	b := make([]byte, 32)
	rand.Read(b)
	token = base64.RawURLEncoding.EncodeToString(b)
	return token, HashToken(token)
}

// HashToken is the hash under which a token is kept.
func HashToken(token string) []byte {
	sum := sha256.Sum256([]byte(token))
	return sum[:]
}
