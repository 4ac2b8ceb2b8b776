package server

import (
	"context"
	"crypto/rand"
	"crypto/subtle"
	"encoding/base64"
	"errors"
	"fmt"
	"strings"
	"unicode/utf8"

	"golang.org/x/crypto/argon2"
)

// HashCost is what one guess at a passphrase costs (argon2id, RFC 9106).
type HashCost struct {
	MemoryKiB uint32
	Passes    uint32
	Lanes     uint8
}

// PassphraseCost takes 64 MiB and about 0.3 s (measured on two cores); the least that OWASP's password storage sheet
// advises is 19 MiB and two passes.
var PassphraseCost = HashCost{MemoryKiB: 64 << 10, Passes: 3, Lanes: 1}

// hashesAtOnce bounds the memory that strangers can make the server take by signing in: each hash holds 64 MiB.
const hashesAtOnce = 2

const (
	saltBytes = 16
	keyBytes  = 32
)

// Hash is the stored form of a passphrase, in the usual notation with its own cost in it.
func (h HashCost) Hash(passphrase string) string {
	salt := make([]byte, saltBytes)
	rand.Read(salt) // never fails: crypto/rand ends the process instead
	key := argon2.IDKey([]byte(passphrase), salt, h.Passes, h.MemoryKiB, h.Lanes, keyBytes)
	enc := base64.RawStdEncoding
	return fmt.Sprintf("$argon2id$v=%d$m=%d,t=%d,p=%d$%s$%s", argon2.Version, h.MemoryKiB, h.Passes, h.Lanes,
		enc.EncodeToString(salt), enc.EncodeToString(key))
}

// dummy is what a name that nobody has is checked against, so that it takes as long as one that somebody has.
func (h HashCost) dummy() (string, error) {
	if h.MemoryKiB < 8 || h.Passes < 1 || h.Lanes < 1 {
		return "", errors.New("server: argon2id takes at least 8 KiB, one pass, one lane")
	}
	return h.Hash("nobody has this one " + rand.Text()), nil
}

// matches compares in constant time. weaker tells that the stored form cost less than h and should be made again.
func (h HashCost) matches(passphrase, stored string) (same, weaker bool, err error) {
	var version int
	var cost HashCost
	parts := strings.Split(stored, "$")
	if len(parts) != 6 || parts[0] != "" || parts[1] != "argon2id" {
		return false, false, errors.New("a stored passphrase is not in the form that this program writes")
	}
	if _, err := fmt.Sscanf(parts[2], "v=%d", &version); err != nil || version != argon2.Version {
		return false, false, errors.New("a stored passphrase is of another version of argon2")
	}
	if _, err := fmt.Sscanf(parts[3], "m=%d,t=%d,p=%d", &cost.MemoryKiB, &cost.Passes, &cost.Lanes); err != nil {
		return false, false, errors.New("a stored passphrase has no cost")
	}
	salt, saltErr := base64.RawStdEncoding.DecodeString(parts[4])
	key, keyErr := base64.RawStdEncoding.DecodeString(parts[5])
	if saltErr != nil || keyErr != nil || len(key) != keyBytes {
		return false, false, errors.New("a stored passphrase is damaged")
	}
	got := argon2.IDKey([]byte(passphrase), salt, cost.Passes, cost.MemoryKiB, cost.Lanes, keyBytes)
	return subtle.ConstantTimeCompare(got, key) == 1, cost.MemoryKiB < h.MemoryKiB || cost.Passes < h.Passes, nil
}

// hashTurn waits for one of the few places.
func (s *Server) hashTurn(ctx context.Context) (leave func(), err error) {
	select {
	case s.hashing <- struct{}{}:
		return func() { <-s.hashing }, nil
	case <-ctx.Done():
		return nil, ctx.Err()
	}
}

// The length of a passphrase. Length is what counts: no rules about kinds of characters, which make people write them
// down (NIST SP 800-63B, from memory).
const (
	shortestPassphrase = 10
	longestPassphrase  = 256
)

func checkNewPassphrase(passphrase, name string) *problem {
	count := utf8.RuneCountInString(passphrase)
	switch {
	case count < shortestPassphrase:
		return outOfRange("passphrase", "a passphrase has 10 characters or more; a few words do")
	case len(passphrase) > longestPassphrase:
		return outOfRange("passphrase", "a passphrase has 256 bytes at most")
	case strings.Count(passphrase, passphrase[:1]) == len(passphrase):
		return outOfRange("passphrase", "one character over and over is guessed at once")
	case strings.Contains(strings.ToLower(passphrase), strings.ToLower(strings.TrimSpace(name))) && len(name) > 3 &&
		count-utf8.RuneCountInString(name) < shortestPassphrase/2:
		return outOfRange("passphrase", "a passphrase that is mostly the name is guessed at once")
	}
	return nil
}
