package catalogue

import "time"

// This file holds the types other rooms build against; the methods of Store
// live beside their nouns.

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
	History     []Revision  // of the system, all its measurements ever, and its lines
	Withdrawn   []Withdrawn // its measurements that are no longer part of the catalogue
	Merged      []string    // slugs of systems that were merged into it
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
	Set    int64 // the change set it was made in
	At     time.Time
	Who    string
	Why    string
	Record string // "system:slug", "measurement:id" or "centreline:number"
	Field  string
	Before string
	After  string
	Action string // create, change, withdraw, accept (put back)
}

// Facet counts the accepted systems by each choice of one column under the
// filter; see Facets.
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
	Waiting  bool // registered and not let in yet: keeps drafts, sends nothing
}

// Submission is a contributed change waiting for a curator.
type Submission struct {
	ID         int64
	By         Account // zero for the command line
	At         time.Time
	UpdatedAt  time.Time
	State      string // draft, submitted, returned, accepted, withdrawn
	Batch      int64  // the imported file it came with, 0 for a form
	Row        Row    // as proposed; choices may be blank in drafts and returned ones
	Current    *Row   // the accepted record it would change, nil when new
	Changes    []FieldChange
	Overrides  map[string]string // warning key -> reason
	Comment    string            // the curator's latest word
	Messages   []Message         // filled for one submission, not in lists
	Centreline string            // GeoJSON, "" if none

	// Typed keeps the cells of a draft that cannot be read yet, as typed:
	// column -> text.
	Typed map[string]string
	// Settings and window sinuosities of Centreline, as in Centreline.
	CentrelineSettings    string
	CentrelineSinuosities []float64
	// BaseRevision is the revision of the record the author saw (given to Submit
	// so that a change made in between is noticed; 0 = the present one);
	// CurrentRevision that of Current.
	BaseRevision    int64
	CurrentRevision int64
	// Base is the record as the author saw it, nil when new.
	Base *Row
	// Act is what is asked for: ActEdit, ActWithdraw or ActRestore. Instead is
	// the measurement that is to stand for a withdrawn one.
	Act     string
	Instead string
	// Became is the measurement an accepted submission made or changed, and
	// Accepted the record as it was accepted, with the curator's edits.
	Became   string
	Accepted *Row
	Edits    []FieldChange // what the curator changed of the proposal
	Said     int           // messages about it
	LastSaid string        // credit line of who wrote the last
	// Since are the changes others made to the record after the author saw it.
	Since []FieldChange

	// Audience is who is to see the row, as given to SaveDraft and Submit; see
	// AudienceOf for the way back.
	Audience Audience

	raw Row // as kept: blank choices are not said
}

// The acts of a Submission.
const (
	ActEdit     = "edit"     // a new record, or other values for one
	ActWithdraw = "withdraw" // a record is to leave the catalogue
	ActRestore  = "restore"  // a withdrawn record is to come back
)

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
	Reading Reading // how the file is read, when not as the contract says
	// Progress, if set, is told the number of rows read so far, now and then.
	Progress func(rows int)
}

// ImportReport says what an import did.
type ImportReport struct {
	New, Changed, Identical int
	Stored                  bool
	Problems                []RowProblem // refused rows; empty when stored (unless Partial)
	Warnings                []RowProblem
	Conversions             []RowProblem // units converted, visibly
	UnknownColumns          []string
	Batch                   int64 // the batch waiting for review, 0 when published
}

// RowProblem is one remark on one cell of an imported file.
type RowProblem struct {
	Line     int
	Column   string
	Value    string
	Message  string
	Expected string
}
