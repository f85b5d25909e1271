package catalogue

import (
	"context"
	"fmt"
)

// State names what the catalogue shows to a signed-out reader: it differs from
// that of any other catalogue, and changes with every accepted change, every
// frozen analysis and every release.
func (s *Store) State(ctx context.Context) (string, error) {
	rev, err := s.Revision(ctx)
	if err != nil {
		return "", err
	}
	var uuid string
	var analyses, releases int64
	err = s.r.QueryRowContext(ctx, `SELECT (SELECT uuid FROM catalogue_identity), (SELECT count(*) FROM analyses) + (SELECT count(*) FROM recomputations),
		(SELECT count(*) FROM releases) + (SELECT count(*) FROM release_dois)`).Scan(&uuid, &analyses, &releases)
	return fmt.Sprint(uuid, " ", rev, " ", analyses, " ", releases), fault("state", err)
}
