package catalogue

import (
	"context"
	"io"
	"net/url"
	"time"
)

// This file fixes the outline other rooms build against; bodies live beside
// their nouns.

// System is one channel system with its measurements.
type System struct {
	Slug         string
	Name         string
	Measurements []Row // accepted, best-graded first
	Revision     int   // latest revision of any of its records
	UpdatedAt    time.Time
}

// Best returns the measurement that stands for the system in lists: the
// best-graded, then the newest.
func (s System) Best() Row { return s.Measurements[0] }

// Detail is a system with everything its page shows.
type Detail struct {
	System
	Sources     []Source
	Centrelines []Centreline
	History     []Revision
}

// Source is a paper or survey.
type Source struct {
	ID       int64
	Citation string // the text of the column "source"
	DOI      string
}

// Centreline is a stored line.
type Centreline struct {
	ID          int64
	System      string
	Measurement string // "" when it belongs to the system only
	Line        string // GeoJSON LineString; third coordinate is elevation, m, up positive
	Settings    string // planform settings as JSON, "" if none
	Sinuosities []float64
}

// Revision is one recorded change.
type Revision struct {
	ID     int64
	At     time.Time
	Who    string
	Why    string
	Record string // "system:slug" or "measurement:id"
	Field  string
	Before string
	After  string
	Action string // create, change, accept, return, withdraw
}

// Facet counts the accepted systems by one choice of one column under the
// filter.
type Facet struct {
	Column string
	Values []FacetValue
}

// FacetValue is one choice and its count.
type FacetValue struct {
	Value string
	Count int
}

// Account is a person who signs in.
type Account struct {
	ID       int64
	Name     string // sign-in name
	Credit   string // public credit line
	Role     string // contributor, curator, keeper
	ORCID    string
	Disabled bool
}

// Submission is a contributed change waiting for a curator.
type Submission struct {
	ID         int64
	By         Account
	At         time.Time
	State      string // draft, submitted, returned, accepted, withdrawn
	Row        Row    // as proposed
	Current    *Row   // the accepted record it would change, nil when new
	Changes    []FieldChange
	Overrides  map[string]string // warning key -> reason
	Comment    string            // the curator's latest word
	Messages   []Message
	Centreline string // GeoJSON, "" if none
}

// FieldChange is one field before and after, as text.
type FieldChange struct{ Column, Before, After string }

// Message is one comment on a submission.
type Message struct {
	At   time.Time
	Who  string
	Text string
}

// Finding is the result of one check on a row.
type Finding struct {
	Column   string
	Key      string // stable name of the check
	Message  string // a sentence: what is odd and what to do
	Expected string
	Hard     bool // refused; otherwise a warning that can be overridden with a reason
}

// ImportOptions of one import.
type ImportOptions struct {
	Publish bool  // accept without review
	By      int64 // account, 0 = the command line
	Partial bool  // keep the good rows although others are bad
	Why     string
}

// ImportReport says what an import did.
type ImportReport struct {
	New, Changed, Identical int
	Stored                  bool
	Problems                []RowProblem // refused rows; empty when stored (unless Partial)
	Warnings                []RowProblem
	Conversions             []RowProblem // units converted, visibly
	UnknownColumns          []string
}

// RowProblem is one remark on one cell of an imported file.
type RowProblem struct {
	Line     int
	Column   string
	Value    string
	Message  string
	Expected string
}

// Catalogue is the outline of *Store. It exists to be read: nothing takes it
// as a parameter.
type Catalogue interface {
	Close() error
	// Revision grows with every accepted change: the key of every cache.
	Revision(ctx context.Context) (int64, error)
	// Rows returns all accepted measurements under the filter (no paging),
	// sorted; RowsPage one page of them with the total.
	Rows(ctx context.Context, f Filter) ([]Row, error)
	EachRow(ctx context.Context, f Filter, visit func(Row) error) error
	// Systems returns one page of systems with the total number of systems.
	Systems(ctx context.Context, f Filter) ([]System, int, error)
	Facets(ctx context.Context, f Filter) ([]Facet, error)
	System(ctx context.Context, slug string) (*Detail, error)
	Invented(ctx context.Context) (rows int, err error)

	Import(ctx context.Context, r io.Reader, o ImportOptions) (*ImportReport, error)
	Export(ctx context.Context, w io.Writer, f Filter) (rows int, err error)

	AddAccount(ctx context.Context, name, credit, role, password string) (*Account, error)
	SetPassword(ctx context.Context, name, password string) error
	SetRole(ctx context.Context, name, role string) error
	Accounts(ctx context.Context) ([]Account, error)
	Account(ctx context.Context, id int64) (*Account, error)
	Authenticate(ctx context.Context, name, password string) (*Account, error)

	Check(ctx context.Context, row Row) ([]Finding, error)
	SaveDraft(ctx context.Context, by int64, s Submission) (id int64, err error)
	Submit(ctx context.Context, by int64, s Submission) (id int64, err error)
	Submissions(ctx context.Context, state string, by int64) ([]Submission, error)
	Submission(ctx context.Context, id int64) (*Submission, error)
	Comment(ctx context.Context, id, by int64, text string) error
	Return(ctx context.Context, id, by int64, comment string) error
	Accept(ctx context.Context, id, by int64, comment string) error
	Withdraw(ctx context.Context, id, by int64) error

	AddCentreline(ctx context.Context, c Centreline, by int64, why string) (int64, error)

	// Session storage for scs: tokens are stored hashed.
	SessionFind(ctx context.Context, token string) (data []byte, found bool, err error)
	SessionCommit(ctx context.Context, token string, data []byte, expiry time.Time) error
	SessionDelete(ctx context.Context, token string) error

	Backup(ctx context.Context, path string) error
}

// ParseFilter reads the filter parameters of the contract out of a query and
// returns the names it used. A bad value is an Invalid Error naming the
// parameter and what was expected.
//
//	func ParseFilter(q url.Values) (Filter, error)
//	func (f Filter) Values() url.Values // the way back, only what is set
var _ url.Values
