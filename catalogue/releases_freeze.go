package catalogue

import (
	"cmp"
	"context"
	"crypto/sha256"
	"database/sql"
	"encoding/csv"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"hash"
	"io"
	"slices"
	"strconv"
	"strings"
)

// Freeze makes a release of all accepted rows that everybody may see. The
// checksum is that of the frozen rows, read back, and equal to that of the
// catalogue at that moment, else nothing is stored. A name that is taken is a
// Conflict.
func (s *Store) Freeze(ctx context.Context, n NewRelease) (*Release, error) {
	if err := n.check(); err != nil {
		return nil, err
	}
	err := s.write(ctx, func(tx *sql.Tx) error { return s.freeze(ctx, tx, n) })
	if err != nil {
		return nil, err
	}
	return s.Release(ctx, n.Name)
}

func (s *Store) freeze(ctx context.Context, tx *sql.Tx, n NewRelease) error {
	var taken string
	switch err := tx.QueryRowContext(ctx, `SELECT name FROM releases WHERE name = ?`, n.Name).Scan(&taken); {
	case err == nil:
		return &Error{Code: Conflict, Field: "name", Message: "there is a release named " + strconv.Quote(taken) + " already, and releases are never changed", Expected: "another name"}
	case !errors.Is(err, sql.ErrNoRows):
		return err
	}
	var id int64
	if err := tx.QueryRowContext(ctx, `SELECT coalesce(max(id), 0) + 1 FROM releases`).Scan(&id); err != nil {
		return err
	}
	if err := freezeRecords(ctx, tx, id); err != nil {
		return err
	}
	r := Release{Name: n.Name, Title: n.Title, Notes: n.Notes, Licence: n.Licence, FrozenDOI: n.DOI, Program: n.Program}
	if err := sumUp(ctx, tx, id, &r); err != nil {
		return err
	}
	if err := r.settleLicence(); err != nil {
		return err
	}
	authors, err := json.Marshal(r.Authors)
	if err != nil {
		return err
	}
	licences, err := json.Marshal(r.Licences)
	if err != nil {
		return err
	}
	_, err = tx.ExecContext(ctx, `INSERT INTO releases (id, name, title, notes, licence, doi, authors, licences, systems, measurements, sources, centrelines, invented,
		checksum, bytes, revision, program, account_id, created_at) VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)`,
		id, r.Name, r.Title, r.Notes, r.Licence, r.FrozenDOI, string(authors), string(licences), r.Systems, r.Measurements, r.Sources, r.Centrelines, r.Invented,
		r.Checksum, r.Bytes, r.Revision, r.Program, orNull(n.By), s.stamp())
	if err == nil && n.Settings != "" {
		_, err = tx.ExecContext(ctx, `INSERT INTO release_settings (release_id, settings) VALUES (?, ?)`, id, n.Settings)
	}
	return err
}

// frozenNoun is one kind of record and how its states are kept.
type frozenNoun struct {
	table  string
	alias  string
	from   string   // the records of the release, with a WHERE
	kept   []string // columns of the state
	exprs  []string // and what they are, over from
	listed []string // columns of the list of members beside id and version
}

func prefixed(alias string, cols []string) []string {
	out := make([]string, len(cols))
	for i, c := range cols {
		out[i] = alias + "." + c
	}
	return out
}

// frozenNouns are the kinds of record in the order in which they refer to each
// other. Public rows are those a reader sees: those under the empty filter.
func frozenNouns(id int64) ([]frozenNoun, error) {
	w, err := (&Filter{}).condition()
	if err != nil {
		return nil, err
	}
	if len(w.args) > 0 {
		return nil, errors.New("the condition on public rows holds parameters")
	}
	public := fromRows + w.String()
	number := strconv.FormatInt(id, 10)
	out := make([]frozenNoun, len(frozenTables))
	for i, x := range frozenTables {
		out[i] = frozenNoun{table: x.name, kept: x.kept, listed: x.listed, alias: map[string]string{"sources": "c", "systems": "s", "measurements": "m", "centrelines": "l"}[x.name]}
		out[i].exprs = prefixed(out[i].alias, x.kept)
	}
	out[0].from = "sources c WHERE c.id IN (SELECT m.source_id" + public + ")"
	out[1].from = "systems s WHERE s.id IN (SELECT m.system_id" + public + ")"
	out[2].from = "measurements m JOIN release_systems y ON y.release_id = " + number + " AND y.id = m.system_id" +
		" JOIN release_sources z ON z.release_id = " + number + " AND z.id = m.source_id WHERE m.id IN (SELECT m.id" + public + ")"
	out[2].exprs[slices.Index(out[2].kept, "system_version")] = "y.version"
	out[2].exprs[slices.Index(out[2].kept, "source_version")] = "z.version"
	out[3].from = "centrelines l WHERE l.system_id IN (SELECT id FROM release_systems WHERE release_id = " + number + ")" +
		" AND (l.measurement_id IS NULL OR l.measurement_id IN (SELECT id FROM release_measurements WHERE release_id = " + number + "))"
	return out, nil
}

