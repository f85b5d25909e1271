package catalogue

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
)

// InsertRows accepts many rows and lines in one transaction: all or none. Rows
// pass the same hard checks as every other; warnings do not stop them. Each
// row comes back as stored, with its measurement id and slug; lines name their
// measurement or system by those.
func (s *Store) InsertRows(ctx context.Context, rows []Row, lines []Centreline, by int64, why string) error {
	return s.write(ctx, func(tx *sql.Tx) error {
		a := s.applier(tx, by, why)
		for i := range rows {
			if _, err := a.apply(ctx, &rows[i]); err != nil {
				return placed(err, "row", i, rows[i].SystemName)
			}
		}
		for i, l := range lines {
			if _, err := a.addLine(ctx, l); err != nil {
				return placed(err, "line", i, l.Measurement)
			}
		}
		return nil
	})
}

// placed says which of many items an error is about.
func placed(err error, what string, i int, name string) error {
	var own *Error
	if !errors.As(err, &own) {
		return err
	}
	e := *own
	e.Message = fmt.Sprintf("%s %d (%s): %s", what, i+1, Clip(name), own.Message)
	return &e
}
