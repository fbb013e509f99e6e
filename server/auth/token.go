package auth

import (
	"crypto/rand"
	"crypto/sha256"
	"encoding/base64"
)

// tokenLen is the length of a token in bytes: too many to guess, so that a
// plain hash is enough to keep it by.
const tokenLen = 32

// NewToken makes a token for a session, a link or a key, and the hash under
// which it is kept: who reads the database cannot sign in with what is there.
func NewToken() (token string, hash []byte) {
	b := make([]byte, tokenLen)
	rand.Read(b) // it never fails
	token = base64.RawURLEncoding.EncodeToString(b)
	return token, HashToken(token)
}

// HashToken is the hash under which a token is kept.
func HashToken(token string) []byte {
	sum := sha256.Sum256([]byte(token))
	return sum[:]
}
