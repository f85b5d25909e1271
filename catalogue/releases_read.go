package catalogue

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"slices"
	"strconv"
	"strings"
)

// frozenReader answers every question from the rows of one release: common
// table expressions named like the tables of the catalogue stand before each
// query, and in SQLite such a name hides the table. So every query that reads
// the catalogue reads a release without a word of it changed.
type frozenReader struct {
	q    querier
	with string
}

// stamps are the columns of a record that say when it changed.
var stamps = []string{"revision", "created_at", "updated_at"}

// frozenTables are the columns of each frozen table, and those in the list of
// members of a release; id and version stand before them.
var frozenTables = []struct {
	name   string
	kept   []string
	listed []string
}{
	{"sources", []string{"citation", "doi"}, nil},
	{"systems", slices.Concat([]string{"slug"}, names(systemColumns), stamps), nil},
	{"measurements", slices.Concat([]string{"source_id", "system_version", "source_version", "measurement"}, names(measurementColumns), stamps), []string{"system_id"}},
	{"centrelines", []string{"line", "settings", "sinuosities", "created_at"}, []string{"system_id", "measurement_id"}},
}

// frozenWith is the text before each query. The expressions are not
// materialised, so that the indexes below serve. They have a column "release",
// which a query under a release asks for: outside of it such a query fails
// instead of giving rows of today.
func frozenWith(id int64, name string) string {
	text := "'" + strings.ReplaceAll(name, "'", "''") + "'"
	var parts []string
	for _, t := range frozenTables {
		cols := slices.Concat([]string{"r.id AS id", "r.version AS version"}, prefixed("f", t.kept), prefixed("r", t.listed))
		if t.name == "measurements" {
			cols = append(cols, "f.grade_rank")
		}
		parts = append(parts, t.name+" AS NOT MATERIALIZED (SELECT "+strings.Join(cols, ", ")+", "+text+" AS release FROM release_"+t.name+
			" r JOIN frozen_"+t.name+" f ON f.version = r.version WHERE r.release_id = "+strconv.FormatInt(id, 10)+")")
	}
	return "WITH " + strings.Join(parts, ", ") + " "
}

func (r frozenReader) QueryContext(ctx context.Context, query string, args ...any) (*sql.Rows, error) {
	return r.q.QueryContext(ctx, r.with+query, args...)
}

func (r frozenReader) QueryRowContext(ctx context.Context, query string, args ...any) *sql.Row {
	return r.q.QueryRowContext(ctx, r.with+query, args...)
}

func (r frozenReader) ExecContext(context.Context, string, ...any) (sql.Result, error) {
	return nil, &Error{Code: Forbidden, Message: "a release is never changed"}
}

// at is where the rows of a filter are read: q itself for the catalogue as
// everybody sees it, with what else the viewer of the context sees (AsSeenBy),
// or a release. An unknown release is Invalid and names the known ones.
func at(ctx context.Context, q querier, release string) (querier, error) {
	if release == "" {
		if v, ok := viewerOf(ctx); ok {
			return seenBy(ctx, q, v)
		}
		return q, nil
	}
	id, name, err := releaseID(ctx, q, release)
	if err != nil {
		return nil, err
	}
	return frozenReader{q, frozenWith(id, name)}, nil
}

func releaseID(ctx context.Context, q querier, release string) (id int64, name string, err error) {
	err = q.QueryRowContext(ctx, `SELECT id, name FROM releases WHERE name = ?`, release).Scan(&id, &name)
	if !errors.Is(err, sql.ErrNoRows) {
		return id, name, err
	}
	rows, err := q.QueryContext(ctx, `SELECT name FROM releases ORDER BY id DESC LIMIT 50`)
	if err != nil {
		return 0, "", err
	}
	defer rows.Close()
	var known []string
	for rows.Next() {
		var n string
		if err := rows.Scan(&n); err != nil {
			return 0, "", err
		}
		known = append(known, n)
	}
	if err := rows.Err(); err != nil {
		return 0, "", err
	}
	e := badParameter("release", fmt.Sprintf("there is no release named %q", Clip(release)), "leave it out: no release has been made yet")
	if len(known) > 0 {
		e.Expected = "one of: " + strings.Join(known, ", ") + "; or leave it out for the catalogue as it is now"
	}
	return 0, "", e
}

// ReleaseName returns the name of a release as it is written, "" for "".
// An unknown one is Invalid and names the known ones.
func (s *Store) ReleaseName(ctx context.Context, release string) (string, error) {
	if release == "" {
		return "", nil
	}
	_, name, err := releaseID(ctx, s.r, release)
	return name, fault("release", err)
}
