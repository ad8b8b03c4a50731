package gate

import (
	"crypto/rand"
	"crypto/sha256"
	"crypto/subtle"
	"encoding/base32"
	"encoding/hex"
	"errors"
	"strings"
	"time"
)

// The life of a code (OWASP ASVS 5.0, 6.5.1 and 6.5.5: single use, from a
// secure generator, at most ten minutes).
const (
	codeLife  = 10 * time.Minute
	codeBytes = 5 // 40 bits: 8 letters of base32; ASVS 6.5.4 asks for 20 bits at least
	// codeTries wrong guesses close all codes. Our choice: enough for a thumb
	// in the dark, and a guess in 2^40 with each.
	codeTries = 5
	// codesOpen at a time, so that nobody fills the memory. Our choice.
	codesOpen = 16
)

// Errors of pairing.
var (
	// ErrCode: wrong, used, or too old. Which of them is not told.
	ErrCode = errors.New("the code is not valid; ask for a new one with: wakeback pair")
	// ErrTries: too many wrong codes; all open ones were closed.
	ErrTries = errors.New("too many wrong codes; ask for a new one with: wakeback pair")
	// ErrManyCodes: too many codes wait to be used.
	ErrManyCodes = errors.New("too many pairing codes are open; wait until some are used or old")
)

// Code is a one-time code for one device.
type Code struct {
	Code      string    `json:"code"`
	Role      Role      `json:"role"`
	ExpiresAt time.Time `json:"expires_at"`
}

// base32Crockford leaves out I, L, O and U, which are misread or misheard.
var base32Crockford = base32.NewEncoding("0123456789ABCDEFGHJKMNPQRSTVWXYZ").WithPadding(base32.NoPadding)

func newCode() string {
	var b [codeBytes]byte
	_, _ = rand.Read(b[:]) // never fails: crypto/rand.Read ends the program instead
	return base32Crockford.EncodeToString(b[:])
}

// normal is a code as typed, in the form it was made: case, spaces and dashes
// do not matter, and the letters it never has stand for the digits they look like.
func normal(typed string) string {
	return strings.NewReplacer(" ", "", "-", "", "O", "0", "I", "1", "L", "1").Replace(strings.ToUpper(typed))
}

// newToken makes a token and what is kept of it.
func newToken() (token, hash string) {
	var b [32]byte
	_, _ = rand.Read(b[:])
	token = base32Crockford.EncodeToString(b[:])
	return token, hashToken(token)
}

func hashToken(token string) string {
	sum := sha256.Sum256([]byte(token))
	return hex.EncodeToString(sum[:])
}

func equal(a, b string) bool { return subtle.ConstantTimeCompare([]byte(a), []byte(b)) == 1 }