// freezeRecords keeps the states that are new and lists those of the release.
// A state is the same only when every column is.
func freezeRecords(ctx context.Context, tx *sql.Tx, id int64) error {
	nouns, err := frozenNouns(id)
	if err != nil {
		return err
	}
	for _, n := range nouns {
		key := n.alias + ".id"
		same := "f.id = " + key
		for i, c := range n.kept {
			same += " AND f." + c + " IS " + n.exprs[i]
		}
		if _, err := tx.ExecContext(ctx, "INSERT INTO frozen_"+n.table+" (id, "+strings.Join(n.kept, ", ")+") SELECT "+key+", "+strings.Join(n.exprs, ", ")+
			" FROM "+n.from+" AND NOT EXISTS (SELECT 1 FROM frozen_"+n.table+" f WHERE "+same+") ORDER BY 1"); err != nil {
			return fmt.Errorf("freeze %s: %w", n.table, err)
		}
		into := strings.Join(slices.Concat([]string{"release_id", "id", "version"}, n.listed), ", ")
		what := strings.Join(slices.Concat([]string{"?", key, "(SELECT max(f.version) FROM frozen_" + n.table + " f WHERE " + same + ")"}, prefixed(n.alias, n.listed)), ", ")
		if _, err := tx.ExecContext(ctx, "INSERT INTO release_"+n.table+" ("+into+") SELECT "+what+" FROM "+n.from+" ORDER BY 2", id); err != nil {
			return fmt.Errorf("list %s: %w", n.table, err)
		}
	}
	return nil
}

// sumUp counts what was frozen and compares it with the catalogue.
func sumUp(ctx context.Context, tx *sql.Tx, id int64, r *Release) error {
	frozen := frozenReader{tx, frozenWith(id, r.Name)}
	authors, licences := map[string]int{}, map[string]int{}
	sum := newTableSum()
	err := eachRow(ctx, frozen, " ORDER BY m.id", nil, func(row *Row, _ rowMeta) error {
		r.Measurements++
		if row.Invented {
			r.Invented++
		}
		authors[row.Contributor]++
		licences[row.Licence]++
		return sum.add(row)
	})
	if err != nil {
		return err
	}
	if r.Measurements == 0 {
		return &Error{Code: Invalid, Field: "name", Message: "the catalogue holds no accepted measurement, so there is nothing to release", Expected: "accept or import a record first"}
	}
	r.Checksum, r.Bytes = sum.done()
	now, err := publicSum(ctx, tx)
	if err != nil {
		return err
	}
	if now != r.Checksum {
		return errors.New("the frozen rows are not those of the catalogue")
	}
	for _, q := range []struct {
		into  *int
		query string
	}{{&r.Systems, "systems"}, {&r.Sources, "sources"}, {&r.Centrelines, "centrelines"}} {
		if err := tx.QueryRowContext(ctx, `SELECT count(*) FROM release_`+q.query+` WHERE release_id = ?`, id).Scan(q.into); err != nil {
			return err
		}
	}
	if err := tx.QueryRowContext(ctx, `SELECT coalesce(max(id), 0) FROM revisions`).Scan(&r.Revision); err != nil {
		return err
	}
	for v, n := range licences {
		r.Licences = append(r.Licences, FacetValue{v, n})
	}
	slices.SortFunc(r.Licences, func(a, b FacetValue) int {
		return cmp.Or(cmp.Compare(b.Count, a.Count), cmp.Compare(a.Value, b.Value))
	})
	r.Authors, err = authorsOf(ctx, tx, authors)
	return err
}

