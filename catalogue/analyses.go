package catalogue

import (
	"bytes"
	"compress/gzip"
	"context"
	"database/sql"
	"encoding/json"
	"errors"
	"io"
	"strconv"
	"time"
)

// Analysis is a regression frozen under a name.
type Analysis struct {
	Name     string // in its address, made from Title
	Title    string
	Why      string
	Question string // settings, filter and seed, as the query of its address
	RowCount int
	Digest   string // SHA-256 of the numbers of the answer, in the order of its JSON document, hexadecimal
	Program  string // version of the program that answered
	Revision int64  // of the catalogue when it was frozen
	By       string // credit line of who froze it, "" = the command line
	At       time.Time

	Rows     []Row  // the rows considered; only Analysis(name) reads them
	Settings string // of the program that answered, JSON; "" = frozen before there were any
}

// maxAnalysisRows bounds what one frozen analysis may hold.
const maxAnalysisRows = 200_000

// FreezeAnalysis keeps a under a name made from its title, and returns the
// name. A name that is taken is a Conflict: frozen analyses are never changed.
func (s *Store) FreezeAnalysis(ctx context.Context, a Analysis, by int64) (string, error) {
	a.Name = Slug(a.Title)
	switch {
	case CleanText(a.Title) == "" || a.Name == "":
		return "", &Error{Code: Invalid, Field: "title", Message: "the analysis needs a name with letters or digits in it"}
	case len([]rune(a.Title)) > 200 || len(a.Name) > 80:
		return "", &Error{Code: Invalid, Field: "title", Message: "the name is longer than 80 letters"}
	case len([]rune(a.Why)) > 2000:
		return "", &Error{Code: Invalid, Field: "why", Message: "the note is longer than 2,000 characters"}
	case len(a.Rows) > maxAnalysisRows:
		return "", &Error{Code: Invalid, Field: "title", Message: "an analysis of more than " + strconv.Itoa(maxAnalysisRows) + " rows cannot be frozen; name a release of the catalogue in its filter instead"}
	}
	packed, err := packRows(a.Rows)
	if err != nil {
		return "", fault("pack rows", err)
	}
	return a.Name, s.write(ctx, func(tx *sql.Tx) error {
		if err := maySend(ctx, tx, by); err != nil {
			return err
		}
		var taken int
		if err := tx.QueryRowContext(ctx, `SELECT count(*) FROM analyses WHERE name = ?`, a.Name).Scan(&taken); err != nil {
			return err
		}
		if taken > 0 {
			return &Error{Code: Conflict, Field: "title", Message: "an analysis named " + strconv.Quote(a.Name) + " is kept already, and frozen analyses are never changed; choose another name"}
		}
		_, err := tx.ExecContext(ctx, `INSERT INTO analyses (name, title, why, question, row_count, rows, digest, program, revision, account_id, created_at)
			VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)`,
			a.Name, CleanText(a.Title), CleanText(a.Why), a.Question, len(a.Rows), packed, a.Digest, a.Program, a.Revision, orNull(by), s.now().UTC().Format(time.RFC3339))
		if err == nil && a.Settings != "" {
			_, err = tx.ExecContext(ctx, `INSERT INTO analysis_settings (analysis, settings) VALUES (?, ?)`, a.Name, a.Settings)
		}
		return err
	})
}

const analysisColumns = `a.name, a.title, a.why, a.question, a.row_count, a.digest, a.program, a.revision, coalesce(p.credit, ''), a.created_at`

func scanAnalysis(scan func(...any) error, more ...any) (Analysis, error) {
	var a Analysis
	var at string
	err := scan(append([]any{&a.Name, &a.Title, &a.Why, &a.Question, &a.RowCount, &a.Digest, &a.Program, &a.Revision, &a.By, &at}, more...)...)
	a.At = parseTime(at)
	return a, err
}

// Analyses lists the frozen analyses, newest first, without their rows.
func (s *Store) Analyses(ctx context.Context) ([]Analysis, error) {
	rows, err := s.r.QueryContext(ctx, `SELECT `+analysisColumns+` FROM analyses a LEFT JOIN accounts p ON p.id = a.account_id ORDER BY a.created_at DESC, a.name`)
	if err != nil {
		return nil, fault("analyses", err)
	}
	defer rows.Close()
	var out []Analysis
	for rows.Next() {
		a, err := scanAnalysis(rows.Scan)
		if err != nil {
			return nil, fault("analyses", err)
		}
		out = append(out, a)
	}
	return out, fault("analyses", rows.Err())
}

// Analysis returns one frozen analysis with its rows.
func (s *Store) Analysis(ctx context.Context, name string) (*Analysis, error) {
	var packed []byte
	var settings string
	a, err := scanAnalysis(s.r.QueryRowContext(ctx, `SELECT `+analysisColumns+`, a.rows, coalesce((SELECT settings FROM analysis_settings WHERE analysis = a.name), '') FROM analyses a LEFT JOIN accounts p ON p.id = a.account_id WHERE a.name = ?`, name).Scan, &packed, &settings)
	if errors.Is(err, sql.ErrNoRows) {
		return nil, &Error{Code: NotFound, Message: "there is no analysis named " + strconv.Quote(Clip(name))}
	}
	if err != nil {
		return nil, fault("analysis", err)
	}
	a.Settings = settings
	a.Rows, err = unpackRows(packed)
	return &a, fault("analysis", err)
}

// packRows writes rows so that every number comes back as the same double:
// JSON writes the shortest text that reads as it.
func packRows(rows []Row) ([]byte, error) {
	var b bytes.Buffer
	z := gzip.NewWriter(&b)
	if err := json.NewEncoder(z).Encode(rows); err != nil {
		return nil, err
	}
	if err := z.Close(); err != nil {
		return nil, err
	}
	return b.Bytes(), nil
}

func unpackRows(packed []byte) ([]Row, error) {
	z, err := gzip.NewReader(bytes.NewReader(packed))
	if err != nil {
		return nil, err
	}
	var rows []Row
	if err := json.NewDecoder(io.LimitReader(z, 1<<30)).Decode(&rows); err != nil {
		return nil, err
	}
	return rows, z.Close()
}
