package catalogue

import (
	"context"
	"database/sql"
	"encoding/json"
	"errors"
	"slices"
	"strconv"
	"strings"
	"time"
	"unicode/utf8"
)

// Release is the accepted catalogue frozen under a name. Nothing in it ever
// changes; only a DOI may be entered once, later, beside it.
type Release struct {
	Name      string
	Title     string // of the catalogue, as cited
	Notes     string
	Licence   string // of the collection, one of ReleaseLicences
	DOI       string // with which it was frozen, or entered later; "" if none
	FrozenDOI string // with which it was frozen
	Authors   []Author
	Licences  []FacetValue // of its rows, by falling count; "" = not said

	Systems, Measurements, Sources, Centrelines int
	Invented                                    int // measurements that no survey made

	Checksum string // SHA-256 of its measurement table as CSV, hexadecimal
	Bytes    int64  // length of that CSV
	Revision int64  // of the catalogue when it was frozen
	Program  string // version of the program that froze it
	By       string // credit line of who froze it, "" = the command line
	At       time.Time
}

// Author is a credit line of contributors, with the ORCID iD of the one account
// that has this credit line.
type Author struct {
	Name         string `json:"name"`
	ORCID        string `json:"orcid,omitempty"`
	Measurements int    `json:"measurements"`
}

// ReleaseLicences are the licences a release may be given away under, by their
// SPDX names.
var ReleaseLicences = []string{"CC-BY-4.0", "CC0-1.0"}

// DefaultTitle is what a catalogue is called when nobody said otherwise.
const DefaultTitle = "Fathombend catalogue of submarine channels"

// Present names the catalogue as it is now where the name of a release may
// stand.
const Present = "present"

const releaseColumns = `r.name, r.title, r.notes, r.licence, r.doi, coalesce(d.doi, r.doi), r.authors, r.licences, r.systems, r.measurements, r.sources,
	r.centrelines, r.invented, r.checksum, r.bytes, r.revision, r.program, coalesce(a.credit, ''), r.created_at`

const fromReleases = ` FROM releases r LEFT JOIN release_dois d ON d.release_id = r.id LEFT JOIN accounts a ON a.id = r.account_id`

func scanRelease(scan func(...any) error) (Release, error) {
	var r Release
	var authors, licences, at string
	err := scan(&r.Name, &r.Title, &r.Notes, &r.Licence, &r.FrozenDOI, &r.DOI, &authors, &licences, &r.Systems, &r.Measurements, &r.Sources,
		&r.Centrelines, &r.Invented, &r.Checksum, &r.Bytes, &r.Revision, &r.Program, &r.By, &at)
	if err != nil {
		return r, err
	}
	r.At = parseTime(at)
	return r, errors.Join(json.Unmarshal([]byte(authors), &r.Authors), json.Unmarshal([]byte(licences), &r.Licences))
}

// Releases lists the releases, newest first.
func (s *Store) Releases(ctx context.Context) ([]Release, error) {
	rows, err := s.r.QueryContext(ctx, `SELECT `+releaseColumns+fromReleases+` ORDER BY r.id DESC`)
	if err != nil {
		return nil, fault("releases", err)
	}
	defer rows.Close()
	var out []Release
	for rows.Next() {
		r, err := scanRelease(rows.Scan)
		if err != nil {
			return nil, fault("releases", err)
		}
		out = append(out, r)
	}
	return out, fault("releases", rows.Err())
}

// Release returns one release; an unknown name is NotFound.
func (s *Store) Release(ctx context.Context, name string) (*Release, error) {
	r, err := scanRelease(s.r.QueryRowContext(ctx, `SELECT `+releaseColumns+fromReleases+` WHERE r.name = ?`, name).Scan)
	if errors.Is(err, sql.ErrNoRows) {
		return nil, &Error{Code: NotFound, Field: "release", Message: "there is no release named " + strconv.Quote(Clip(name))}
	}
	return &r, fault("release", err)
}

