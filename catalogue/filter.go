package catalogue

// Filter selects systems and measurements. The zero value selects every
// accepted row. Repeated values of one parameter are joined by "or", different
// parameters by "and".
type Filter struct {
	Text    string              // q: full-text search
	Choices map[string][]string // kind setting margin feeder grain confinement activity burial survey extraction grade basin parent_deposit source

	LatMin, LatMax             Number // signed degrees
	AbsLatMin, AbsLatMax       Number // degrees
	SlopeMin, SlopeMax         Number // m/m
	SinuosityMin, SinuosityMax Number
	WidthMin, WidthMax         Number // m
	AgeMin, AgeMax             Number // Ma
	BBox                       *BBox
	Release                    string
	WithoutPrivate             bool // private=no: what everybody sees, said in the address; AsEverybody does it

	Sort    string // column, "-" before it for descending
	Page    int    // from 1; 0 is 1
	PerPage int    // 0 is the default of 50; at most 500
}

// BBox is a box in WGS84 degrees; West > East crosses the antimeridian.
type BBox struct{ West, South, East, North float64 }
