// Package catalogue keeps the records: systems, measurements, sources,
// centrelines, revisions, review and accounts, in one SQLite file. All SQL of
// the project is here. It imports neither server, views nor echo.
package catalogue

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"net/url"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"sync/atomic"
	"time"

	"modernc.org/sqlite"
	sqlite3 "modernc.org/sqlite/lib"
)

// Store is an open catalogue. Its methods may be called from many goroutines.
type Store struct {
	path   string
	w      *sql.DB // one connection, immediate transactions; nil when read only
	r      *sql.DB // a pool of read-only connections
	out    *sql.DB // the same, for rows that go out one by one
	onLand func(lat, lon float64) bool
	unit   func(name string) (top, base float64, problem string)
	// immutable is added to the address of connections when the file lies where
	// nothing can be written.
	immutable string
	index     rowIndexes
	hashes    chan struct{} // bounds the memory of password hashing
	now       func() time.Time
	due       atomic.Int64 // second at which Lift has to look again
}

// streams is how many tables may go out at once. They have connections of their
// own: whoever takes a table slowly holds one for as long, and must neither
// keep a page waiting nor wait for the session that its own first byte asks for.
const streams = 64

// Options of Open.
type Options struct {
	ReadOnly bool
	// OnLand says whether a point lies on land, for the check of that name; nil
	// leaves the check out.
	OnLand func(lat, lon float64) bool
	// Unit looks a chronostratigraphic unit up: its youngest and oldest age, Ma,
	// or a sentence that says it is none and names the nearest; nil leaves the
	// check out.
	Unit func(name string) (top, base float64, problem string)
	// Throwaway gives up durability for speed: for a temporary copy that is
	// deleted at the end, such as the demo.
	Throwaway bool
}

// Open opens the catalogue in the SQLite file at path, creating and migrating
// it as needed. A file made by a newer version, or by another program, is
// refused.
func Open(ctx context.Context, path string, o Options) (*Store, error) {
	s := &Store{path: path, onLand: o.OnLand, unit: o.Unit, hashes: make(chan struct{}, hashesAtOnce), now: time.Now}
	if err := s.open(ctx, o); err != nil {
		_ = s.Close()
		return nil, openError(path, err)
	}
	if _, err := s.Lift(ctx); err != nil {
		_ = s.Close()
		return nil, openError(path, err)
	}
	return s, nil
}

func (s *Store) open(ctx context.Context, o Options) (err error) {
	if o.ReadOnly {
		if _, err := os.Stat(s.path); err != nil {
			return err
		}
	} else {
		// The file holds password hashes: only its owner reads it. Failing here
		// is for SQLite to report.
		if f, err := os.OpenFile(s.path, os.O_CREATE|os.O_EXCL, 0o600); err == nil {
			f.Close()
		}
		if s.w, err = sql.Open("sqlite", writerDSN(s.path, o)); err != nil {
			return err
		}
		s.w.SetMaxOpenConns(1)
		if err := migrate(ctx, s.w); err != nil {
			return err
		}
	}
	if o.ReadOnly && readOnlyFolder(s.path) {
		// Without its -shm file a WAL database in a folder that cannot be
		// written opens only as immutable, which it is as nobody can write it.
		s.immutable = "&immutable=1"
	}
	for _, p := range []struct {
		db   **sql.DB
		most int
	}{{&s.r, max(4, 2*runtime.GOMAXPROCS(0))}, {&s.out, streams}} {
		if *p.db, err = sql.Open("sqlite", readerDSN(s.path)+s.immutable); err != nil {
			return err
		}
		(*p.db).SetMaxOpenConns(p.most)
		(*p.db).SetMaxIdleConns(max(4, 2*runtime.GOMAXPROCS(0)))
	}
	return checkVersion(ctx, s.r)
}

// fileURI escapes what SQLite would read as a part of a URI.
func fileURI(path string) string {
	if abs, err := filepath.Abs(path); err == nil {
		path = abs
	}
	return "file:" + strings.ReplaceAll(url.PathEscape(filepath.ToSlash(path)), "%2F", "/")
}

func writerDSN(path string, o Options) string {
	q := "?_txlock=immediate&_pragma=busy_timeout(10000)&_pragma=journal_mode(WAL)&_pragma=foreign_keys(1)&_pragma=temp_store(2)"
	if o.Throwaway {
		return fileURI(path) + q + "&_pragma=synchronous(OFF)"
	}
	return fileURI(path) + q + "&_pragma=synchronous(FULL)"
}

func readerDSN(path string) string {
	return fileURI(path) + "?mode=ro&_pragma=busy_timeout(10000)&_pragma=query_only(1)&_pragma=temp_store(2)&_pragma=cache_size(-8000)"
}

