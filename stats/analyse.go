package stats

import "context"

// Analyse answers req on rows. ctx cancels; progress, if not nil, is called
// with a fraction 0..1.
func Analyse(ctx context.Context, rows []Row, req Request, progress func(float64)) (*Analysis, error) {
	return &Analysis{}, nil
}
