package catalogue

import (
	"context"
	"errors"
	"net/url"
)

// Store is an open catalogue.
type Store struct{ Catalogue }

// Options of Open.
type Options struct {
	ReadOnly bool
}

// Open opens the catalogue in the SQLite file at path, creating and migrating
// it as needed.
func Open(ctx context.Context, path string, o Options) (*Store, error) {
	return nil, errors.New("not built yet")
}

// ParseFilter reads the filter parameters of the contract out of a query.
func ParseFilter(q url.Values) (Filter, error) { return Filter{}, nil }

// Values is the way back: only what is set.
func (f Filter) Values() url.Values { return url.Values{} }

// FilterParameters are the names ParseFilter reads.
var FilterParameters = []string{"q", "kind", "setting", "margin", "feeder", "grain", "confinement", "activity", "burial", "survey", "extraction", "grade", "basin", "parent_deposit", "source", "lat_min", "lat_max", "abs_lat_min", "abs_lat_max", "slope_min", "slope_max", "sinuosity_min", "sinuosity_max", "width_min", "width_max", "age_min", "age_max", "bbox", "release", "sort", "page", "per_page"}