// SetReleaseDOI enters the DOI that a release was given after it was frozen.
// It is done once: a DOI that stands already is a Conflict.
func (s *Store) SetReleaseDOI(ctx context.Context, name, doi string, by int64) error {
	doi, err := releaseDOI(doi)
	if err == nil && doi == "" {
		err = &Error{Code: Invalid, Field: "doi", Message: "there is no DOI in it", Expected: "a DOI, as 10.5281/zenodo.1234567"}
	}
	if err != nil {
		return err
	}
	return s.write(ctx, func(tx *sql.Tx) error {
		var id int64
		var has string
		err := tx.QueryRowContext(ctx, `SELECT r.id, coalesce(d.doi, r.doi) FROM releases r LEFT JOIN release_dois d ON d.release_id = r.id WHERE r.name = ?`, name).Scan(&id, &has)
		switch {
		case errors.Is(err, sql.ErrNoRows):
			return &Error{Code: NotFound, Field: "release", Message: "there is no release named " + strconv.Quote(Clip(name))}
		case err != nil:
			return err
		case has == doi:
			return nil
		case has != "":
			return &Error{Code: Conflict, Field: "doi", Message: "this release has the DOI " + has + " already, and a DOI is never changed"}
		}
		_, err = tx.ExecContext(ctx, `INSERT INTO release_dois (release_id, doi, account_id, at) VALUES (?, ?, ?, ?)`, id, doi, orNull(by), s.stamp())
		return err
	})
}

// NewRelease is what a release is asked for with.
type NewRelease struct {
	Name    string
	Title   string // "" = DefaultTitle
	Notes   string
	Licence string // "" = the widest the rows allow
	DOI     string
	Program string // version of the program
	By      int64  // account, 0 = the command line
	// Settings of the program on that day, JSON; "" records none.
	Settings string
}

// check cleans what was typed and refuses what cannot stand.
func (n *NewRelease) check() error {
	n.Name, n.Title, n.Notes = CleanText(n.Name), CleanText(n.Title), CleanText(n.Notes)
	if n.Title == "" {
		n.Title = DefaultTitle
	}
	const names = "letters, digits, points, dashes and underscores, at most 64, beginning with a letter or digit, as 2025.1"
	lower := strings.ToLower(n.Name)
	switch {
	case n.Name == "":
		return &Error{Code: Invalid, Field: "name", Message: "the release needs a name", Expected: names}
	case !validRelease(n.Name) || strings.ContainsAny(n.Name[:1], ".-_"):
		return &Error{Code: Invalid, Field: "name", Message: strconv.Quote(Clip(n.Name)) + " cannot be the name of a release", Expected: names}
	case lower == Present:
		return &Error{Code: Invalid, Field: "name", Message: strconv.Quote(n.Name) + " stands for the catalogue as it is now", Expected: "another name"}
	case slices.ContainsFunc([]string{".json", ".csv", ".zip"}, func(x string) bool { return strings.HasSuffix(lower, x) }):
		return &Error{Code: Invalid, Field: "name", Message: "the name ends like that of a file", Expected: names}
	case utf8.RuneCountInString(n.Title) > 200 || strings.ContainsRune(n.Title, '\n'):
		return &Error{Code: Invalid, Field: "title", Message: "the title is too long", Expected: "one line of at most 200 characters"}
	case utf8.RuneCountInString(n.Notes) > 20000:
		return &Error{Code: Invalid, Field: "notes", Message: "the notes are too long", Expected: "at most 20,000 characters"}
	case !utf8.ValidString(n.Title + n.Notes):
		return &Error{Code: Invalid, Field: "notes", Message: "the text cannot be read", Expected: "UTF-8 text"}
	case n.Licence != "" && !slices.Contains(ReleaseLicences, n.Licence):
		return &Error{Code: Invalid, Field: "licence", Message: strconv.Quote(Clip(n.Licence)) + " is not a licence for a release", Expected: "one of: " + strings.Join(ReleaseLicences, ", ")}
	}
	var err error
	n.DOI, err = releaseDOI(n.DOI)
	return err
}

// releaseDOI takes a resolver off a DOI and refuses what is none. Its syntax is
// that of the DOI handbook: 10., a registrant, a slash, anything printable.
func releaseDOI(text string) (string, error) {
	doi := CleanText(text)
	for _, prefix := range []string{"https://doi.org/", "http://doi.org/", "https://dx.doi.org/", "http://dx.doi.org/", "doi.org/", "doi:"} {
		if len(doi) >= len(prefix) && strings.EqualFold(doi[:len(prefix)], prefix) {
			doi = strings.TrimSpace(doi[len(prefix):])
			break
		}
	}
	if doi == "" {
		return "", nil
	}
	registrant, suffix, ok := strings.Cut(doi, "/")
	number, is10 := strings.CutPrefix(registrant, "10.")
	if !ok || !is10 || len(number) < 4 || strings.Trim(number, "0123456789.") != "" || suffix == "" || len(doi) > 300 ||
		strings.ContainsFunc(doi, func(r rune) bool {
			return r <= ' ' || r == 0x7f || r == utf8.RuneError || r == '"' || r == '<' || r == '>'
		}) {
		return "", &Error{Code: Invalid, Field: "doi", Message: strconv.Quote(Clip(text)) + " is not a DOI", Expected: "a DOI, as 10.5281/zenodo.1234567"}
	}
	return doi, nil
}

