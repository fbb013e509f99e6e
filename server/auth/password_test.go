package auth

import (
	"context"
	"encoding/base64"
	"errors"
	"strings"
	"testing"

	"golang.org/x/crypto/argon2"
	"pgregory.net/rapid"

	"cadencewright/scheduler"
)

// cheap is how tests make hashes: the same form, less work.
func cheap(password, salt string) string {
	return phc{memoryKiB: 8, passes: 1, lanes: 1, salt: []byte(salt)}.hash(password)
}

func TestPasswords(t *testing.T) {
	hash, err := HashPassword("correct horse")
	if err != nil {
		t.Fatal(err)
	}
	if !strings.HasPrefix(hash, "$argon2id$v=19$m=19456,t=2,p=1$") {
		t.Errorf("the hash is %s", hash)
	}
	for password, want := range map[string]bool{"correct horse": true, "correct horsE": false, "": false, "correct horse ": false, strings.Repeat("x", MaxPassword+1): false} {
		got, err := CheckPassword(t.Context(), hash, password)
		if err != nil || got != want {
			t.Errorf("%q: %v, %v, want %v", password, got, err, want)
		}
	}
	again, err := HashPassword("correct horse")
	if err != nil || again == hash {
		t.Errorf("two hashes of one password are the same: no salt (%v)", err)
	}
}

func TestPasswordLength(t *testing.T) {
	for _, c := range []struct {
		name, password string
		ok             bool
	}{
		{"empty", "", false},
		{"nine letters", "abcdefghi", false},
		{"nine letters of two bytes", "äöüäöüäöü", false},
		{"ten letters of two bytes", "äöüäöüäöüä", true},
		{"the longest", strings.Repeat("a", MaxPassword), true},
		{"longer", strings.Repeat("a", MaxPassword+1), false},
	} {
		_, err := HashPassword(c.password)
		if (err == nil) != c.ok || err != nil && !errors.Is(err, scheduler.ErrInvalid) {
			t.Errorf("%s: %v", c.name, err)
		}
	}
}

// The stored string is the PHC form of what the published algorithm gives.
func TestHashIsThatOfTheLibrary(t *testing.T) {
	salt := "0123456789abcdef"
	sum := argon2.IDKey([]byte("secret words"), []byte(salt), 3, 64, 2, hashLen)
	want := "$argon2id$v=19$m=64,t=3,p=2$" + base64.RawStdEncoding.EncodeToString([]byte(salt)) + "$" + base64.RawStdEncoding.EncodeToString(sum)
	if got := (phc{64, 3, 2, []byte(salt)}).hash("secret words"); got != want {
		t.Errorf("%s, want %s", got, want)
	}
	ok, err := check(want, "secret words") // with parameters that are not today's
	if !ok || err != nil {
		t.Errorf("%v, %v", ok, err)
	}
}

func TestBrokenHashes(t *testing.T) {
	good := cheap("secret words", "0123456789abcdef")
	for _, hash := range []string{
		"", "secret words", "$argon2i$" + good, strings.Replace(good, "argon2id", "argon2i", 1), strings.Replace(good, "v=19", "v=16", 1),
		strings.Replace(good, "m=8", "m=2000000", 1), strings.Replace(good, "m=8", "m=1", 1), strings.Replace(good, "t=1", "t=0", 1),
		strings.Replace(good, "t=1", "t=1000", 1), strings.Replace(good, "p=1", "p=0", 1), strings.Replace(good, "p=1", "p=300", 1), good + "$x",
		strings.Replace(good, "$MDEy", "$!!!!", 1), "x" + good,
	} {
		ok, err := check(hash, "secret words")
		if ok || err == nil {
			t.Errorf("%s: %v, %v", hash, ok, err)
		}
	}
}

// Whatever was stored, reading it neither panics nor lets somebody in.
func FuzzStoredHash(f *testing.F) {
	f.Add(cheap("x", "0123456789abcdef"))
	f.Add("$argon2id$v=19$m=8,t=1,p=1$$")
	f.Fuzz(func(t *testing.T, hash string) {
		p, err := parsePHC(hash)
		if err != nil || p.memoryKiB > 64 || p.passes > 4 || p.lanes > 4 {
			return // not worth the work here
		}
		if ok, _ := check(hash, "a password nobody has"); ok {
			t.Errorf("%q lets anybody in", hash)
		}
	})
}

func TestTurnEnds(t *testing.T) {
	var all []func()
	for range cap(slots) {
		done, err := turn(t.Context())
		if err != nil {
			t.Fatal(err)
		}
		all = append(all, done)
	}
	ctx, cancel := context.WithCancel(t.Context())
	cancel()
	if _, err := turn(ctx); !errors.Is(err, scheduler.ErrTooMany) {
		t.Errorf("one more turn: %v", err)
	}
	if _, err := CheckPassword(ctx, "", ""); !errors.Is(err, scheduler.ErrTooMany) {
		t.Errorf("a check without a turn: %v", err)
	}
	for _, done := range all {
		done()
	}
	done, err := turn(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	done()
}

func TestTokens(t *testing.T) {
	seen := map[string]bool{}
	for range 100 {
		token, hash := NewToken()
		b, err := base64.RawURLEncoding.DecodeString(token)
		if err != nil || len(b) != tokenLen || seen[token] {
			t.Fatalf("token %q: %d bytes, %v", token, len(b), err)
		}
		seen[token] = true
		if string(HashToken(token)) != string(hash) || len(hash) != 32 || strings.Contains(string(hash), token) {
			t.Fatalf("the hash of %q is %x", token, hash)
		}
	}
}

// A password fits its own hash and no other.
func TestPasswordsByDrawing(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a := rapid.StringN(1, 40, MaxPassword).Draw(t, "a")
		b := rapid.StringN(1, 40, MaxPassword).Draw(t, "b")
		hash := cheap(a, rapid.StringN(8, 16, 64).Draw(t, "salt"))
		if ok, err := check(hash, a); !ok || err != nil {
			t.Fatalf("%q does not fit its own hash: %v", a, err)
		}
		if ok, _ := check(hash, b); ok != (a == b) {
			t.Fatalf("%q fits the hash of %q: %v", b, a, ok)
		}
	})
}
