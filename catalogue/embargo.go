package catalogue

import (
	"context"
	"database/sql"
	"errors"
	"time"
)

// embargo accepts a row that others are not to see yet. With a coarse audience
// they see it with its place rounded: a measurement of its own, accepted now,
// that the exact row replaces in the end.
func (s *Store) embargo(ctx context.Context, a *applier, sub *Submission, row Row, aud Audience) error {
	if sub.By.ID == 0 || row.Measurement != "" {
		return &Error{Code: Conflict, Field: "audience", Message: "only a new record with an owner can be under embargo; this one is neither hidden nor accepted"}
	}
	check := row
	if ex, err := a.locate(ctx, &check); err != nil {
		return err
	} else if err := hardError(append(ex.findings, CheckRow(&check, nil)...)); err != nil {
		return err
	}
	people, err := peopleOf(ctx, a.tx, aud.People, sub.By.ID)
	if err != nil {
		return err
	}
	h := hiding{id: sub.ID, owner: sub.By.ID, embargo: true, until: aud.Until, people: people, row: row, sub: sub}
	if aud.Coarse {
		// Neither reasons nor comments go into the history: they may say where
		// it is.
		a.why = "place rounded, under embargo"
		others := coarsened(check)
		others.System = row.System
		if _, err := a.apply(ctx, &others); err != nil {
			return err
		}
		h.standsFor, h.row.System = others.Measurement, others.System
	}
	s.due.Store(0)
	return s.hide(ctx, a.tx, h)
}

// liftEvery is how often the file is asked for embargoes that another program
// may have put into it, s.
const liftEvery = 60

// Lift makes the rows whose embargo has ended part of the catalogue, each as a
// change set of its own, and returns how many. It costs nothing as long as none
// ends. A row that cannot join goes back to its owner as a private one, with
// the reason. A catalogue that is open read only stays as it was copied.
func (s *Store) Lift(ctx context.Context) (n int, err error) {
	now := s.now().UTC().Unix()
	if s.w == nil || now < s.due.Load() {
		return 0, nil
	}
	ended, next, err := s.endingEmbargoes(ctx)
	if err != nil {
		return 0, fault("embargoes", err)
	}
	for _, id := range ended {
		err := s.write(ctx, func(tx *sql.Tx) error { return s.liftOne(ctx, tx, id, 0, "the embargo ended") })
		var own *Error
		switch {
		case err == nil:
			n++
		case errors.As(err, &own) && (own.Code == Invalid || own.Code == Conflict || own.Code == NotFound):
			if err := s.write(ctx, func(tx *sql.Tx) error { return s.giveBack(ctx, tx, id, own) }); err != nil {
				return n, err
			}
		default:
			return n, err
		}
	}
	s.due.Store(min(next, now+liftEvery))
	return n, nil
}

// endingEmbargoes lists the rows whose day has come and the second at which the
// next one comes.
func (s *Store) endingEmbargoes(ctx context.Context) (ended []int64, next int64, err error) {
	next = s.now().UTC().Unix() + liftEvery
	rows, err := s.r.QueryContext(ctx, `SELECT id, until FROM hidden_rows WHERE hidden = 'embargo' AND until <> '' ORDER BY until, id`)
	if err != nil {
		return nil, 0, err
	}
	defer rows.Close()
	today := s.today()
	for rows.Next() {
		var id int64
		var until string
		if err := rows.Scan(&id, &until); err != nil {
			return nil, 0, err
		}
		if until > today {
			if day, err := time.Parse(time.DateOnly, until); err == nil {
				next = min(next, day.Unix())
			}
			break
		}
		ended = append(ended, id)
	}
	return ended, next, rows.Err()
}

// liftOne makes an accepted row under embargo part of the catalogue. Where
// another row stands for it that a curator changed since, the curator's word
// holds in all but the place.
func (s *Store) liftOne(ctx context.Context, tx *sql.Tx, id, by int64, why string) error {
	h, _, err := hiddenRow(ctx, tx, id)
	if err != nil || h == nil || !h.embargo {
		return err // lifted by another request in the meantime
	}
	if by == 0 {
		by = h.owner
	}
	a := s.applier(tx, by, why)
	a.from, a.owner = id, h.owner
	row := h.row
	if h.standsFor != "" {
		current, _, err := rowOf(ctx, tx, h.standsFor)
		if err != nil {
			return err
		}
		if current == nil {
			return &Error{Code: NotFound, Field: "measurement", Message: "the record that showed it with its place rounded, " + h.standsFor + ", is no longer there"}
		}
		stood := coarsened(row)
		for i := range Columns {
			if c := &Columns[i]; !coarseColumns[c.Name] && !c.same(&stood, current) {
				c.copy(&row, current)
			}
		}
		row.Measurement, row.System = current.Measurement, current.System
	}
	if _, err := a.apply(ctx, &row); err != nil {
		return err
	}
	if h.sub.Centreline != "" {
		if _, err := a.addLine(ctx, Centreline{System: row.System, Measurement: row.Measurement, Line: h.sub.Centreline, Settings: h.sub.CentrelineSettings, Sinuosities: h.sub.CentrelineSinuosities}); err != nil {
			return err
		}
	}
	if err := unhide(ctx, tx, id, row.System); err != nil {
		return err
	}
	return keepAudience(ctx, tx, id, Audience{})
}

