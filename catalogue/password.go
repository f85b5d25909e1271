package catalogue

import (
	"context"
	"crypto/rand"
	"crypto/subtle"
	"encoding/base64"
	"fmt"
	"strings"
	"unicode/utf8"

	"golang.org/x/crypto/argon2"
)

// hashesAtOnce bounds how many passwords are hashed at the same time: each
// takes hashMemory.
const hashesAtOnce = 2

// Cost of argon2id: the second of the two settings recommended for password
// storage in general, 19 MiB and two passes (from memory; common practice).
const (
	hashMemory  = 19 * 1024 // KiB
	hashPasses  = 2
	hashThreads = 1
	hashLength  = 32
	saltLength  = 16
)

// Limits of a password: long enough to resist guessing, short enough not to be
// a way to keep the machine busy.
const (
	MinPassword = 8
	MaxPassword = 512
)

// CheckPassword says whether a text can be a password; if not, an Invalid
// Error of the field password.
func CheckPassword(p string) error {
	n := utf8.RuneCountInString(p)
	if n < MinPassword || len(p) > MaxPassword || !utf8.ValidString(p) {
		return &Error{Code: Invalid, Field: "password", Message: "the password is too short or too long", Expected: fmt.Sprintf("%d characters or more, at most %d bytes", MinPassword, MaxPassword)}
	}
	return nil
}

// slot waits for leave to hash; it respects a cancelled request.
func (s *Store) slot(ctx context.Context) (release func(), err error) {
	select {
	case s.hashes <- struct{}{}:
		return func() { <-s.hashes }, nil
	case <-ctx.Done():
		return nil, fault("password", ctx.Err())
	}
}

// hashPassword returns the PHC form, $argon2id$v=19$m=..,t=..,p=..$salt$hash.
func (s *Store) hashPassword(ctx context.Context, password string) (string, error) {
	if err := CheckPassword(password); err != nil {
		return "", err
	}
	release, err := s.slot(ctx)
	if err != nil {
		return "", err
	}
	defer release()
	salt := make([]byte, saltLength)
	rand.Read(salt) // never fails
	key := argon2.IDKey([]byte(password), salt, hashPasses, hashMemory, hashThreads, hashLength)
	b64 := base64.RawStdEncoding
	return fmt.Sprintf("$argon2id$v=%d$m=%d,t=%d,p=%d$%s$%s", argon2.Version, hashMemory, hashPasses, hashThreads, b64.EncodeToString(salt), b64.EncodeToString(key)), nil
}

// nobody is a hash that no password fits: verifying against it takes as long as
// against a real one.
var nobody = fmt.Sprintf("$argon2id$v=%d$m=%d,t=%d,p=%d$%s$%s", argon2.Version, hashMemory, hashPasses, hashThreads,
	base64.RawStdEncoding.EncodeToString(make([]byte, saltLength)), base64.RawStdEncoding.EncodeToString(make([]byte, hashLength)))

func (s *Store) verifyPassword(ctx context.Context, hash, password string) (bool, error) {
	release, err := s.slot(ctx)
	if err != nil {
		return false, err
	}
	defer release()
	if len(password) > MaxPassword {
		password = password[:MaxPassword] // cannot fit; costs what others cost
	}
	var version, memory, passes, threads int
	parts := strings.Split(hash, "$")
	if len(parts) != 6 || parts[1] != "argon2id" {
		return false, nil
	}
	if _, err := fmt.Sscanf(parts[2]+" "+parts[3], "v=%d m=%d,t=%d,p=%d", &version, &memory, &passes, &threads); err != nil {
		return false, fault("password hash", err)
	}
	salt, err1 := base64.RawStdEncoding.DecodeString(parts[4])
	want, err2 := base64.RawStdEncoding.DecodeString(parts[5])
	if err1 != nil || err2 != nil || passes < 1 || threads < 1 || memory > 1<<20 || len(want) == 0 {
		return false, nil
	}
	got := argon2.IDKey([]byte(password), salt, uint32(passes), uint32(memory), uint8(threads), uint32(len(want)))
	return subtle.ConstantTimeCompare(got, want) == 1, nil
}
