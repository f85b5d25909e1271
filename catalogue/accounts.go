package catalogue

import (
	"context"
	"database/sql"
	"errors"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"

	sqlite3 "modernc.org/sqlite/lib"
)

// Roles, each including what the one before may do.
var Roles = []string{"contributor", "curator", "keeper"}

// Curates says whether the account may review.
func (a *Account) Curates() bool {
	return a != nil && !a.Disabled && (a.Role == "curator" || a.Role == "keeper")
}

func checkAccount(name, credit, role string) error {
	switch {
	case name == "" || utf8.RuneCountInString(name) > 64 || !utf8.ValidString(name) || strings.ContainsFunc(name, func(r rune) bool { return unicode.IsSpace(r) || unicode.IsControl(r) }):
		return &Error{Code: Invalid, Field: "name", Message: strconv.Quote(Clip(name)) + " cannot be a sign-in name", Expected: "1 to 64 characters without spaces"}
	case credit == "" || utf8.RuneCountInString(credit) > 200 || !utf8.ValidString(credit) || strings.ContainsFunc(credit, unicode.IsControl):
		return &Error{Code: Invalid, Field: "credit", Message: "the credit line is missing or too long", Expected: "the name to be credited, at most 200 characters"}
	}
	return checkRole(role)
}

func checkRole(role string) error {
	for _, r := range Roles {
		if r == role {
			return nil
		}
	}
	return &Error{Code: Invalid, Field: "role", Message: strconv.Quote(Clip(role)) + " is not a role", Expected: "one of: " + strings.Join(Roles, ", ")}
}

// AddAccount makes an account. An empty credit line is the name.
func (s *Store) AddAccount(ctx context.Context, name, credit, role, password string) (*Account, error) {
	hash, err := s.newAccount(ctx, &name, &credit, role, password)
	if err != nil {
		return nil, err
	}
	var a *Account
	err = s.write(ctx, func(tx *sql.Tx) error {
		a, err = s.insertAccount(ctx, tx, name, credit, role, hash)
		return err
	})
	return a, err
}

// newAccount checks what is needed for an account and hashes the password,
// before any transaction: hashing is slow.
func (s *Store) newAccount(ctx context.Context, name, credit *string, role, password string) (hash string, err error) {
	*name, *credit = strings.TrimSpace(*name), strings.TrimSpace(*credit)
	if *credit == "" {
		*credit = *name
	}
	if err := checkAccount(*name, *credit, role); err != nil {
		return "", err
	}
	return s.hashPassword(ctx, password)
}

func (s *Store) insertAccount(ctx context.Context, tx *sql.Tx, name, credit, role, hash string) (*Account, error) {
	res, err := tx.ExecContext(ctx, `INSERT INTO accounts (name, credit, role, password_hash, created_at) VALUES (?, ?, ?, ?, ?)`, name, credit, role, hash, s.stamp())
	if sqliteCode(err) == sqlite3.SQLITE_CONSTRAINT {
		return nil, &Error{Code: Conflict, Field: "name", Message: "there is already an account named " + strconv.Quote(Clip(name)), Expected: "another name"}
	}
	if err != nil {
		return nil, err
	}
	id, err := res.LastInsertId()
	return &Account{ID: id, Name: name, Credit: credit, Role: role}, err
}

// SetPassword replaces the password of an account.
func (s *Store) SetPassword(ctx context.Context, name, password string) error {
	hash, err := s.hashPassword(ctx, password)
	if err != nil {
		return err
	}
	return s.setAccount(ctx, name, "password_hash", hash)
}

// SetRole changes what an account may do.
func (s *Store) SetRole(ctx context.Context, name, role string) error {
	if err := checkRole(role); err != nil {
		return err
	}
	if role != "keeper" {
		if err := s.notTheLastKeeper(ctx, name); err != nil {
			return err
		}
	}
	return s.setAccount(ctx, name, "role", role)
}

// SetDisabled stops an account from signing in, or lets it again.
func (s *Store) SetDisabled(ctx context.Context, name string, disabled bool) error {
	return s.setAccount(ctx, name, "disabled", disabled)
}

