package catalogue

import (
	"context"
	"fmt"
)

// State names what the catalogue shows to a signed-out reader: it changes with
// every accepted change and with every release.
func (s *Store) State(ctx context.Context) (string, error) {
	rev, err := s.Revision(ctx)
	if err != nil {
		return "", err
	}
	var analyses int64
	err = s.r.QueryRowContext(ctx, `SELECT count(*) FROM analyses`).Scan(&analyses)
	return fmt.Sprint(rev, analyses), fault("state", err)
}
