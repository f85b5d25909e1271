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
// now, and as proposed.
type ThreeWay struct{ Column, Base, Now, Proposed string }

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
	Next              int64 // the next submission of the queue, 0 = none
}

// Activity is one line of what happened lately.
type Activity struct {
	At               time.Time
	Who, Author      string // who accepted it; whose it was, when another's
	What, Address    string
	Created, Changed int // records made, fields changed
	Why              string
}

// parsedNumber is the number in a cell, NaN when there is none.
func parsedNumber(text string) float64 {
	v, err := strconv.ParseFloat(text, 64)
	if err != nil {
		return math.NaN()
	}
	return v
}