// notTheLastKeeper refuses when name is the only keeper who can sign in: without
// one nobody could add people or renew a forgotten password in the browser.
func (s *Store) notTheLastKeeper(ctx context.Context, name string) error {
	var is, others int
	err := s.r.QueryRowContext(ctx, `SELECT count(CASE WHEN name = ?1 THEN 1 END), count(CASE WHEN name <> ?1 THEN 1 END)
		FROM accounts WHERE role = 'keeper' AND NOT disabled`, strings.TrimSpace(name)).Scan(&is, &others)
	if err != nil {
		return fault("role", err)
	}
	if is == 1 && others == 0 {
		return &Error{Code: Invalid, Field: "role", Message: strconv.Quote(Clip(name)) + " is the only keeper, and a catalogue needs one", Expected: "keeper, or another account made keeper first"}
	}
	return nil
}

func (s *Store) setAccount(ctx context.Context, name, column string, value any) error {
	return s.write(ctx, func(tx *sql.Tx) error {
		res, err := tx.ExecContext(ctx, `UPDATE accounts SET `+column+` = ? WHERE name = ?`, value, strings.TrimSpace(name))
		if err != nil {
			return err
		}
		if n, err := res.RowsAffected(); err != nil || n == 1 {
			return err
		}
		return &Error{Code: NotFound, Field: "name", Message: "there is no account named " + strconv.Quote(Clip(name))}
	})
}

const selectAccount = `SELECT id, name, credit, role, orcid, disabled,
	EXISTS (SELECT 1 FROM registrations g WHERE g.account_id = accounts.id AND g.state = 'waiting') FROM accounts`

func scanAccount(row interface{ Scan(...any) error }) (Account, error) {
	var a Account
	err := row.Scan(&a.ID, &a.Name, &a.Credit, &a.Role, &a.ORCID, &a.Disabled, &a.Waiting)
	return a, err
}

// Accounts lists all accounts by name.
func (s *Store) Accounts(ctx context.Context) ([]Account, error) {
	rows, err := s.r.QueryContext(ctx, selectAccount+` ORDER BY name`)
	if err != nil {
		return nil, fault("accounts", err)
	}
	defer rows.Close()
	var out []Account
	for rows.Next() {
		a, err := scanAccount(rows)
		if err != nil {
			return nil, fault("accounts", err)
		}
		out = append(out, a)
	}
	return out, fault("accounts", rows.Err())
}

// Account finds an account by its id.
func (s *Store) Account(ctx context.Context, id int64) (*Account, error) {
	a, err := accountByID(ctx, s.r, id)
	return a, fault("account", err)
}

func accountByID(ctx context.Context, q querier, id int64) (*Account, error) {
	a, err := scanAccount(q.QueryRowContext(ctx, selectAccount+` WHERE id = ?`, id))
	if errors.Is(err, sql.ErrNoRows) {
		return nil, &Error{Code: NotFound, Message: "there is no such account"}
	}
	return &a, err
}

// Authenticate returns the account when name and password fit and it is not
// disabled. Every refusal reads the same and takes as long, so that names
// cannot be found out.
func (s *Store) Authenticate(ctx context.Context, name, password string) (*Account, error) {
	var hash string
	var a Account
	err := s.r.QueryRowContext(ctx, `SELECT id, name, credit, role, orcid, disabled, password_hash FROM accounts WHERE name = ?`, strings.TrimSpace(name)).
		Scan(&a.ID, &a.Name, &a.Credit, &a.Role, &a.ORCID, &a.Disabled, &hash)
	known := err == nil
	if err != nil && !errors.Is(err, sql.ErrNoRows) {
		return nil, fault("sign in", err)
	}
	if !known {
		hash = nobody
	}
	fits, err := s.verifyPassword(ctx, hash, password)
	if err != nil {
		return nil, err
	}
	if !known || !fits || a.Disabled {
		return nil, &Error{Code: Forbidden, Message: "that name and password do not fit together"}
	}
	return &a, nil
}

// mayCurate refuses who may not review; 0 is the command line, which may.
func mayCurate(ctx context.Context, q querier, by int64) error {
	if by == 0 {
		return nil
	}
	a, err := accountByID(ctx, q, by)
	if err != nil {
		return err
	}
	if !a.Curates() {
		return &Error{Code: Forbidden, Message: "only curators decide on contributions"}
	}
	return nil
}
