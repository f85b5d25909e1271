package catalogue

import (
	"context"
	"crypto/rand"
	"database/sql"
	"errors"
	"strings"
	"time"
)

// linkLife is how long a link to choose a password works.
const linkLife = 7 * 24 * time.Hour

// SetProfile changes the public credit line and the ORCID iD of an account.
func (s *Store) SetProfile(ctx context.Context, id int64, credit, orcid string) error {
	credit = strings.TrimSpace(credit)
	orcid, err := ParseORCID(orcid)
	if err != nil {
		return err
	}
	return s.write(ctx, func(tx *sql.Tx) error {
		a, err := accountByID(ctx, tx, id)
		if err != nil {
			return err
		}
		if err := checkAccount(a.Name, credit, a.Role); err != nil {
			return err
		}
		_, err = tx.ExecContext(ctx, `UPDATE accounts SET credit = ?, orcid = ? WHERE id = ?`, credit, orcid, id)
		return err
	})
}

// CreatePasswordToken returns the token of a one-time address at which the
// person of the account chooses a password. It replaces an earlier one.
func (s *Store) CreatePasswordToken(ctx context.Context, account int64) (string, error) {
	token := rand.Text()
	return token, s.write(ctx, func(tx *sql.Tx) error {
		if _, err := accountByID(ctx, tx, account); err != nil {
			return err
		}
		if _, err := tx.ExecContext(ctx, `DELETE FROM one_time_tokens WHERE account_id = ?`, account); err != nil {
			return err
		}
		_, err := tx.ExecContext(ctx, `INSERT INTO one_time_tokens (token_hash, purpose, account_id, created_at, expires_at) VALUES (?, 'reset', ?, ?, ?)`,
			hashToken(token), account, s.stamp(), s.now().Add(linkLife).UTC().Format(time.RFC3339))
		return err
	})
}

var usedToken = &Error{Code: Forbidden, Message: "this address has been used or has ended; ask a keeper of the catalogue for a new one"}

// PasswordTokenAccount returns whose password the token would set.
func (s *Store) PasswordTokenAccount(ctx context.Context, token string) (*Account, error) {
	a, err := tokenAccount(ctx, s.r, token, s.stamp())
	return a, fault("token", err)
}

func tokenAccount(ctx context.Context, q querier, token, now string) (*Account, error) {
	a, err := scanAccount(q.QueryRowContext(ctx, selectAccount+` WHERE disabled = 0 AND id = (SELECT account_id FROM one_time_tokens
		WHERE token_hash = ? AND purpose = 'reset' AND expires_at > ?)`, hashToken(token), now))
	if errors.Is(err, sql.ErrNoRows) {
		return nil, usedToken
	}
	return &a, err
}

// UsePasswordToken sets the password of the token's account and ends the
// token: both or neither.
func (s *Store) UsePasswordToken(ctx context.Context, token, password string) (*Account, error) {
	if _, err := s.PasswordTokenAccount(ctx, token); err != nil {
		return nil, err
	}
	hash, err := s.hashPassword(ctx, password)
	if err != nil {
		return nil, err
	}
	var a *Account
	err = s.write(ctx, func(tx *sql.Tx) error {
		if a, err = tokenAccount(ctx, tx, token, s.stamp()); err != nil {
			return err
		}
		if _, err := tx.ExecContext(ctx, `DELETE FROM one_time_tokens WHERE account_id = ?`, a.ID); err != nil {
			return err
		}
		_, err := tx.ExecContext(ctx, `UPDATE accounts SET password_hash = ? WHERE id = ?`, hash, a.ID)
		return err
	})
	return a, err
}

// EndSessions deletes the sessions whose data the caller recognises: what a
// session holds is encoded by the session manager, which only it can read.
func (s *Store) EndSessions(ctx context.Context, match func(data []byte) bool) error {
	return s.write(ctx, func(tx *sql.Tx) error {
		ended, err := sessionsWith(ctx, tx, match)
		if err != nil {
			return err
		}
		for _, hash := range ended {
			if _, err := tx.ExecContext(ctx, `DELETE FROM sessions WHERE token_hash = ?`, hash); err != nil {
				return err
			}
		}
		return nil
	})
}

func sessionsWith(ctx context.Context, tx *sql.Tx, match func(data []byte) bool) (hashes [][]byte, err error) {
	rows, err := tx.QueryContext(ctx, `SELECT token_hash, data FROM sessions`)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	for rows.Next() {
		var hash, data []byte
		if err := rows.Scan(&hash, &data); err != nil {
			return nil, err
		}
		if match(data) {
			hashes = append(hashes, hash)
		}
	}
	return hashes, rows.Err()
}

