package catalogue

import (
	"context"
	"database/sql"
	"errors"
	"math"
	"slices"
	"strconv"
	"strings"
	"time"
	"unicode"
)

// Kinds of Audience. The zero kind is everyone, once a curator has accepted.
const (
	AudienceLater   = "later"   // everyone, but only from a day on, or when it is said to be published
	AudiencePrivate = "private" // nobody but its owner and those the owner names
)

// Audience is who sees the row of a contribution, and from when on.
type Audience struct {
	Kind   string
	Until  string // of AudienceLater: the day, UTC, as 2027-01-31, from which everyone sees it; "" = until published
	Coarse bool   // of AudienceLater: others meanwhile see the row with its place rounded to CoarseDegrees
	People string // sign-in names of those who see it beside its owner, as typed, parted by commas or spaces
}

// Hidden is a row that only some people see, as its owner or a curator lists
// it.
type Hidden struct {
	ID         int64 // of its contribution
	By         Account
	Embargo    bool   // accepted and waiting; false = private
	Until      string // day the embargo ends, "" = when it is said to be published
	StandsFor  string // measurement that shows it to others with its place rounded, "" if none
	System     string // slug for those who see it
	SystemName string
	People     []string // sign-in names of those who see it beside its owner
}

// PrivatePrefix starts the id of every row that only some people see, in every
// table and file of those who do: private-12 is the row of contribution 12. No
// measurement of the catalogue has such an id.
const PrivatePrefix = "private-"

// PrivateContribution returns the number of the contribution behind the id of
// a private row, 0 when it is the id of any other row.
func PrivateContribution(measurement string) int64 {
	text, ok := strings.CutPrefix(measurement, PrivatePrefix)
	n, err := strconv.ParseInt(text, 10, 64)
	if !ok || err != nil || n < 1 {
		return 0
	}
	return n
}

// CoarseDegrees is the grid, in degrees, to which the place of a row under
// embargo is rounded for others: a cell of at most 111 km a side.
const CoarseDegrees = 1

// CoarseMark stands in the notes of a row that shows its place rounded, at the
// start or after InventedMark, so that it travels through every file.
const CoarseMark = "Place rounded to 1 degree."

const coarseNote = CoarseMark + " The exact place, the ends of the reach, its depth and its line are under embargo."

// isCoarse says whether notes carry the mark.
func isCoarse(notes string) bool {
	return strings.HasPrefix(strings.TrimSpace(strings.TrimPrefix(notes, InventedMark)), CoarseMark)
}

// coarsened is what others see of a row under embargo: latitude and longitude
// on the grid; without the ends of the reach, its depth, its name and the
// notes, any of which may say where it lies. What is not here cannot be
// searched, sorted or measured by others.
func coarsened(r Row) Row {
	round := func(n *Number) {
		if n.Valid {
			n.V = math.Round(n.V/CoarseDegrees)*CoarseDegrees + 0 // never -0
		}
	}
	out := r
	for _, n := range []*Number{&out.LatitudeDeg, &out.LongitudeDeg, &out.PalaeolatitudeDeg, &out.CatchmentLatitudeDeg} {
		round(n)
	}
	for _, n := range []*Number{&out.StartLatitudeDeg, &out.StartLongitudeDeg, &out.EndLatitudeDeg, &out.EndLongitudeDeg, &out.WaterDepthM} {
		*n = Number{}
	}
	out.Reach, out.Notes = "", coarseNote
	if r.Invented || strings.HasPrefix(r.Notes, InventedMark) {
		out.Notes = InventedMark + " " + coarseNote
	}
	out.WindowSinuosities = nil
	return out
}

// coarseColumns are those that coarsened changes: at the end of an embargo the
// exact row decides them.
var coarseColumns = map[string]bool{
	"latitude_deg": true, "longitude_deg": true, "palaeolatitude_deg": true, "catchment_latitude_deg": true,
	"start_latitude_deg": true, "start_longitude_deg": true, "end_latitude_deg": true, "end_longitude_deg": true,
	"water_depth_m": true, "reach": true, "notes": true,
}

