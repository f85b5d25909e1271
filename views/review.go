package views

import (
	"math"
	"strconv"
	"time"

	"fathombend/catalogue"
)

// Queued is one line of the curator's queue.
type Queued struct {
	ID         int64
	SystemName string
	Sinuosity  float64
	By         string
	At         time.Time
	Measured   string // measurement id it changes, "" = new
	Changes    int    // fields changed
	Odd        int    // warnings
	Act        string // edit, withdraw or restore
	Conflict   bool   // its record changed since it was written
	Gone       bool   // its record was withdrawn since
	Said       int    // messages about it
	LastSaid   string // and who wrote the last
	Source     string
}

// Queue is one page of what waits for a curator.
type Queue struct {
	Total, Page, Pages int
	Single             []Queued      // sent by a form
	Batches            []QueuedBatch // sent as files
}

// QueuedBatch is what waits of one imported file, on this page.
type QueuedBatch struct {
	ID   int64
	Rows []Queued
}

// Add puts a record into its place; batch 0 is none.
func (q *Queue) Add(r Queued, batch int64) {
	if batch == 0 {
		q.Single = append(q.Single, r)
		return
	}
	for i := range q.Batches {
		if q.Batches[i].ID == batch {
			q.Batches[i].Rows = append(q.Batches[i].Rows, r)
			return
		}
	}
	q.Batches = append(q.Batches, QueuedBatch{ID: batch, Rows: []Queued{r}})
}

// RecordGroup is a group of fields of a record, only those that hold
// something.
type RecordGroup struct {
	Title  string
	Fields []RecordField
}

// RecordField is one field as text.
type RecordField struct {
	Column, Value, Unit string
	Choice              bool // one of the column's choices
}

// ReviewFinding is a check that found something odd, and what its contributor
// says to it.
type ReviewFinding struct {
	Column, Message, Reason string
	Hard                    bool
}

// ThreeWay is one field of a conflict: as the author saw it, as it is accepted
// now, and as proposed. Choice is "now", "proposed" or not made yet.
type ThreeWay struct{ Column, Base, Now, Proposed, Choice string }

// chosen is the choice offered: where only one side changed the field, that
// side's.
func (w ThreeWay) chosen() string {
	switch {
	case w.Choice != "":
		return w.Choice
	case w.Now == w.Proposed || w.Proposed == w.Base:
		return "now"
	case w.Now == w.Base:
		return "proposed"
	}
	return ""
}

// Review is one submission as a curator sees it.
type Review struct {
	ID                int64
	State             string
	Row               catalogue.Row
	Sinuosity         float64 // NaN when not given
	By, Credit, ORCID string
	At                time.Time
	Measurement       string
	NewSystem         bool
	Slug              string // of the accepted system, "" when new
	Changes           []catalogue.FieldChange
	Groups            []RecordGroup
	Unsaid            []string // choices left at "unknown", by label
	Findings          []ReviewFinding
	Messages          []catalogue.Message
	Line              *LineReport
	Conflict          []ThreeWay // not empty: the record changed since the author saw it
	Refused           bool       // the decision was refused because of it
	ConflictNote      string
	Comment           string // typed, kept on error
	Errors            map[string]string
	Act, Instead      string                  // edit, withdraw or restore; what stands for a withdrawn record
	Only              bool                    // the record to be withdrawn is the only one of its system
	Seen              int64                   // revision of the record as shown
	Became            string                  // the record an accepted one became
	Edits             []catalogue.FieldChange // what the curator changed of the proposal
	Audience          string                  // who is to see it, when not everybody at once
	Next              int64                   // the next submission of the queue, 0 = none
	Gone              bool                    // its record was withdrawn since it was sent: it can only be returned
}

// settles says that both versions are lined up for a choice field by field:
// the one way then to accept it.
func (r Review) settles() bool {
	return r.State == "submitted" && r.Act == catalogue.ActEdit && len(r.Conflict) > 0
}

// Activity is one line of what happened lately.
type Activity struct {
	ID               int64
	At               time.Time
	Who, Author      string // who accepted it; whose it was, when another's
	What, Address    string
	Created, Changed int // records made, fields changed
	Why              string

	Withdrawn, Back, Merged int   // measurements out and in, systems merged
	Undoes, UndoneBy        int64 // changes it takes back, or that take it back
	Sampled, SampledOf      int   // rows of its file that were read, of how many
}

// BatchPage is one imported file with the sample that is to be read before all
// of it is accepted.
type BatchPage struct {
	ID         int64
	Who, Why   string
	At         time.Time
	Total      int // rows that wait
	Size, Seed int
	Bound      int // rows that may be wrong although the sample holds none
	Rows       []SampledRow
	Read       []int64 // marked as read
	Comment    string
	Errors     map[string]string
}

// SampledRow is one row of a sample in full.
type SampledRow struct {
	ID        int64
	Place     int // in the file, among what waits
	Name      string
	Sinuosity float64
	Findings  []ReviewFinding
	Changes   []catalogue.FieldChange // of an accepted record
	Groups    []RecordGroup
	Unsaid    []string
	Read      bool
}

// ChangeSetPage is what was changed at once.
type ChangeSetPage struct {
	ID               int64
	Set              Activity
	Submission       int64
	Undoes, UndoneBy int64
	Revisions        []catalogue.Revision
	Sample           *catalogue.Sample
	Why, Refusal     string
}

// MergePage makes one system of two.
type MergePage struct {
	From, Into      string // slugs as typed
	View            *catalogue.MergeView
	Why, OtherNames string
	Chosen          map[string]string // columns taken from the one that goes
	TwinsChosen     []string
	Errors          map[string]string
}

func (p MergePage) names() string {
	if p.Chosen != nil {
		return p.OtherNames
	}
	return p.View.OtherNames
}

// TwinsPage makes one measurement of two.
type TwinsPage struct {
	Keep, Drop    string
	Kept, Dropped *catalogue.Row
	Revision      int64
	Changes       []catalogue.FieldChange // Before is the one that stays, After the one that goes
	Take          []string
	Why           string
	Errors        map[string]string
}

// parsedNumber is the number in a cell, NaN when there is none.
func parsedNumber(text string) float64 {
	v, err := strconv.ParseFloat(text, 64)
	if err != nil {
		return math.NaN()
	}
	return v
}
