package catalogue

import (
	"cmp"
	"context"
	"crypto/rand"
	"database/sql"
	"errors"
	"math/big"
	"strconv"
	"strings"
	"time"
	"unicode"
	"unicode/utf8"
)

// Invitation is a one-time link that makes an account.
type Invitation struct {
	ID        int64
	Role      string // of the account it makes
	Note      string // for whom it is, in the words of who made it
	By        string // credit line of who made it
	At, Until time.Time
	Ended     time.Time // zero while it is open and not run out
	Name      string    // sign-in name of the account made with it, "" if none
}

// Open says whether the link still works at a time.
func (i *Invitation) Open(now time.Time) bool { return i.Ended.IsZero() && now.Before(i.Until) }

// LongestInvitation is how many days a link may work.
const LongestInvitation = 90

// Invite makes a one-time link for an account of a role, which works for a
// number of days, and returns its token. Only keepers may.
func (s *Store) Invite(ctx context.Context, by int64, role, note string, days int) (token string, err error) {
	note = CleanText(note)
	if err := checkRole(role); err != nil {
		return "", err
	}
	switch {
	case days < 1 || days > LongestInvitation:
		return "", &Error{Code: Invalid, Field: "days", Message: strconv.Itoa(days) + " days is not a life of a link", Expected: "1 to " + strconv.Itoa(LongestInvitation) + " days"}
	case utf8.RuneCountInString(note) > 200 || !utf8.ValidString(note) || strings.ContainsFunc(note, unicode.IsControl):
		return "", &Error{Code: Invalid, Field: "note", Message: "the note is too long or holds line ends", Expected: "one line of at most 200 characters"}
	}
	token = rand.Text()
	return token, s.write(ctx, func(tx *sql.Tx) error {
		if err := mayKeep(ctx, tx, by); err != nil {
			return err
		}
		_, err := tx.ExecContext(ctx, `INSERT INTO invitations (token_hash, role, note, invited_by, created_at, expires_at) VALUES (?, ?, ?, ?, ?, ?)`,
			hashToken(token), role, note, orNull(by), s.stamp(), s.now().AddDate(0, 0, days).UTC().Format(time.RFC3339))
		return err
	})
}

const selectInvitation = `SELECT i.id, i.role, i.note, coalesce(b.credit, 'command line'), i.created_at, i.expires_at, i.ended_at, coalesce(a.name, '')
	FROM invitations i LEFT JOIN accounts b ON b.id = i.invited_by LEFT JOIN accounts a ON a.id = i.account_id`

func scanInvitation(row interface{ Scan(...any) error }) (Invitation, error) {
	var i Invitation
	var at, until, ended string
	err := row.Scan(&i.ID, &i.Role, &i.Note, &i.By, &at, &until, &ended, &i.Name)
	i.At, i.Until, i.Ended = parseTime(at), parseTime(until), parseTime(ended)
	return i, err
}

// Invitations lists them, newest first.
func (s *Store) Invitations(ctx context.Context, limit int) ([]Invitation, error) {
	rows, err := s.r.QueryContext(ctx, selectInvitation+` ORDER BY i.id DESC LIMIT ?`, limit)
	if err != nil {
		return nil, fault("invitations", err)
	}
	defer rows.Close()
	var out []Invitation
	for rows.Next() {
		i, err := scanInvitation(rows)
		if err != nil {
			return nil, fault("invitations", err)
		}
		out = append(out, i)
	}
	return out, fault("invitations", rows.Err())
}

// EndInvitation takes a link back; one that has been used stays as it is.
func (s *Store) EndInvitation(ctx context.Context, id, by int64) error {
	return s.write(ctx, func(tx *sql.Tx) error {
		if err := mayKeep(ctx, tx, by); err != nil {
			return err
		}
		res, err := tx.ExecContext(ctx, `UPDATE invitations SET ended_at = ? WHERE id = ? AND ended_at = ''`, s.stamp(), id)
		if err != nil {
			return err
		}
		if n, err := res.RowsAffected(); err != nil || n == 1 {
			return err
		}
		return &Error{Code: NotFound, Message: "there is no such open invitation"}
	})
}