// publicSum is the checksum of the measurement table as a reader sees it now.
func publicSum(ctx context.Context, q querier) (string, error) {
	f := Filter{}
	w, err := f.condition()
	if err != nil {
		return "", err
	}
	sum := newTableSum()
	if err := eachRow(ctx, q, w.String()+" ORDER BY m.id", w.args, func(row *Row, _ rowMeta) error { return sum.add(row) }); err != nil {
		return "", err
	}
	text, _ := sum.done()
	return text, nil
}

// authorsOf orders the credit lines by the measurements they stand for, then
// by name, and gives each the ORCID iD of the only account with that line.
func authorsOf(ctx context.Context, q querier, counts map[string]int) ([]Author, error) {
	out := []Author{}
	for name, n := range counts {
		if name == "" {
			continue
		}
		a := Author{Name: name, Measurements: n}
		err := q.QueryRowContext(ctx, `SELECT coalesce(max(orcid), '') FROM accounts WHERE credit = ? HAVING count(*) = 1`, name).Scan(&a.ORCID)
		if err != nil && !errors.Is(err, sql.ErrNoRows) {
			return nil, err
		}
		out = append(out, a)
	}
	slices.SortFunc(out, func(a, b Author) int {
		return cmp.Or(cmp.Compare(b.Measurements, a.Measurements), cmp.Compare(a.Name, b.Name))
	})
	return out, nil
}

// settleLicence takes the widest licence the rows allow, or checks the one
// asked for. Only rows contributed under CC0 can be given away under CC0.
func (r *Release) settleLicence() error {
	bound := 0
	for _, l := range r.Licences {
		if !isCC0(l.Value) {
			bound += l.Count
		}
	}
	switch {
	case r.Licence == "" && bound == 0:
		r.Licence = "CC0-1.0"
	case r.Licence == "":
		r.Licence = "CC-BY-4.0"
	case r.Licence == "CC0-1.0" && bound > 0:
		return &Error{Code: Invalid, Field: "licence", Message: strconv.Itoa(bound) + " of the measurements were not contributed under CC0, so the release cannot be", Expected: "CC-BY-4.0, or the consent of those contributors entered in the column licence first"}
	}
	return nil
}

func isCC0(licence string) bool {
	l := strings.ToUpper(strings.NewReplacer(" ", "", "-", "").Replace(licence))
	return l == "CC0" || l == "CC01.0"
}

// tableSum is the SHA-256 of rows written as Export writes them.
type tableSum struct {
	hash   hash.Hash
	n      countingWriter
	w      *csv.Writer
	record []string
	err    error
}

type countingWriter int64

func (c *countingWriter) Write(b []byte) (int, error) {
	*c += countingWriter(len(b))
	return len(b), nil
}

func newTableSum() *tableSum {
	t := &tableSum{hash: sha256.New(), record: make([]string, len(Columns))}
	t.w = csv.NewWriter(io.MultiWriter(t.hash, &t.n))
	t.err = t.w.Write(ColumnNames())
	return t
}

func (t *tableSum) add(r *Row) error {
	Record(r, t.record)
	t.err = cmp.Or(t.err, t.w.Write(t.record))
	return t.err
}

// done returns the sum and the number of bytes; a hash cannot fail.
func (t *tableSum) done() (sum string, bytes int64) {
	t.w.Flush()
	return hex.EncodeToString(t.hash.Sum(nil)), int64(t.n)
}

// VerifyRelease reads a release back and says whether it is still what was
// frozen.
func (s *Store) VerifyRelease(ctx context.Context, name string) (bool, error) {
	r, err := s.Release(ctx, name)
	if err != nil {
		return false, err
	}
	q, err := at(ctx, s.r, name)
	if err != nil {
		return false, fault("verify", err)
	}
	sum := newTableSum()
	if err := eachRow(ctx, q, " ORDER BY m.id", nil, func(row *Row, _ rowMeta) error { return sum.add(row) }); err != nil {
		return false, fault("verify", err)
	}
	got, _ := sum.done()
	return got == r.Checksum, nil
}
