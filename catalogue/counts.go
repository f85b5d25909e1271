package catalogue

import "context"

// AtMost bounds the accepted measurements from above without reading them.
func (s *Store) AtMost(ctx context.Context) (measurements int, err error) {
	err = s.r.QueryRowContext(ctx, `SELECT coalesce(max(id), 0) FROM measurements`).Scan(&measurements)
	return measurements, fault("measurements", err)
}

// CountSystems is how many systems have a measurement under the filter.
func (s *Store) CountSystems(ctx context.Context, f Filter) (systems int, err error) {
	err = s.indexed(ctx, &f, func(q querier, ix *rowIndex) error {
		in, err := ix.match(ctx, q, &f)
		systems = len(ix.bests(in))
		return err
	})
	return systems, err
}