// Invitation returns the invitation of a token that still works.
func (s *Store) Invitation(ctx context.Context, token string) (*Invitation, error) {
	i, err := openInvitation(ctx, s.r, token, s.stamp())
	return i, fault("invitation", err)
}

func openInvitation(ctx context.Context, q querier, token, now string) (*Invitation, error) {
	i, err := scanInvitation(q.QueryRowContext(ctx, selectInvitation+` WHERE i.token_hash = ? AND i.ended_at = '' AND i.expires_at > ?`, hashToken(token), now))
	if errors.Is(err, sql.ErrNoRows) {
		return nil, usedToken
	}
	return &i, err
}

// UseInvitation makes the account of an invitation and ends it: both or
// neither.
func (s *Store) UseInvitation(ctx context.Context, token, name, credit, password string) (*Account, error) {
	i, err := s.Invitation(ctx, token)
	if err != nil {
		return nil, err
	}
	hash, err := s.newAccount(ctx, &name, &credit, i.Role, password)
	if err != nil {
		return nil, err
	}
	var a *Account
	err = s.write(ctx, func(tx *sql.Tx) error {
		if i, err = openInvitation(ctx, tx, token, s.stamp()); err != nil {
			return err
		}
		if a, err = s.insertAccount(ctx, tx, name, credit, i.Role, hash); err != nil {
			return err
		}
		_, err = tx.ExecContext(ctx, `UPDATE invitations SET ended_at = ?, account_id = ? WHERE id = ?`, s.stamp(), a.ID, i.ID)
		return err
	})
	return a, err
}

// Registration is a person who made an account by themselves.
type Registration struct {
	Account Account
	About   string // who they are, in their own words
	At      time.Time
	State   string // waiting, approved, refused
	By      string // who decided, "" while it waits
	Decided time.Time
	Why     string
	Drafts  int // contributions they keep
}

// RegistrationsOpen says whether anyone may make an account.
func (s *Store) RegistrationsOpen(ctx context.Context) (bool, error) {
	v, err := textSetting(ctx, s.r, SettingRegistration)
	return v == RegistrationOpen, fault("registration", err)
}

// registeredName is what the name of who registers may be.
const registeredName = "1 to 50 characters without spaces"

// Register makes an account that waits to be let in. Four digits are added to
// the name, whether it is taken or not: which names exist cannot be found out
// by trying them.
func (s *Store) Register(ctx context.Context, name, credit, about, password string) (*Account, error) {
	name, about = strings.TrimSpace(name), CleanText(about)
	if open, err := s.RegistrationsOpen(ctx); err != nil || !open {
		return nil, cmp.Or[error](err, &Error{Code: Forbidden, Message: "registration is closed; ask a keeper of this catalogue for an invitation"})
	}
	switch {
	case strings.TrimSpace(credit) == "":
		return nil, &Error{Code: Invalid, Field: "credit", Message: "the credit line is missing", Expected: "the name to be credited, at most 200 characters"}
	case about == "" || utf8.RuneCountInString(about) > 2000 || !utf8.ValidString(about):
		return nil, &Error{Code: Invalid, Field: "about", Message: "who you are is missing or longer than 2,000 characters", Expected: "a few words that a curator can check, as your group and what you will contribute"}
	case utf8.RuneCountInString(name) > 50:
		return nil, &Error{Code: Invalid, Field: "name", Message: "the name is longer than 50 characters", Expected: registeredName}
	}
	hash, err := s.newAccount(ctx, &name, &credit, "contributor", password)
	if e := (*Error)(nil); errors.As(err, &e) && e.Field == "name" {
		e.Expected = registeredName // shorter than of other accounts: digits follow
	}
	if err != nil {
		return nil, err
	}
	var a *Account
	err = s.write(ctx, func(tx *sql.Tx) error {
		full, err := freeName(ctx, tx, name)
		if err != nil {
			return err
		}
		if a, err = s.insertAccount(ctx, tx, full, credit, "contributor", hash); err != nil {
			return err
		}
		a.Waiting = true
		_, err = tx.ExecContext(ctx, `INSERT INTO registrations (account_id, about) VALUES (?, ?)`, a.ID, about)
		return err
	})
	return a, err
}

