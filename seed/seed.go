// Package seed holds the invented demo catalogue, the law it is drawn from and
// the generator.
package seed

import (
	"context"

	"fathombend/catalogue"
)

// Law is one of the laws the demo can be drawn from.
type Law string

// The laws, as `serve -demo-law` names them.
const (
	Coriolis Law = "coriolis"
	Supply   Law = "supply"
	Both     Law = "both"
	None     Law = "none"
)

// Fill writes the demo catalogue into an empty store.
func Fill(ctx context.Context, s *catalogue.Store, law Law) error { return nil }
