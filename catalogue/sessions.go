package catalogue

import (
	"context"
	"crypto/rand"
	"crypto/sha256"
	"database/sql"
	"encoding/base64"
	"errors"
	"time"
)

func hashToken(token string) []byte {
	h := sha256.Sum256([]byte(token))
	return h[:]
}

// SessionFind returns the data of a session that has not ended.
func (s *Store) SessionFind(ctx context.Context, token string) (data []byte, found bool, err error) {
	err = s.r.QueryRowContext(ctx, `SELECT data FROM sessions WHERE token_hash = ? AND expires_at > ?`, hashToken(token), s.stamp()).Scan(&data)
	if errors.Is(err, sql.ErrNoRows) {
		return nil, false, nil
	}
	return data, err == nil, fault("session", err)
}

// SessionCommit stores a session under the hash of its token.
func (s *Store) SessionCommit(ctx context.Context, token string, data []byte, expiry time.Time) error {
	if data == nil {
		data = []byte{}
	}
	return s.write(ctx, func(tx *sql.Tx) error {
		_, err := tx.ExecContext(ctx, `INSERT INTO sessions (token_hash, data, expires_at) VALUES (?, ?, ?)
			ON CONFLICT (token_hash) DO UPDATE SET data = excluded.data, expires_at = excluded.expires_at`,
			hashToken(token), data, expiry.UTC().Format(time.RFC3339))
		return err
	})
}

// SessionDelete ends a session.
func (s *Store) SessionDelete(ctx context.Context, token string) error {
	return s.write(ctx, func(tx *sql.Tx) error {
		_, err := tx.ExecContext(ctx, `DELETE FROM sessions WHERE token_hash = ?`, hashToken(token))
		return err
	})
}

// CleanSessions deletes sessions and one-time tokens that have ended.
func (s *Store) CleanSessions(ctx context.Context) error {
	return s.write(ctx, func(tx *sql.Tx) error {
		for _, table := range []string{"sessions", "one_time_tokens"} {
			if _, err := tx.ExecContext(ctx, `DELETE FROM `+table+` WHERE expires_at <= ?`, s.stamp()); err != nil {
				return err
			}
		}
		return nil
	})
}

// firstRunLife is how long the address that makes the first account works; a
// restart prints a new one.
const firstRunLife = 24 * time.Hour

// CreateFirstRunToken returns the token of the one-time address that makes the
// first account, or "" when there is an account already. A new token replaces
// the last one.
func (s *Store) CreateFirstRunToken(ctx context.Context) (token string, err error) {
	raw := make([]byte, 24)
	rand.Read(raw) // never fails
	token = base64.RawURLEncoding.EncodeToString(raw)
	err = s.write(ctx, func(tx *sql.Tx) error {
		var accounts int
		if err := tx.QueryRowContext(ctx, `SELECT count(*) FROM accounts`).Scan(&accounts); err != nil {
			return err
		}
		if accounts > 0 {
			token = ""
			return nil
		}
		if _, err := tx.ExecContext(ctx, `DELETE FROM one_time_tokens WHERE purpose = 'first_account'`); err != nil {
			return err
		}
		_, err := tx.ExecContext(ctx, `INSERT INTO one_time_tokens (token_hash, purpose, created_at, expires_at) VALUES (?, 'first_account', ?, ?)`,
			hashToken(token), s.stamp(), s.now().Add(firstRunLife).UTC().Format(time.RFC3339))
		return err
	})
	if err != nil {
		return "", err
	}
	return token, nil
}

// FirstRunTokenValid says whether the token would still make the first account.
func (s *Store) FirstRunTokenValid(ctx context.Context, token string) (bool, error) {
	var ok bool
	err := s.r.QueryRowContext(ctx, `SELECT EXISTS (SELECT 1 FROM one_time_tokens WHERE token_hash = ? AND purpose = 'first_account' AND expires_at > ?)
		AND NOT EXISTS (SELECT 1 FROM accounts)`, hashToken(token), s.stamp()).Scan(&ok)
	return ok, fault("token", err)
}

// UseFirstRunToken makes the first account, with the role given, and ends the
// token: both or neither.
func (s *Store) UseFirstRunToken(ctx context.Context, token, name, credit, role, password string) (*Account, error) {
	refused := &Error{Code: Forbidden, Message: "this address has been used or has ended; start the program again for a new one"}
	if ok, err := s.FirstRunTokenValid(ctx, token); err != nil || !ok {
		return nil, errors.Join(err, refused)
	}
	hash, err := s.newAccount(ctx, &name, &credit, role, password)
	if err != nil {
		return nil, err
	}
	var a *Account
	err = s.write(ctx, func(tx *sql.Tx) error {
		res, err := tx.ExecContext(ctx, `DELETE FROM one_time_tokens WHERE token_hash = ? AND purpose = 'first_account' AND expires_at > ?
			AND NOT EXISTS (SELECT 1 FROM accounts)`, hashToken(token), s.stamp())
		if err != nil {
			return err
		}
		if n, err := res.RowsAffected(); err != nil || n != 1 {
			return errors.Join(err, refused)
		}
		a, err = s.insertAccount(ctx, tx, name, credit, role, hash)
		return err
	})
	return a, err
}