// freeName adds digits that make the name one of its own.
func freeName(ctx context.Context, tx *sql.Tx, name string) (string, error) {
	for range 50 {
		n, err := rand.Int(rand.Reader, big.NewInt(9000))
		if err != nil {
			return "", err
		}
		full := name + "-" + strconv.FormatInt(1000+n.Int64(), 10)
		var taken int
		if err := tx.QueryRowContext(ctx, `SELECT count(*) FROM accounts WHERE name = ?`, full).Scan(&taken); err != nil || taken == 0 {
			return full, err
		}
	}
	return "", &Error{Code: Conflict, Field: "name", Message: "that name cannot be used", Expected: "another name"}
}

// Registrations lists the people who registered, those who wait first, then
// the newest decided.
func (s *Store) Registrations(ctx context.Context, limit int) ([]Registration, error) {
	rows, err := s.r.QueryContext(ctx, `SELECT a.id, a.name, a.credit, a.role, a.orcid, a.disabled, g.about, a.created_at, g.state, coalesce(b.credit, ''), g.decided_at, g.why,
			(SELECT count(*) FROM submissions u WHERE u.account_id = a.id)
		FROM registrations g JOIN accounts a ON a.id = g.account_id LEFT JOIN accounts b ON b.id = g.decided_by
		ORDER BY g.state <> 'waiting', CASE g.state WHEN 'waiting' THEN a.id ELSE -a.id END LIMIT ?`, limit)
	if err != nil {
		return nil, fault("registrations", err)
	}
	defer rows.Close()
	var out []Registration
	for rows.Next() {
		var g Registration
		var at, decided string
		if err := rows.Scan(&g.Account.ID, &g.Account.Name, &g.Account.Credit, &g.Account.Role, &g.Account.ORCID, &g.Account.Disabled, &g.About, &at, &g.State, &g.By, &decided, &g.Why, &g.Drafts); err != nil {
			return nil, fault("registrations", err)
		}
		g.At, g.Decided = parseTime(at), parseTime(decided)
		out = append(out, g)
	}
	return out, fault("registrations", rows.Err())
}

// CountRegistrations counts the people who wait to be let in.
func (s *Store) CountRegistrations(ctx context.Context) (n int, err error) {
	err = s.r.QueryRowContext(ctx, `SELECT count(*) FROM registrations WHERE state = 'waiting'`).Scan(&n)
	return n, fault("registrations", err)
}

// DecideRegistration lets a person in, or refuses and disables the account. It
// is decided once; a keeper can change the account afterwards.
func (s *Store) DecideRegistration(ctx context.Context, account, by int64, approve bool, why string) error {
	why = CleanText(why)
	if utf8.RuneCountInString(why) > 2000 {
		return &Error{Code: Invalid, Field: "why", Message: "the reason is longer than 2,000 characters"}
	}
	return s.write(ctx, func(tx *sql.Tx) error {
		if err := mayCurate(ctx, tx, by); err != nil {
			return err
		}
		state := map[bool]string{true: "approved", false: "refused"}[approve]
		res, err := tx.ExecContext(ctx, `UPDATE registrations SET state = ?, decided_by = ?, decided_at = ?, why = ? WHERE account_id = ? AND state = 'waiting'`, state, orNull(by), s.stamp(), why, account)
		if err != nil {
			return err
		}
		if n, err := res.RowsAffected(); err != nil || n == 0 {
			return cmp.Or[error](err, &Error{Code: Conflict, Message: "this person does not wait any more: another curator decided"})
		}
		if !approve {
			_, err = tx.ExecContext(ctx, `UPDATE accounts SET disabled = 1 WHERE id = ?`, account)
		}
		return err
	})
}

// maySend refuses who registered and was not let in yet; 0 is the command
// line, which may.
func maySend(ctx context.Context, q querier, by int64) error {
	if by == 0 {
		return nil
	}
	a, err := accountByID(ctx, q, by)
	if err != nil {
		return err
	}
	if a.Waiting {
		return &Error{Code: Forbidden, Message: "a curator has to let you in before you send anything; drafts are kept until then"}
	}
	return nil
}
