package catalogue

import (
	"context"
	"database/sql"
	"embed"
	"fmt"
	"io/fs"
	"slices"
	"strings"
)

//go:embed migrations/*.sql
var migrationFiles embed.FS

// applicationID marks the file as a catalogue of this program ("FBND").
const applicationID = 0x46424e44

// migration is one numbered step; number n brings version n-1 to n.
type migration struct {
	name string
	sql  string
}

func migrations() []migration {
	names, err := fs.Glob(migrationFiles, "migrations/*.sql")
	if err != nil {
		panic(err) // the pattern is a constant
	}
	slices.Sort(names)
	out := make([]migration, len(names))
	for i, n := range names {
		if !strings.HasPrefix(n, fmt.Sprintf("migrations/%04d_", i+1)) {
			panic("migration out of order: " + n)
		}
		b, err := migrationFiles.ReadFile(n)
		if err != nil {
			panic(err)
		}
		out[i] = migration{n, string(b)}
	}
	return out
}

// SchemaVersion is the version this program writes.
func SchemaVersion() int { return len(migrations()) }

// migrate brings the file to this program's version, each step in its own
// transaction.
func migrate(ctx context.Context, db *sql.DB) error {
	steps := migrations()
	have, err := version(ctx, db)
	if err != nil {
		return err
	}
	for n := have; n < len(steps); n++ {
		if err := applyMigration(ctx, db, n+1, steps[n]); err != nil {
			return err
		}
	}
	return nil
}

func applyMigration(ctx context.Context, db *sql.DB, number int, m migration) error {
	tx, err := db.BeginTx(ctx, nil)
	if err != nil {
		return err
	}
	defer tx.Rollback()
	// Another process may have done this step between our look and our lock.
	var have int
	if err := tx.QueryRowContext(ctx, `PRAGMA user_version`).Scan(&have); err != nil {
		return err
	}
	if have >= number {
		return nil
	}
	script := fmt.Sprintf("%s\nPRAGMA application_id = %d; PRAGMA user_version = %d;", m.sql, applicationID, number)
	if _, err := tx.ExecContext(ctx, script); err != nil {
		return fmt.Errorf("%s: %w", m.name, err)
	}
	return tx.Commit()
}

// version reads the schema version and refuses files that are not ours or are
// newer than this program.
func version(ctx context.Context, db *sql.DB) (int, error) {
	var v, app, tables int
	for q, p := range map[string]*int{
		`PRAGMA user_version`: &v, `PRAGMA application_id`: &app,
		`SELECT count(*) FROM sqlite_schema`: &tables,
	} {
		if err := db.QueryRowContext(ctx, q).Scan(p); err != nil {
			return 0, err
		}
	}
	switch {
	case app != applicationID && (tables > 0 || app != 0 || v != 0):
		return 0, &Error{Code: Invalid, Message: "the file is a database of another program, not a catalogue", Expected: "a catalogue made by this program, or a new file"}
	case v > SchemaVersion():
		return 0, &Error{Code: Invalid, Message: fmt.Sprintf("the catalogue was written by a newer version of this program (schema %d, this one knows %d); update the program", v, SchemaVersion())}
	}
	return v, nil
}

// checkVersion refuses a file that is not at exactly this version: readers do
// not migrate.
func checkVersion(ctx context.Context, db *sql.DB) error {
	v, err := version(ctx, db)
	if err != nil {
		return err
	}
	if v < SchemaVersion() {
		return &Error{Code: Invalid, Message: fmt.Sprintf("the catalogue has schema %d and this program needs %d; open it once with write access", v, SchemaVersion())}
	}
	return nil
}
