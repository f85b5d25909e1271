package catalogue

import (
	"context"
	"database/sql"
	"fmt"
	"strconv"
	"strings"
)

// viewer is who asks, when that person sees rows that others do not.
type viewer struct {
	account int64
	version int64 // of what is hidden from whom
}

type viewerKey struct{}

// AsSeenBy returns a context under which the reads of a filter, of a system
// and of what is computed from them hold the rows that only this account and
// some others see. Without it, and for an account that sees no such row, they
// hold what everybody sees: the tables of the catalogue know nothing else.
// Releases, Freeze and all that is no read of a filter stay as they are.
func (s *Store) AsSeenBy(ctx context.Context, account int64) (context.Context, error) {
	if account == 0 {
		return ctx, nil
	}
	v := viewer{account: account}
	var any bool
	err := s.r.QueryRowContext(ctx, `SELECT EXISTS (SELECT 1 FROM hidden_rows h WHERE `+v.sees("h")+`), (SELECT value FROM counters WHERE name = 'hidden')`).Scan(&any, &v.version)
	if err != nil || !any {
		return ctx, fault("private rows", err)
	}
	return context.WithValue(ctx, viewerKey{}, v), nil
}

// AsEverybody takes AsSeenBy back.
func AsEverybody(ctx context.Context) context.Context {
	if !SeesPrivate(ctx) {
		return ctx
	}
	return context.WithValue(ctx, viewerKey{}, nil)
}

func viewerOf(ctx context.Context) (viewer, bool) {
	v, ok := ctx.Value(viewerKey{}).(viewer)
	return v, ok
}

// SeesPrivate says whether reads under this context may hold rows that only
// some people see.
func SeesPrivate(ctx context.Context) bool {
	_, ok := viewerOf(ctx)
	return ok
}

// ViewKey names what the context sees, for the keys of caches; "" = what
// everybody sees.
func ViewKey(ctx context.Context) string {
	v, ok := viewerOf(ctx)
	if !ok {
		return ""
	}
	return fmt.Sprintf("seen by %d, %d|", v.account, v.version)
}

// sees is the one condition on who sees a hidden row, of which h is the alias.
func (v viewer) sees(h string) string {
	id := strconv.FormatInt(v.account, 10)
	return "(" + h + ".account_id = " + id + " OR " + h + ".id IN (SELECT n.row_id FROM main.hidden_row_people n WHERE n.account_id = " + id + "))"
}

// textMatch finds the measurements with the words of a text. hiddenReader
// knows it.
const textMatch = "m.id IN (SELECT rowid FROM search WHERE search MATCH ?)"

const textMatchOfViewer = "m.id IN (WITH asked (words) AS (SELECT ?) SELECT rowid FROM search WHERE search MATCH (SELECT words FROM asked)" +
	" UNION ALL SELECT -rowid FROM hidden_search WHERE hidden_search MATCH (SELECT words FROM asked))"

// hiddenReader adds to the tables of the catalogue the rows that one viewer
// sees beside them, as frozenReader does with those of a release: by common
// table expressions of the same names, so that no query needs to know. Hidden
// rows have negative numbers, so that they meet no number of the catalogue.
// A row under embargo takes the place of the one that stands for it.
type hiddenReader struct {
	q    querier
	with string
}

func (r hiddenReader) text(query string) string {
	return r.with + strings.ReplaceAll(query, textMatch, textMatchOfViewer)
}

func (r hiddenReader) QueryContext(ctx context.Context, query string, args ...any) (*sql.Rows, error) {
	return r.q.QueryContext(ctx, r.text(query), args...)
}

func (r hiddenReader) QueryRowContext(ctx context.Context, query string, args ...any) *sql.Row {
	return r.q.QueryRowContext(ctx, r.text(query), args...)
}

func (r hiddenReader) ExecContext(context.Context, string, ...any) (sql.Result, error) {
	return nil, &Error{Code: Forbidden, Message: "nothing is changed through what one person sees"}
}

