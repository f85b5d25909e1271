package catalogue

import (
	"context"
	"database/sql"
	"errors"
	"strconv"
	"strings"
)

// KeepPrivate keeps a contribution as a private row: its owner and the people
// named in its audience see it beside the catalogue at once, nobody reviews it.
// The checks are those of Submit; what they refuse is refused here too. A row
// that waits for a curator is taken out of the queue.
func (s *Store) KeepPrivate(ctx context.Context, by int64, sub Submission) (id int64, err error) {
	if by == 0 {
		return 0, &Error{Code: Forbidden, Message: "a private row belongs to an account"}
	}
	if err := sub.readable(); err != nil {
		return 0, err
	}
	sub.Audience = Audience{Kind: AudiencePrivate, People: sub.Audience.People}
	err = s.write(ctx, func(tx *sql.Tx) error {
		if err := s.ready(ctx, tx, &sub); err != nil {
			return err
		}
		if sub.Row.Contributor == "" {
			a, err := accountByID(ctx, tx, by)
			if err != nil {
				return err
			}
			sub.Row.Contributor = a.Credit
		}
		people, err := peopleOf(ctx, tx, sub.Audience.People, by)
		if err != nil {
			return err
		}
		if id, err = s.keep(ctx, tx, by, &sub, "draft"); err != nil {
			return err
		}
		return s.hide(ctx, tx, hiding{id: id, owner: by, people: people, row: sub.Row, sub: &sub})
	})
	return id, err
}

// hiding is a row that only some people are to see.
type hiding struct {
	id, owner int64
	embargo   bool
	until     string
	standsFor string
	people    []int64
	row       Row
	sub       *Submission // its line
}

// hiddenColumns are the columns of the measurement table in hidden_rows.
var hiddenColumns = append(append([]*Column{}, systemColumns...), measurementColumns...)

// hide writes a hidden row anew. Its system is that of the catalogue when the
// row names one, else one of its owner's own.
func (s *Store) hide(ctx context.Context, tx *sql.Tx, h hiding) error {
	ex, err := s.applier(tx, 0, "").locate(ctx, &h.row)
	if err != nil {
		return err
	}
	if err := hardError(ex.findings); err != nil {
		return err
	}
	key, slug := h.id, h.row.System
	if ex.systemID == 0 {
		slug = PrivatePrefix + strconv.FormatInt(h.id, 10) + "-" + Slug(h.row.SystemName)
		slug = strings.Trim(slug[:min(len(slug), maxSlug)], "-")
		err := tx.QueryRowContext(ctx, `SELECT h.system_key, h.slug FROM hidden_rows h WHERE h.account_id = ? AND h.system_name = ? AND h.id <> ?
			AND NOT EXISTS (SELECT 1 FROM systems y WHERE y.slug = h.slug) ORDER BY h.id LIMIT 1`, h.owner, h.row.SystemName, h.id).Scan(&key, &slug)
		if err != nil && !errors.Is(err, sql.ErrNoRows) {
			return err
		}
	}
	windows, err := encodeWindows(h.sub.CentrelineSinuosities)
	if err != nil {
		return err
	}
	kind, first := AudiencePrivate, s.stamp()
	if h.embargo {
		kind = "embargo"
	}
	err = tx.QueryRowContext(ctx, `SELECT created_at FROM hidden_rows WHERE id = ?`, h.id).Scan(&first)
	if err != nil && !errors.Is(err, sql.ErrNoRows) {
		return err
	}
	if _, err := tx.ExecContext(ctx, `DELETE FROM hidden_rows WHERE id = ?`, h.id); err != nil {
		return err
	}
	cols := []string{"id", "account_id", "hidden", "until", "stands_for", "system_key", "slug", "source", "source_doi", "line", "settings", "sinuosities", "created_at", "updated_at"}
	args := []any{h.id, h.owner, kind, h.until, h.standsFor, key, slug, h.row.Source, h.row.SourceDOI, h.sub.Centreline, h.sub.CentrelineSettings, windows, first, s.stamp()}
	for _, c := range hiddenColumns {
		cols, args = append(cols, c.Name), append(args, c.value(&h.row))
	}
	if _, err := tx.ExecContext(ctx, `INSERT INTO hidden_rows (`+strings.Join(cols, ", ")+`) VALUES (?`+strings.Repeat(", ?", len(cols)-1)+`)`, args...); err != nil {
		return err
	}
	return namePeople(ctx, tx, h.id, h.people)
}

func namePeople(ctx context.Context, tx *sql.Tx, id int64, people []int64) error {
	if _, err := tx.ExecContext(ctx, `DELETE FROM hidden_row_people WHERE row_id = ?`, id); err != nil {
		return err
	}
	for _, p := range people {
		if _, err := tx.ExecContext(ctx, `INSERT OR IGNORE INTO hidden_row_people (row_id, account_id) VALUES (?, ?)`, id, p); err != nil {
			return err
		}
	}
	return nil
}

// rehide brings a private row up to what its owner has just sent for review;
// without one there is nothing to do.
func (s *Store) rehide(ctx context.Context, tx *sql.Tx, id int64, sub *Submission) error {
	h, _, err := hiddenRow(ctx, tx, id)
	if err != nil || h == nil {
		return err
	}
	if h.people, err = peopleOf(ctx, tx, sub.Audience.People, h.owner); err != nil {
		return err
	}
	h.row, h.sub = sub.Row, sub
	return s.hide(ctx, tx, *h)
}

// unhide ends the life of a hidden row. Others of its owner in the same system
// follow it to the one it went to, if any.
func unhide(ctx context.Context, tx *sql.Tx, id int64, slug string) error {
	if slug != "" {
		if _, err := tx.ExecContext(ctx, `UPDATE hidden_rows SET slug = ? WHERE slug <> ? AND id <> ? AND system_key = (SELECT h.system_key FROM hidden_rows h WHERE h.id = ?)
			AND account_id = (SELECT h.account_id FROM hidden_rows h WHERE h.id = ?)`, slug, slug, id, id, id); err != nil {
			return err
		}
	}
	_, err := tx.ExecContext(ctx, `DELETE FROM hidden_rows WHERE id = ?`, id)
	return err
}

// hiddenRow reads a hidden row back with its state of review; nil without one.
func hiddenRow(ctx context.Context, q querier, id int64) (*hiding, string, error) {
	h := &hiding{id: id, sub: &Submission{}}
	var kind, windows, state string
	dest := []any{&h.owner, &kind, &h.until, &h.standsFor, &h.row.System, &h.row.Source, &h.row.SourceDOI, &h.sub.Centreline, &h.sub.CentrelineSettings, &windows, &state}
	for _, c := range hiddenColumns {
		if c.num != nil {
			dest = append(dest, c.num(&h.row))
		} else {
			dest = append(dest, c.text(&h.row))
		}
	}
	err := q.QueryRowContext(ctx, `SELECT h.account_id, h.hidden, h.until, h.stands_for, coalesce((SELECT y.slug FROM systems y WHERE y.slug = h.slug), ''), h.source, h.source_doi, h.line, h.settings, h.sinuosities, u.state, h.`+
		strings.Join(names(hiddenColumns), ", h.")+` FROM hidden_rows h JOIN submissions u ON u.id = h.id WHERE h.id = ?`, id).Scan(dest...)
	if errors.Is(err, sql.ErrNoRows) {
		return nil, "", nil
	}
	if err != nil {
		return nil, "", err
	}
	h.embargo = kind == "embargo"
	h.row.Normalise()
	h.sub.CentrelineSinuosities, err = decodeWindows(windows)
	return h, state, err
}
