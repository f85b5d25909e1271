package main

import (
	"context"
	"net/http"
	"net/url"
	"strconv"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
)

// comment is a word of the contributor to the curators, at any time.
func (p *contributions) comment(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	s, err := p.own(c)
	if err != nil {
		return err
	}
	if err := p.store.Comment(c.Request().Context(), s.ID, p.user(c).ID, form.Get("comment")); err != nil {
		return err
	}
	p.notice(c, "Your message is kept; the curators see it.")
	return c.Redirect(http.StatusSeeOther, "/contribute/"+strconv.FormatInt(s.ID, 10)+"#said")
}

func (p *contributions) withdraw(c echo.Context) error {
	s, err := p.own(c)
	if err != nil {
		return err
	}
	if err := p.store.Withdraw(c.Request().Context(), s.ID, p.user(c).ID); err != nil {
		return err
	}
	p.notice(c, "Taken back. It is kept in your list.")
	return c.Redirect(http.StatusSeeOther, "/contribute#mine")
}

// asOf is the record as it was after the revision asked for, to be proposed
// again; its system stays as it is.
func (p *contributions) asOf(ctx context.Context, q url.Values, row *catalogue.Row) (*catalogue.Row, error) {
	revision, err := whole(q, "revision", 0, 0, 1<<53)
	if err != nil || revision == 0 {
		return row, err
	}
	was, _, err := p.store.RowAt(ctx, row.Measurement, int64(revision))
	if err != nil {
		return nil, err
	}
	for _, c := range catalogue.Columns {
		if c.Table != catalogue.TableSystems && c.Name != "measurement" {
			if e := c.Set(row, c.Get(was)); e != nil {
				return nil, e
			}
		}
	}
	return row, nil
}

// ofSystem fills the columns of the whole system.
func (p *contributions) ofSystem(ctx context.Context, slug string, row *catalogue.Row) error {
	d, err := p.store.System(ctx, slug)
	if err != nil {
		return err
	}
	best := d.Best()
	for _, c := range catalogue.Columns {
		if c.Table == catalogue.TableSystems && c.Name != "measurement" {
			if e := c.Set(row, c.Get(&best)); e != nil {
				return e
			}
		}
	}
	return nil
}