// Identity is the number of this catalogue, an RFC 9562 UUID that stays with
// the file and its copies.
func (s *Store) Identity(ctx context.Context) (uuid string, err error) {
	err = s.r.QueryRowContext(ctx, `SELECT uuid FROM catalogue_identity`).Scan(&uuid)
	return uuid, fault("identity", err)
}

// LastChange is when the catalogue was last changed by an accepted change; the
// zero time when nothing was accepted yet.
func (s *Store) LastChange(ctx context.Context) (time.Time, error) {
	var at sql.NullString
	err := s.r.QueryRowContext(ctx, `SELECT t.at FROM change_sets t JOIN revisions v ON v.change_set_id = t.id ORDER BY v.id DESC LIMIT 1`).Scan(&at)
	if errors.Is(err, sql.ErrNoRows) {
		err = nil
	}
	return parseTime(at.String), fault("last change", err)
}

// ReleaseCounts is what to look at before a release is frozen.
type ReleaseCounts struct {
	Waiting            int // submissions that wait for review
	WithoutLicence     int // measurements whose licence is not said
	WithoutContributor int
	Invented           int
}

// ReleaseCounts counts over the rows a release would hold.
func (s *Store) ReleaseCounts(ctx context.Context) (n ReleaseCounts, err error) {
	f := Filter{}
	w, err := f.condition()
	if err != nil {
		return n, err
	}
	err = s.r.QueryRowContext(ctx, `SELECT (SELECT count(*) FROM submissions WHERE state = 'submitted'), count(CASE WHEN m.licence = '' THEN 1 END),
		count(CASE WHEN m.contributor = '' THEN 1 END), count(CASE WHEN substr(m.notes, 1, ?) = ? THEN 1 END)`+fromRows+w.String(),
		append([]any{len(InventedMark), InventedMark}, w.args...)...).Scan(&n.Waiting, &n.WithoutLicence, &n.WithoutContributor, &n.Invented)
	return n, fault("release counts", err)
}

// Summary is what rows hold together.
type Summary struct {
	Systems, Measurements, Invented int
	Authors                         []Author
	Licence                         string // the widest of ReleaseLicences that the rows allow
}

// Summary sums up the rows under a filter.
func (s *Store) Summary(ctx context.Context, f Filter) (*Summary, error) {
	w, err := f.condition()
	if err != nil {
		return nil, err
	}
	out := &Summary{}
	err = s.read(ctx, func(tx *sql.Tx) error {
		q, err := at(ctx, tx, f.Release)
		if err != nil {
			return err
		}
		if err := q.QueryRowContext(ctx, "SELECT count(*), count(DISTINCT m.system_id), count(CASE WHEN substr(m.notes, 1, ?) = ? THEN 1 END)"+fromRows+w.String(),
			append([]any{len(InventedMark), InventedMark}, w.args...)...).Scan(&out.Measurements, &out.Systems, &out.Invented); err != nil {
			return err
		}
		authors, err := countBy(ctx, q, "m.contributor", w)
		if err != nil {
			return err
		}
		if out.Authors, err = authorsOf(ctx, tx, authors); err != nil {
			return err
		}
		licences, err := countBy(ctx, q, "m.licence", w)
		r := Release{}
		for v, n := range licences {
			r.Licences = append(r.Licences, FacetValue{v, n})
		}
		if err != nil || r.settleLicence() != nil {
			return err
		}
		out.Licence = r.Licence
		return nil
	})
	return out, err
}

func countBy(ctx context.Context, q querier, expr string, w *where) (map[string]int, error) {
	rows, err := q.QueryContext(ctx, "SELECT "+expr+", count(*)"+fromRows+w.String()+" GROUP BY 1", w.args...)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	out := map[string]int{}
	for rows.Next() {
		var text string
		var n int
		if err := rows.Scan(&text, &n); err != nil {
			return nil, err
		}
		out[text] = n
	}
	return out, rows.Err()
}

// SystemCounts counts the measurements under a filter by the slug of their
// system.
func (s *Store) SystemCounts(ctx context.Context, f Filter) (map[string]int, error) {
	w, err := f.condition()
	if err != nil {
		return nil, err
	}
	q, err := at(ctx, s.r, f.Release)
	if err != nil {
		return nil, fault("count", err)
	}
	out, err := countBy(ctx, q, "s.slug", w)
	return out, fault("count", err)
}