// seenBy is where a viewer reads the catalogue as it is.
func seenBy(ctx context.Context, q querier, v viewer) (querier, error) {
	var own, cited, lined, standing bool
	err := q.QueryRowContext(ctx, `SELECT coalesce(max(NOT EXISTS (SELECT 1 FROM systems y WHERE y.slug = h.slug)), 0), coalesce(max(NOT EXISTS (SELECT 1 FROM sources k WHERE k.citation = h.source AND k.doi = h.source_doi)), 0),
		coalesce(max(h.line <> ''), 0), coalesce(max(h.stands_for <> ''), 0) FROM hidden_rows h WHERE `+v.sees("h")).Scan(&own, &cited, &lined, &standing)
	if err != nil {
		return nil, err
	}
	sees := v.sees("h")
	first := func(what string) string {
		return "SELECT min(o.id) FROM main.hidden_rows o WHERE " + what + " AND " + v.sees("o")
	}
	// A system that was merged into another answers with that one.
	system, source := "coalesce((WITH RECURSIVE chain (id) AS (SELECT y.id FROM main.systems y WHERE y.slug = h.slug UNION SELECT g.into_id FROM chain c JOIN main.merged_systems g ON g.system_id = c.id)"+
		" SELECT id FROM chain WHERE id NOT IN (SELECT g.system_id FROM main.merged_systems g)), -h.system_key)", "(SELECT k.id FROM main.sources k WHERE k.citation = h.source AND k.doi = h.source_doi)"
	if cited {
		source = "coalesce(" + source + ", -(" + first("o.source = h.source AND o.source_doi = h.source_doi") + "))"
	}
	// A table is replaced only where something is added: the others keep their
	// indexes and their speed.
	var parts []string
	add := func(table, cols, more, from, under string) {
		parts = append(parts, table+" AS NOT MATERIALIZED (SELECT "+cols+" FROM main."+table+under+" UNION ALL SELECT "+more+" FROM main.hidden_rows h WHERE "+from+")")
	}
	const times = ", 0, h.created_at, h.updated_at"
	if own {
		cols := strings.Join(names(systemColumns), ", ")
		add("systems", "id, slug, "+cols+", revision, created_at, updated_at", "-h.system_key, h.slug, h."+strings.ReplaceAll(cols, ", ", ", h.")+times,
			sees+" AND NOT EXISTS (SELECT 1 FROM main.systems y WHERE y.slug = h.slug) AND h.id = ("+first("o.system_key = h.system_key")+")", "")
	}
	if cited {
		add("sources", "id, citation, doi", "-h.id, h.source, h.source_doi",
			sees+" AND NOT EXISTS (SELECT 1 FROM main.sources k WHERE k.citation = h.source AND k.doi = h.source_doi) AND h.id = ("+first("o.source = h.source AND o.source_doi = h.source_doi")+")", "")
	}
	under := ""
	if standing {
		under = " WHERE measurement NOT IN (SELECT h.stands_for FROM main.hidden_rows h WHERE " + sees + ")"
	}
	cols := strings.Join(names(measurementColumns), ", ")
	add("measurements", "id, measurement, system_id, source_id, "+cols+", grade_rank, revision, created_at, updated_at",
		"-h.id, '"+PrivatePrefix+"' || h.id, "+system+", "+source+", h."+strings.ReplaceAll(cols, ", ", ", h.")+", h.grade_rank"+times, sees, under)
	const lon = "h.longitude_deg - 360 * (h.longitude_deg > 180)"
	add("places", "id, west, east, south, north", "-h.id, "+lon+", "+lon+", h.latitude_deg, h.latitude_deg", sees, "")
	if lined {
		add("centrelines", "id, system_id, measurement_id, line, settings, sinuosities, created_at", "-h.id, "+system+", -h.id, h.line, h.settings, h.sinuosities, h.created_at", sees+" AND h.line <> ''", "")
		add("line_places", "id, west, east, south, north", "-h.id, -180, 180, -90, 90", sees+" AND h.line <> ''", "")
	}
	return hiddenReader{q, "WITH " + strings.Join(parts, ", ") + " "}, nil
}