// check refuses an audience that cannot be kept. today is a day as in Until.
func (a *Audience) check(today string, change bool) error {
	a.Until, a.People = strings.TrimSpace(a.Until), strings.TrimSpace(a.People)
	switch {
	case a.Kind == "" && (a.Until != "" || a.Coarse):
		return &Error{Code: Invalid, Field: "audience", Message: "a day or a rounded place is given, but everyone is to see the row at once", Expected: "an embargo, or neither"}
	case a.Kind != "" && a.Kind != AudienceLater && a.Kind != AudiencePrivate:
		return &Error{Code: Invalid, Field: "audience", Message: strconv.Quote(Clip(a.Kind)) + " is not allowed", Expected: "everyone, later or private"}
	case a.Kind != "" && change:
		return &Error{Code: Invalid, Field: "audience", Message: "this is a change to a record that everyone sees", Expected: "everyone; what is private or under embargo is a new record"}
	case len(a.People) > 2000:
		return &Error{Code: Invalid, Field: "people", Message: "that is too long", Expected: "sign-in names, at most 2000 characters"}
	}
	if a.Until == "" {
		return nil
	}
	day, err := time.Parse(time.DateOnly, a.Until)
	if err != nil || day.Year() > 2999 {
		return &Error{Code: Invalid, Field: "until", Message: strconv.Quote(Clip(a.Until)) + " is not a day", Expected: "year, month and day, as 2027-01-31"}
	}
	if a.Kind == AudienceLater && a.Until <= today {
		return &Error{Code: Invalid, Field: "until", Message: "the embargo would end at once", Expected: "a day after today, " + today + " (UTC)"}
	}
	return nil
}

// checkAudience is check for a contribution in its state: only one that is sent
// needs a day to come and people that exist.
func (s *Store) checkAudience(ctx context.Context, q querier, owner int64, sub *Submission, state string, change bool) error {
	today := ""
	if state == "submitted" {
		today = s.today()
	}
	if err := sub.Audience.check(today, change); err != nil || state != "submitted" {
		return err
	}
	_, err := peopleOf(ctx, q, sub.Audience.People, owner)
	return err
}

// AudienceFaults is everything for which a contribution of owner could not be
// sent to be seen by a: the Errors that Submit would give one at a time. change
// says that it changes what everyone sees.
func (s *Store) AudienceFaults(ctx context.Context, owner int64, a Audience, change bool) ([]*Error, error) {
	_, people := peopleOf(ctx, s.r, a.People, owner)
	var out []*Error
	for _, err := range []error{a.check(s.today(), change), people} {
		var e *Error
		if err != nil && !errors.As(err, &e) {
			return nil, fault("audience", err)
		}
		if e != nil && !slices.ContainsFunc(out, func(x *Error) bool { return x.Field == e.Field }) {
			out = append(out, e)
		}
	}
	return out, nil
}

func (s *Store) today() string { return s.now().UTC().Format(time.DateOnly) }

// peopleOf finds the accounts named in a text; each must exist. The owner is
// left out.
func peopleOf(ctx context.Context, q querier, text string, owner int64) ([]int64, error) {
	names := strings.FieldsFunc(text, func(r rune) bool { return unicode.IsSpace(r) || r == ',' || r == ';' })
	if len(names) > 100 {
		return nil, &Error{Code: Invalid, Field: "people", Message: strconv.Itoa(len(names)) + " people are named", Expected: "at most 100"}
	}
	var ids []int64
	for _, name := range names {
		var id int64
		err := q.QueryRowContext(ctx, `SELECT id FROM accounts WHERE name = ?`, name).Scan(&id)
		if errors.Is(err, sql.ErrNoRows) {
			return nil, &Error{Code: Invalid, Field: "people", Message: "nobody signs in here as " + strconv.Quote(Clip(name)), Expected: "sign-in names of this catalogue, parted by commas or spaces"}
		}
		if err != nil {
			return nil, err
		}
		if id != owner {
			ids = append(ids, id)
		}
	}
	return ids, nil
}

