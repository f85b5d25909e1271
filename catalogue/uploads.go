package catalogue

import (
	"context"
	"database/sql"
	"encoding/json"
	"errors"
	"io"
	"path"
	"slices"
	"strconv"
	"strings"
	"time"
	"unicode"
	"unicode/utf8"
)

// Upload is a file on its way to review: matching its columns, being checked,
// checked, sent; failed when the catalogue could not check it.
type Upload struct {
	ID, By      int64
	Name        string // of the file
	Bytes       int64
	State       string
	Why         string // what the file is, in the sender's words
	Reading     Reading
	Look        Look
	RowsRead    int // of the check that runs
	BytesRead   int64
	Report      UploadReport
	Batch       int64 // what it became, 0 before
	At, Updated time.Time
}

// UploadReport counts what a check found.
type UploadReport struct {
	Rows      int `json:"rows"` // read
	New       int `json:"new"`
	Changed   int `json:"changed"`
	Identical int `json:"identical"` // to what is there or waits already: skipped
	Refused   int `json:"refused"`   // lines
	Problems  int `json:"problems"`
	Warnings  int `json:"warnings"`
	Converted int `json:"converted"`
	Unlisted  int `json:"unlisted"` // remarks beyond those that are kept
	Sent      int `json:"sent"`     // rows that became contributions
}

// Good counts the rows that can be sent.
func (r UploadReport) Good() int { return r.New + r.Changed }

const (
	// mostUploads bounds the files one person keeps open at once.
	mostUploads = 10
	pieceBytes  = 256 << 10
	// uploadLife is how long a file waits for its sender.
	uploadLife = 30 * 24 * time.Hour
)

// NewUpload stores a file as it was sent and takes a first look at it. A file
// that is no table is refused with an Invalid error and not kept.
func (s *Store) NewUpload(ctx context.Context, by int64, name, why string, r io.Reader) (int64, error) {
	why = CleanText(why)
	if utf8.RuneCountInString(why) > 2000 {
		return 0, &Error{Code: Invalid, Field: "why", Message: "what the file is takes more than 2,000 characters"}
	}
	var id int64
	err := s.write(ctx, func(tx *sql.Tx) error {
		var open int
		if err := tx.QueryRowContext(ctx, `SELECT count(*) FROM uploads WHERE account_id = ? AND state <> 'sent'`, by).Scan(&open); err != nil {
			return err
		}
		if open >= mostUploads {
			return &Error{Code: Conflict, Field: "file", Message: strconv.Itoa(open) + " files of yours are neither sent nor dropped", Expected: "one of them sent or dropped first"}
		}
		res, err := tx.ExecContext(ctx, `INSERT INTO uploads (account_id, name, bytes, state, why, created_at, updated_at) VALUES (?, ?, 0, 'matching', ?, ?, ?)`, by, uploadName(name), why, s.stamp(), s.stamp())
		if err != nil {
			return err
		}
		if id, err = res.LastInsertId(); err != nil {
			return err
		}
		return storePieces(ctx, tx, id, r)
	})
	if err != nil {
		return 0, err
	}
	if err := s.lookAtUpload(ctx, id, Reading{}); err != nil {
		return 0, errors.Join(err, s.forget(ctx, id))
	}
	u, err := s.Upload(ctx, id, by)
	if err == nil && u.Look.Fault != "" {
		if err = s.forget(ctx, id); err == nil {
			err = &Error{Code: Invalid, Field: "file", Message: u.Look.Fault, Expected: u.Look.Fit}
		}
	}
	return id, err
}