// giveBack turns a row whose embargo ended, but which cannot join the
// catalogue, into a private row returned to its owner.
func (s *Store) giveBack(ctx context.Context, tx *sql.Tx, id int64, why *Error) error {
	text := "The embargo ended, but the row could not join the catalogue: " + why.Message
	if err := s.decide(ctx, tx, id, "returned", text, 0, "accepted"); err != nil {
		return err
	}
	if _, err := tx.ExecContext(ctx, `UPDATE hidden_rows SET hidden = 'private', until = '', stands_for = '' WHERE id = ?`, id); err != nil {
		return err
	}
	_, err := tx.ExecContext(ctx, `UPDATE audiences SET kind = 'private', until = '', coarse = 0 WHERE submission_id = ?`, id)
	return err
}

// Publish ends an embargo at once; its owner may, and a curator.
func (s *Store) Publish(ctx context.Context, id, by int64) error {
	return s.write(ctx, func(tx *sql.Tx) error {
		if _, err := underEmbargo(ctx, tx, id, by, true); err != nil {
			return err
		}
		return s.liftOne(ctx, tx, id, by, "published before the day of the embargo or without one")
	})
}

// SetEmbargo changes the day on which an embargo ends, "" = when it is said to
// be published, and who sees the row meanwhile; only its owner may.
func (s *Store) SetEmbargo(ctx context.Context, id, by int64, until, people string) error {
	return s.write(ctx, func(tx *sql.Tx) error {
		h, err := underEmbargo(ctx, tx, id, by, false)
		if err != nil {
			return err
		}
		aud, err := audienceOf(ctx, tx, id)
		if err != nil {
			return err
		}
		aud.Kind, aud.Until, aud.People = AudienceLater, until, people
		if err := aud.check(s.today(), false); err != nil {
			return err
		}
		named, err := peopleOf(ctx, tx, aud.People, h.owner)
		if err != nil {
			return err
		}
		if err := keepAudience(ctx, tx, id, aud); err != nil {
			return err
		}
		if _, err := tx.ExecContext(ctx, `UPDATE hidden_rows SET until = ? WHERE id = ?`, aud.Until, id); err != nil {
			return err
		}
		s.due.Store(0)
		return namePeople(ctx, tx, id, named)
	})
}

// TakeBack makes a row under embargo private again, a draft of its owner. One
// that others see with its place rounded stays: they may have used it.
func (s *Store) TakeBack(ctx context.Context, id, by int64) error {
	return s.write(ctx, func(tx *sql.Tx) error {
		h, err := underEmbargo(ctx, tx, id, by, false)
		if err != nil {
			return err
		}
		if h.standsFor != "" {
			return &Error{Code: Conflict, Message: "others see this row as " + h.standsFor + " with its place rounded, so it cannot become private again", Expected: "a proposal to withdraw that record"}
		}
		if err := s.decide(ctx, tx, id, "draft", "", by, "accepted"); err != nil {
			return err
		}
		if _, err := tx.ExecContext(ctx, `UPDATE hidden_rows SET hidden = 'private', until = '' WHERE id = ?`, id); err != nil {
			return err
		}
		_, err = tx.ExecContext(ctx, `UPDATE audiences SET kind = 'private', until = '', coarse = 0 WHERE submission_id = ?`, id)
		return err
	})
}

// underEmbargo finds a row under embargo and refuses who may not decide on it.
func underEmbargo(ctx context.Context, tx *sql.Tx, id, by int64, curators bool) (*hiding, error) {
	owner, err := ownerOf(ctx, tx, id)
	if err != nil {
		return nil, err
	}
	if owner != by {
		if !curators {
			return nil, &Error{Code: NotFound, Message: "there is no such contribution of yours"}
		}
		if err := mayCurate(ctx, tx, by); err != nil {
			return nil, err
		}
	}
	h, _, err := hiddenRow(ctx, tx, id)
	if err != nil {
		return nil, err
	}
	if h == nil || !h.embargo {
		return nil, &Error{Code: Conflict, Message: "this contribution is not under embargo, or no longer"}
	}
	return h, nil
}