// ChangeSet is what was accepted in one transaction.
type ChangeSet struct {
	ID         int64
	At         time.Time
	Who        string // credit line of who accepted it
	Author     string // of whose contribution it was, "" when the same
	Why        string
	Submission int64 // 0 = imported or changed directly
	Created    int   // records made
	Changed    int   // fields changed
	System     string
	SystemName string
	Systems    int   // how many systems it touches
	Settings   int   // how many settings it changes
	Withdrawn  int   // measurements that left the catalogue
	Back       int   // and that came back
	Merged     int   // systems that became part of another
	Undoes     int64 // the change set it takes back, 0 = none
	UndoneBy   int64 // the newest that takes it back, 0 = none
	Sampled    int   // rows of its file that were read before all were accepted
	SampledOf  int   // and how many waited
}

// Activity lists the latest accepted changes, newest first.
func (s *Store) Activity(ctx context.Context, limit int) ([]ChangeSet, error) {
	return s.changeSets(ctx, ` ORDER BY t.id DESC LIMIT ?`, limit)
}

// ChangeSet returns one of them.
func (s *Store) ChangeSet(ctx context.Context, id int64) (*ChangeSet, error) {
	sets, err := s.changeSets(ctx, ` WHERE t.id = ?`, id)
	if err == nil && len(sets) == 0 {
		err = &Error{Code: NotFound, Message: "there is no such change"}
	}
	if err != nil {
		return nil, err
	}
	return &sets[0], nil
}

// countRevisions counts those of a change set t that did something.
func countRevisions(condition string) string {
	return `(SELECT count(*) FROM revisions v WHERE v.change_set_id = t.id AND ` + condition + `)`
}

var selectChangeSets = `SELECT t.id, t.at, ` + whoExpr + `, coalesce(b.credit, ''), t.why, coalesce(t.submission_id, 0), ` +
	countRevisions(`v.action = 'create'`) + `, ` + countRevisions(`v.action = 'change'`) + `, ` + countRevisions(`v.record >= 'setting:' AND v.record < 'setting;'`) + `, ` +
	countRevisions(`v.action = 'withdraw' AND v.record LIKE 'measurement:%'`) + `, ` + countRevisions(`v.action = 'accept' AND v.record LIKE 'measurement:%'`) + `, ` +
	countRevisions(`v.action = 'withdraw' AND v.field = 'merged_into'`) + `,
	coalesce(t.undoes, 0), coalesce((SELECT max(u.id) FROM change_sets u WHERE u.undoes = t.id), 0),
	coalesce(json_array_length(p.drawn), 0), coalesce(p.total, 0)
	FROM change_sets t LEFT JOIN accounts a ON a.id = t.account_id LEFT JOIN accounts b ON b.id = t.author_id LEFT JOIN samples p ON p.id = t.sample_id`

func (s *Store) changeSets(ctx context.Context, tail string, args ...any) ([]ChangeSet, error) {
	rows, err := s.r.QueryContext(ctx, selectChangeSets+tail, args...)
	if err != nil {
		return nil, fault("activity", err)
	}
	defer rows.Close()
	var out []ChangeSet
	for rows.Next() {
		var c ChangeSet
		var at string
		if err := rows.Scan(&c.ID, &at, &c.Who, &c.Author, &c.Why, &c.Submission, &c.Created, &c.Changed, &c.Settings, &c.Withdrawn, &c.Back, &c.Merged, &c.Undoes, &c.UndoneBy, &c.Sampled, &c.SampledOf); err != nil {
			return nil, fault("activity", err)
		}
		c.At = parseTime(at)
		out = append(out, c)
	}
	if err := rows.Err(); err != nil {
		return nil, fault("activity", err)
	}
	for i := range out {
		if err := s.touched(ctx, &out[i]); err != nil {
			return nil, fault("activity", err)
		}
	}
	return out, nil
}

// touched fills the systems of a change set.
func (s *Store) touched(ctx context.Context, c *ChangeSet) error {
	return s.r.QueryRowContext(ctx, `SELECT count(*), coalesce(min(slug), ''), coalesce(min(system_name), '') FROM (
			SELECT y.slug, y.system_name FROM revisions v JOIN systems y ON y.slug = substr(v.record, 8)
				WHERE v.change_set_id = ?1 AND v.record LIKE 'system:%'
			UNION SELECT y.slug, y.system_name FROM revisions v JOIN (SELECT measurement, system_id FROM measurements UNION ALL SELECT measurement, system_id FROM withdrawn_measurements) m
				ON m.measurement = substr(v.record, 13) JOIN systems y ON y.id = m.system_id WHERE v.change_set_id = ?1 AND v.record LIKE 'measurement:%')`, c.ID).
		Scan(&c.Systems, &c.System, &c.SystemName)
}
