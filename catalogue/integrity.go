package catalogue

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
)

// Integrity looks for faults in the file and returns each as one sentence:
// damaged pages, references that lead nowhere, rows against the schema, and
// text and place indexes that disagree with the records.
func (s *Store) Integrity(ctx context.Context) ([]string, error) {
	faults, err := s.faultsOnDisk(ctx)
	if err != nil {
		return nil, fault("check", err)
	}
	if len(faults) > 0 { // a damaged file is not looked at any further
		return faults, nil
	}
	if s.w == nil {
		faults, err = s.textFaultsOfCopy(ctx)
		return faults, fault("check", err)
	}
	// Comparing the words with the records word by word is a command, so it
	// needs the writer; it changes nothing and is rolled back.
	err = s.write(ctx, func(tx *sql.Tx) error {
		faults = append(faults, textFaults(ctx, tx)...)
		return errNotStored
	})
	if err != nil && !errors.Is(err, errNotStored) {
		return faults, err
	}
	return faults, nil
}

// faultsOnDisk looks through a connection of its own: the text index keeps a
// picture of its structure for each connection, which PRAGMA integrity_check
// does not renew, so that a connection that has searched before another one
// wrote reports damage where there is none.
func (s *Store) faultsOnDisk(ctx context.Context) ([]string, error) {
	db, err := s.alone("&_pragma=query_only(1)")
	if err != nil {
		return nil, err
	}
	defer db.Close()
	return databaseFaults(ctx, db)
}

// alone opens one more read-only connection.
func (s *Store) alone(more string) (*sql.DB, error) {
	db, err := sql.Open("sqlite", fileURI(s.path)+"?mode=ro&_pragma=busy_timeout(10000)"+s.immutable+more)
	if err == nil {
		db.SetMaxOpenConns(1)
	}
	return db, err
}

// CheckIntegrity is Integrity.
func (s *Store) CheckIntegrity(ctx context.Context) ([]string, error) { return s.Integrity(ctx) }

func databaseFaults(ctx context.Context, db querier) ([]string, error) {
	faults, err := pragmaFaults(ctx, db)
	if err != nil {
		return faults, err
	}
	refs, err := referenceFaults(ctx, db)
	if err != nil {
		return faults, err
	}
	faults = append(faults, refs...)
	for _, c := range []struct{ sentence, query string }{
		{"%d measurements have no place in the place index, or another one", `SELECT count(*) FROM measurements m LEFT JOIN places p ON p.id = m.id
			WHERE p.id IS NULL OR m.latitude_deg NOT BETWEEN p.south AND p.north OR m.longitude_deg - 360 * (m.longitude_deg > 180) NOT BETWEEN p.west AND p.east`},
		{"%d entries of the place index belong to no measurement", `SELECT count(*) FROM places p LEFT JOIN measurements m ON m.id = p.id WHERE m.id IS NULL`},
		{"%d measurements are not in the text index, or are there twice", `SELECT abs((SELECT count(*) FROM measurements) - (SELECT count(*) FROM search_docsize))`},
		{"%d private rows are not in their text index, or are there twice", `SELECT abs((SELECT count(*) FROM hidden_rows) - (SELECT count(*) FROM hidden_search_docsize))`},
	} {
		var n int
		if err := db.QueryRowContext(ctx, c.query).Scan(&n); err != nil {
			return faults, err
		}
		if n > 0 {
			faults = append(faults, fmt.Sprintf(c.sentence, n))
		}
	}
	return faults, nil
}

func pragmaFaults(ctx context.Context, db querier) ([]string, error) {
	rows, err := db.QueryContext(ctx, `PRAGMA integrity_check(100)`)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	var faults []string
	for rows.Next() {
		var line string
		if err := rows.Scan(&line); err != nil {
			return faults, err
		}
		if line != "ok" {
			faults = append(faults, "the file is damaged: "+line)
		}
	}
	return faults, rows.Err()
}

func referenceFaults(ctx context.Context, db querier) ([]string, error) {
	rows, err := db.QueryContext(ctx, `PRAGMA foreign_key_check`)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	var faults []string
	for rows.Next() {
		var table, parent string
		var id, key sql.NullInt64
		if err := rows.Scan(&table, &id, &parent, &key); err != nil {
			return faults, err
		}
		faults = append(faults, fmt.Sprintf("row %d of %s refers to nothing in %s", id.Int64, table, parent))
	}
	return faults, rows.Err()
}