// uploadName is the last part of a file name, in one line.
func uploadName(name string) string {
	name = strings.Map(func(r rune) rune {
		if unicode.IsControl(r) {
			return -1
		}
		return r
	}, strings.ToValidUTF8(path.Base(strings.ReplaceAll(name, `\`, "/")), "\ufffd"))
	if name = strings.TrimSpace(name); name == "" || name == "." || name == "/" {
		return "table.csv"
	}
	return clipTo(name, 190)
}

func storePieces(ctx context.Context, tx *sql.Tx, id int64, r io.Reader) error {
	buf, total := make([]byte, pieceBytes), int64(0)
	for n := 0; ; n++ {
		got, err := io.ReadFull(r, buf)
		if got > 0 {
			if _, err := tx.ExecContext(ctx, `INSERT INTO upload_pieces (upload_id, n, bytes) VALUES (?, ?, ?)`, id, n, buf[:got]); err != nil {
				return err
			}
			total += int64(got)
		}
		if errors.Is(err, io.EOF) || errors.Is(err, io.ErrUnexpectedEOF) {
			break
		}
		if err != nil {
			return err
		}
	}
	_, err := tx.ExecContext(ctx, `UPDATE uploads SET bytes = ? WHERE id = ?`, total, id)
	return err
}

// pieces reads a stored file from its start.
type pieces struct {
	ctx  context.Context
	q    querier
	id   int64
	next int
	rest []byte
	read int64
}

func (p *pieces) Read(b []byte) (int, error) {
	if len(p.rest) == 0 {
		err := p.q.QueryRowContext(p.ctx, `SELECT bytes FROM upload_pieces WHERE upload_id = ? AND n = ?`, p.id, p.next).Scan(&p.rest)
		if errors.Is(err, sql.ErrNoRows) {
			return 0, io.EOF
		}
		if err != nil {
			return 0, err
		}
		p.next++
	}
	n := copy(b, p.rest)
	p.rest = p.rest[n:]
	p.read += int64(n)
	return n, nil
}

func (s *Store) lookAtUpload(ctx context.Context, id int64, given Reading) error {
	look, err := lookAt(ctx, func() io.Reader { return &pieces{ctx: ctx, q: s.r, id: id} }, given)
	if err != nil {
		return fault("look at a file", err)
	}
	text, err := json.Marshal(look)
	if err != nil {
		return err
	}
	return s.write(ctx, func(tx *sql.Tx) error {
		_, err := tx.ExecContext(ctx, `UPDATE uploads SET seen = ?, updated_at = ? WHERE id = ?`, string(text), s.stamp(), id)
		return err
	})
}

const selectUpload = `SELECT id, account_id, name, bytes, state, why, reading, seen, rows_read, bytes_read, report, coalesce(batch_id, 0), created_at, updated_at FROM uploads`

func scanUpload(row interface{ Scan(...any) error }) (*Upload, error) {
	var u Upload
	var reading, seen, report, at, updated string
	if err := row.Scan(&u.ID, &u.By, &u.Name, &u.Bytes, &u.State, &u.Why, &reading, &seen, &u.RowsRead, &u.BytesRead, &report, &u.Batch, &at, &updated); err != nil {
		return nil, err
	}
	u.At, u.Updated = parseTime(at), parseTime(updated)
	return &u, errors.Join(json.Unmarshal([]byte(reading), &u.Reading), json.Unmarshal([]byte(seen), &u.Look), json.Unmarshal([]byte(report), &u.Report))
}

// Upload returns a file of a person; another's is not there.
func (s *Store) Upload(ctx context.Context, id, by int64) (*Upload, error) {
	u, err := uploadOf(ctx, s.r, id, by)
	return u, fault("upload", err)
}

func uploadOf(ctx context.Context, q querier, id, by int64) (*Upload, error) {
	u, err := scanUpload(q.QueryRowContext(ctx, selectUpload+` WHERE id = ? AND account_id = ?`, id, by))
	if errors.Is(err, sql.ErrNoRows) {
		return nil, &Error{Code: NotFound, Message: "there is no such file of yours"}
	}
	return u, err
}

// Uploads lists the files of a person, newest first.
func (s *Store) Uploads(ctx context.Context, by int64, limit int) ([]Upload, error) {
	return s.uploads(ctx, selectUpload+` WHERE account_id = ? ORDER BY id DESC LIMIT ?`, by, limit)
}

// UnfinishedUploads lists the files whose check a stop of the program cut off.
func (s *Store) UnfinishedUploads(ctx context.Context) ([]Upload, error) {
	return s.uploads(ctx, selectUpload+` WHERE state = 'checking' ORDER BY id`)
}

func (s *Store) uploads(ctx context.Context, query string, args ...any) ([]Upload, error) {
	rows, err := s.r.QueryContext(ctx, query, args...)
	if err != nil {
		return nil, fault("uploads", err)
	}
	defer rows.Close()
	var out []Upload
	for rows.Next() {
		u, err := scanUpload(rows)
		if err != nil {
			return nil, fault("uploads", err)
		}
		out = append(out, *u)
	}
	return out, fault("uploads", rows.Err())
}

// SetReading says how a file is read, and looks at it again that way. What an
// earlier check found is forgotten.
func (s *Store) SetReading(ctx context.Context, id, by int64, r Reading, why string) error {
	why = CleanText(why)
	if err := r.check(); err != nil {
		return err
	}
	if utf8.RuneCountInString(why) > 2000 {
		return &Error{Code: Invalid, Field: "why", Message: "what the file is takes more than 2,000 characters"}
	}
	text, err := json.Marshal(r)
	if err != nil {
		return err
	}
	if err := s.turn(ctx, id, by, []string{"matching", "checked", "failed"}, "matching", func(tx *sql.Tx) error {
		_, err := tx.ExecContext(ctx, `UPDATE uploads SET reading = ?, why = ?, report = '{}', rows_read = 0, bytes_read = 0 WHERE id = ?`, string(text), why, id)
		return errors.Join(err, clearCheck(ctx, tx, id))
	}); err != nil {
		return err
	}
	return s.lookAtUpload(ctx, id, r)
}

// turn brings a file of a person from one of some states into another, with
// what do does, or refuses.
func (s *Store) turn(ctx context.Context, id, by int64, from []string, to string, do func(tx *sql.Tx) error) error {
	return s.write(ctx, func(tx *sql.Tx) error {
		u, err := uploadOf(ctx, tx, id, by)
		if err != nil {
			return err
		}
		if !slices.Contains(from, u.State) {
			return &Error{Code: Conflict, Message: "the file is " + u.State + " by now; open its page again"}
		}
		if _, err := tx.ExecContext(ctx, `UPDATE uploads SET state = ?, updated_at = ? WHERE id = ?`, to, s.stamp(), id); err != nil || do == nil {
			return err
		}
		return do(tx)
	})
}

func clearCheck(ctx context.Context, tx *sql.Tx, id int64) error {
	_, err := tx.ExecContext(ctx, `DELETE FROM upload_rows WHERE upload_id = ?`, id)
	if err == nil {
		_, err = tx.ExecContext(ctx, `DELETE FROM upload_remarks WHERE upload_id = ?`, id)
	}
	return err
}

// StartCheck marks a file to be checked; CheckUpload does it.
func (s *Store) StartCheck(ctx context.Context, id, by int64) error {
	return s.turn(ctx, id, by, []string{"matching", "checked", "failed"}, "checking", func(tx *sql.Tx) error {
		_, err := tx.ExecContext(ctx, `UPDATE uploads SET report = '{}', rows_read = 0, bytes_read = 0 WHERE id = ?`, id)
		return err
	})
}

// StopCheck takes a file back to its matching; a check that runs ends by
// itself.
func (s *Store) StopCheck(ctx context.Context, id, by int64) error {
	return s.turn(ctx, id, by, []string{"checking"}, "matching", func(tx *sql.Tx) error { return clearCheck(ctx, tx, id) })
}

// DropUpload forgets a file that was not sent.
func (s *Store) DropUpload(ctx context.Context, id, by int64) error {
	return s.turn(ctx, id, by, []string{"matching", "checking", "checked", "failed"}, "failed", func(tx *sql.Tx) error {
		_, err := tx.ExecContext(ctx, `DELETE FROM uploads WHERE id = ?`, id)
		return err
	})
}

func (s *Store) forget(ctx context.Context, id int64) error {
	return s.write(ctx, func(tx *sql.Tx) error {
		_, err := tx.ExecContext(ctx, `DELETE FROM uploads WHERE id = ?`, id)
		return err
	})
}

// SweepUploads forgets files that nobody came back for.
func (s *Store) SweepUploads(ctx context.Context) error {
	return s.write(ctx, func(tx *sql.Tx) error {
		_, err := tx.ExecContext(ctx, `DELETE FROM uploads WHERE state <> 'checking' AND updated_at < ?`, s.now().Add(-uploadLife).UTC().Format(time.RFC3339))
		return err
	})
}

// SendUpload sends the good rows of a checked file to the curators as one
// batch. With refused rows it does so only when partial is said.
func (s *Store) SendUpload(ctx context.Context, id, by int64, partial bool) (batch int64, err error) {
	return batch, s.turn(ctx, id, by, []string{"checked"}, "sent", func(tx *sql.Tx) error {
		if err := maySend(ctx, tx, by); err != nil {
			return err
		}
		u, err := uploadOf(ctx, tx, id, by)
		if err != nil {
			return err
		}
		switch {
		case u.Report.Problems > 0 && !partial:
			return &Error{Code: Conflict, Message: "some lines of the file are refused (" + strconv.Itoa(u.Report.Refused) + ")", Expected: "the good rows only, or a mended file"}
		case u.Report.Good() == 0:
			return &Error{Code: Conflict, Message: "no row of the file can be sent", Expected: "a mended file"}
		}
		res, err := tx.ExecContext(ctx, `INSERT INTO batches (account_id, why, created_at) VALUES (?, ?, ?)`, by, u.Why, s.stamp())
		if err != nil {
			return err
		}
		if batch, err = res.LastInsertId(); err != nil {
			return err
		}
		if u.Report.Sent, err = sendRows(ctx, tx, id, by, batch, s.stamp()); err != nil {
			return err
		}
		report, err := json.Marshal(u.Report)
		if err != nil {
			return err
		}
		if _, err := tx.ExecContext(ctx, `UPDATE uploads SET report = ?, batch_id = ? WHERE id = ?`, string(report), batch, id); err != nil {
			return err
		}
		for _, table := range []string{"upload_rows", "upload_pieces"} {
			if _, err := tx.ExecContext(ctx, `DELETE FROM `+table+` WHERE upload_id = ?`, id); err != nil {
				return err
			}
		}
		return nil
	})
}

// sendRows makes submissions of the prepared rows, but for those that wait
// already.
func sendRows(ctx context.Context, tx *sql.Tx, id, by, batch int64, now string) (int, error) {
	res, err := tx.ExecContext(ctx, `INSERT INTO submissions (batch_id, account_id, state, measurement, proposed, base, base_revision, fingerprint, created_at, updated_at)
		SELECT ?1, ?2, 'submitted', r.measurement, r.proposed, r.base, r.base_revision, r.fingerprint, ?3, ?3 FROM upload_rows r
		WHERE r.upload_id = ?4 AND NOT EXISTS (SELECT 1 FROM submissions s WHERE s.fingerprint = r.fingerprint AND s.state = 'submitted' AND s.account_id = ?2)
		ORDER BY r.line`, batch, by, now, id)
	if err != nil {
		return 0, err
	}
	n, err := res.RowsAffected()
	if err == nil && n == 0 {
		err = &Error{Code: Conflict, Message: "every row of the file waits for a curator already"}
	}
	return int(n), err
}

// Remarks lists what a check had to say: kind problem, warning or conversion.
func (s *Store) Remarks(ctx context.Context, id int64, kind string, limit int, each func(RowProblem) error) error {
	rows, err := s.out.QueryContext(ctx, `SELECT line, column_name, value, message, expected FROM upload_remarks WHERE upload_id = ? AND kind = ? ORDER BY n LIMIT ?`, id, kind, limit)
	if err != nil {
		return fault("remarks", err)
	}
	defer rows.Close()
	for rows.Next() {
		var p RowProblem
		if err := rows.Scan(&p.Line, &p.Column, &p.Value, &p.Message, &p.Expected); err != nil {
			return fault("remarks", err)
		}
		if err := each(p); err != nil {
			return err
		}
	}
	return fault("remarks", rows.Err())
}