// readOnlyFolder says whether nothing can be written beside path and nothing
// waits there to be taken into it.
func readOnlyFolder(path string) bool {
	if wal, err := os.Stat(path + "-wal"); err == nil && wal.Size() > 0 {
		return false
	}
	f, err := os.CreateTemp(filepath.Dir(path), ".writable-*")
	if err != nil {
		return true
	}
	f.Close()
	return os.Remove(f.Name()) != nil
}

func openError(path string, err error) error {
	var own *Error
	if errors.As(err, &own) {
		return err
	}
	msg := "the catalogue " + path + " cannot be opened"
	switch {
	case errors.Is(err, os.ErrNotExist):
		msg += ": there is no such file"
	case sqliteCode(err) == sqlite3.SQLITE_NOTADB:
		msg += ": it is not a SQLite file"
	case sqliteCode(err) == sqlite3.SQLITE_CANTOPEN:
		msg += ": the folder is missing or may not be written (a file system that is read only is served with -read-only)"
	case sqliteCode(err) == sqlite3.SQLITE_READONLY:
		msg += ": it may not be written; open it read only"
	case sqliteCode(err) == sqlite3.SQLITE_BUSY:
		msg += ": another program holds it locked"
	case sqliteCode(err) == sqlite3.SQLITE_CORRUPT:
		msg += ": it is damaged; restore a backup"
	default:
		return &Error{Code: Internal, Message: msg, Cause: err}
	}
	return &Error{Code: Invalid, Message: msg, Cause: err}
}

// sqliteCode returns the primary result code of SQLite, 0 if err has none.
func sqliteCode(err error) int {
	var e *sqlite.Error
	if errors.As(err, &e) {
		return e.Code() & 0xff
	}
	return 0
}

// Close ends all connections.
func (s *Store) Close() error {
	var errs []error
	if s.out != nil {
		errs = append(errs, s.out.Close())
	}
	if s.r != nil {
		errs = append(errs, s.r.Close())
	}
	if s.w != nil {
		errs = append(errs, s.w.Close())
	}
	return errors.Join(errs...)
}

// Path is the file of the catalogue.
func (s *Store) Path() string { return s.path }

// ReadOnly says whether every change is refused.
func (s *Store) ReadOnly() bool { return s.w == nil }

// write runs fn in one immediate transaction. fn must use tx only: asking the
// pool while its single connection is in use would wait for ever.
func (s *Store) write(ctx context.Context, fn func(tx *sql.Tx) error) error {
	if s.w == nil {
		return &Error{Code: Forbidden, Message: "this catalogue is open read only; changes are made on the server it is a copy of"}
	}
	tx, err := s.w.BeginTx(ctx, nil)
	if err != nil {
		return fault("begin", err)
	}
	defer tx.Rollback()
	if err := fn(tx); err != nil {
		return fault("write", err)
	}
	return fault("commit", tx.Commit())
}

// querier is a transaction or a pool.
type querier interface {
	QueryContext(ctx context.Context, query string, args ...any) (*sql.Rows, error)
	QueryRowContext(ctx context.Context, query string, args ...any) *sql.Row
	ExecContext(ctx context.Context, query string, args ...any) (sql.Result, error)
}

// fault makes an *Error of any error: one that already is stays as it is, and
// a cancelled request keeps its cause visible to errors.Is.
func fault(doing string, err error) error {
	if err == nil {
		return nil
	}
	var own *Error
	if errors.As(err, &own) {
		return err
	}
	if e := unavailable(err); e != nil {
		e.Cause = fmt.Errorf("%s: %w", doing, err)
		return e
	}
	return &Error{Code: Internal, Message: "the catalogue could not do that", Cause: fmt.Errorf("%s: %w", doing, err)}
}

func (s *Store) stamp() string { return s.now().UTC().Format(time.RFC3339) }

func parseTime(text string) time.Time {
	t, _ := time.Parse(time.RFC3339, text)
	return t
}

// Revision grows with every accepted change: the key of every cache.
func (s *Store) Revision(ctx context.Context) (int64, error) {
	var rev int64
	err := s.r.QueryRowContext(ctx, `SELECT coalesce(max(id), 0) FROM revisions`).Scan(&rev)
	return rev, fault("revision", err)
}

// Invented counts the accepted rows that no survey measured.
func (s *Store) Invented(ctx context.Context) (rows int, err error) {
	err = s.r.QueryRowContext(ctx, `SELECT count(*) FROM measurements WHERE substr(notes, 1, ?) = ?`, len(InventedMark), InventedMark).Scan(&rows)
	return rows, fault("invented", err)
}