// keepAudience stores the audience of a contribution.
func keepAudience(ctx context.Context, tx *sql.Tx, id int64, a Audience) error {
	if _, err := tx.ExecContext(ctx, `DELETE FROM audiences WHERE submission_id = ?`, id); err != nil {
		return err
	}
	if a.Kind == "" {
		return nil
	}
	_, err := tx.ExecContext(ctx, `INSERT INTO audiences (submission_id, kind, until, coarse, people) VALUES (?, ?, ?, ?, ?)`, id, a.Kind, a.Until, a.Coarse, a.People)
	return err
}

func audienceOf(ctx context.Context, q querier, id int64) (a Audience, err error) {
	err = q.QueryRowContext(ctx, `SELECT kind, until, coarse, people FROM audiences WHERE submission_id = ?`, id).Scan(&a.Kind, &a.Until, &a.Coarse, &a.People)
	if errors.Is(err, sql.ErrNoRows) {
		err = nil
	}
	return a, err
}

// AudienceOf returns who is to see the row of a contribution.
func (s *Store) AudienceOf(ctx context.Context, id int64) (Audience, error) {
	a, err := audienceOf(ctx, s.r, id)
	return a, fault("audience", err)
}

// HiddenRow returns a row that only some people see, nil when the contribution
// has none.
func (s *Store) HiddenRow(ctx context.Context, id int64) (*Hidden, error) {
	rows, err := s.hiddenRows(ctx, " WHERE h.id = ?", id)
	if err != nil || len(rows) == 0 {
		return nil, err
	}
	return &rows[0], nil
}

// HiddenRecord returns the row itself, nil when the contribution has none.
func (s *Store) HiddenRecord(ctx context.Context, id int64) (*Row, error) {
	h, _, err := hiddenRow(ctx, s.r, id)
	if err != nil || h == nil {
		return nil, fault("hidden row", err)
	}
	return &h.row, nil
}

// HiddenRowsBy lists the private rows and those under embargo of an account.
func (s *Store) HiddenRowsBy(ctx context.Context, owner int64) ([]Hidden, error) {
	return s.hiddenRows(ctx, " WHERE h.account_id = ? ORDER BY h.id", owner)
}

// Embargoes lists the accepted rows that wait, those that end first first: a
// curator has read them. Private rows are not among them.
func (s *Store) Embargoes(ctx context.Context) ([]Hidden, error) {
	return s.hiddenRows(ctx, " WHERE h.hidden = 'embargo' ORDER BY h.until = '', h.until, h.id")
}

func (s *Store) hiddenRows(ctx context.Context, tail string, args ...any) ([]Hidden, error) {
	rows, err := s.r.QueryContext(ctx, `SELECT h.id, h.hidden = 'embargo', h.until, h.stands_for, coalesce((SELECT y.slug FROM systems y WHERE y.slug = h.slug), h.slug), h.system_name,
		a.id, a.name, a.credit, (SELECT coalesce(group_concat(p.name, ', '), '') FROM hidden_row_people n JOIN accounts p ON p.id = n.account_id WHERE n.row_id = h.id)
		FROM hidden_rows h JOIN accounts a ON a.id = h.account_id`+tail, args...)
	if err != nil {
		return nil, fault("hidden rows", err)
	}
	defer rows.Close()
	var out []Hidden
	for rows.Next() {
		var h Hidden
		var people string
		if err := rows.Scan(&h.ID, &h.Embargo, &h.Until, &h.StandsFor, &h.System, &h.SystemName, &h.By.ID, &h.By.Name, &h.By.Credit, &people); err != nil {
			return nil, fault("hidden rows", err)
		}
		if people != "" {
			h.People = strings.Split(people, ", ")
		}
		out = append(out, h)
	}
	return out, fault("hidden rows", rows.Err())
}
