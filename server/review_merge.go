package main

import (
	"errors"
	"net/http"
	"net/url"
	"slices"
	"strconv"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

// mergePage asks which two systems are one and shows both, field by field.
func (p *reviews) mergePage(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	if err := allow(q, []string{"from", "into"}); err != nil {
		return err
	}
	v, err := p.mergeView(c, strings.TrimSpace(q.Get("from")), strings.TrimSpace(q.Get("into")))
	if err != nil {
		return err
	}
	return p.showMerge(c, http.StatusOK, v)
}

func (p *reviews) showMerge(c echo.Context, status int, v views.MergePage) error {
	if len(v.Errors) > 0 && status == http.StatusOK {
		status = http.StatusUnprocessableEntity
	}
	return render(c, status, views.Merge(p.page(c, "Merge two systems", "review"), v))
}

// slugTyped takes an address or a short name.
func slugTyped(s string) string {
	if i := strings.LastIndex(s, "/systems/"); i >= 0 {
		s = s[i+len("/systems/"):]
	}
	return strings.TrimSpace(s)
}

func (p *reviews) mergeView(c echo.Context, from, into string) (views.MergePage, error) {
	v := views.MergePage{From: slugTyped(from), Into: slugTyped(into), Errors: map[string]string{}}
	if v.From == "" || v.Into == "" {
		return v, nil
	}
	m, err := p.store.MergeView(c.Request().Context(), v.From, v.Into)
	var e *catalogue.Error
	if errors.As(err, &e) && e.Code == catalogue.Invalid {
		v.Errors[e.Field] = sentence(e.Message, e.Expected)
		return v, nil
	}
	if v.View = m; m != nil {
		v.From, v.Into = m.From.Slug, m.Into.Slug // a name was typed, perhaps
	}
	return v, err
}

// merge makes one system of two.
func (p *reviews) merge(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	v, err := p.mergeView(c, form.Get("from"), form.Get("into"))
	if err != nil {
		return err
	}
	if v.View == nil {
		return p.mergeUnnamed(c, v)
	}
	m := catalogue.SystemMerge{From: v.From, Into: v.Into, Values: map[string]string{"other_names": form.Get("other_names")}, Why: form.Get("why")}
	m.Revision, _ = strconv.ParseInt(form.Get("revision"), 10, 64)
	for _, ch := range v.View.Changes {
		if form.Get("value."+ch.Column) == "from" {
			m.Values[ch.Column] = ch.After
		}
	}
	for _, pair := range v.View.Twins {
		if name := pair[0].Measurement + "+" + pair[1].Measurement; slices.Contains(form["twin"], name) {
			m.Twins = append(m.Twins, [2]string{pair[0].Measurement, pair[1].Measurement})
		}
	}
	_, err = p.store.MergeSystems(c.Request().Context(), p.user(c).ID, m)
	var e *catalogue.Error
	if errors.As(err, &e) && (e.Code == catalogue.Invalid || e.Code == catalogue.Conflict) {
		v.Why, v.OtherNames, v.Chosen, v.TwinsChosen = form.Get("why"), form.Get("other_names"), m.Values, form["twin"]
		field := e.Field
		if e.Code == catalogue.Conflict || field == "" {
			field = "all"
		}
		v.Errors[field] = sentence(e.Message, e.Expected)
		status := http.StatusUnprocessableEntity
		if e.Code == catalogue.Conflict {
			status = http.StatusConflict
		}
		return p.showMerge(c, status, v)
	}
	if err != nil {
		return err
	}
	p.notice(c, v.View.From.Name+" is part of "+v.View.Into.Name+" now. Its old address leads here; the change can be taken back from the activity list.")
	return c.Redirect(http.StatusSeeOther, "/systems/"+url.PathEscape(v.View.Into.Slug))
}

// mergeUnnamed asks for the two systems when they were not both named.
func (p *reviews) mergeUnnamed(c echo.Context, v views.MergePage) error {
	for _, name := range []string{"from", "into"} {
		if map[string]string{"from": v.From, "into": v.Into}[name] == "" {
			v.Errors[name] = "This is needed. Expected: the short name or the address of a system."
		}
	}
	return p.showMerge(c, http.StatusUnprocessableEntity, v)
}

// twinsPage asks which two measurements are one.
func (p *reviews) twinsPage(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	if err := allow(q, []string{"keep", "drop"}); err != nil {
		return err
	}
	v, err := p.twinsView(c, q)
	if err != nil {
		return err
	}
	return p.showTwins(c, http.StatusOK, v)
}

func (p *reviews) showTwins(c echo.Context, status int, v views.TwinsPage) error {
	if len(v.Errors) > 0 && status == http.StatusOK {
		status = http.StatusUnprocessableEntity
	}
	return render(c, status, views.Twins(p.page(c, "Merge two measurements", "review"), v))
}

func (p *reviews) twinsView(c echo.Context, q url.Values) (views.TwinsPage, error) {
	v := views.TwinsPage{Keep: strings.TrimSpace(q.Get("keep")), Drop: strings.TrimSpace(q.Get("drop")), Errors: map[string]string{}}
	if v.Keep == "" || v.Drop == "" {
		return v, nil
	}
	if v.Keep == v.Drop {
		v.Errors["drop"] = "Both are the same measurement."
		return v, nil
	}
	rows := map[string]*catalogue.Row{}
	for name, id := range map[string]string{"keep": v.Keep, "drop": v.Drop} {
		row, revision, err := p.store.Measurement(c.Request().Context(), id)
		if catalogue.CodeOf(err) == catalogue.NotFound && err != nil {
			v.Errors[name] = "There is no such measurement. Expected: a number as m000123."
			continue
		}
		if err != nil {
			return v, err
		}
		rows[name] = row
		v.Revision = max(v.Revision, revision)
	}
	if len(v.Errors) > 0 {
		return v, nil
	}
	v.Kept, v.Dropped = rows["keep"], rows["drop"]
	for _, ch := range catalogue.Diff(v.Kept, v.Dropped) {
		if col, ok := catalogue.ColumnByName(ch.Column); ok && col.Table != catalogue.TableSystems && ch.Column != "measurement" {
			v.Changes = append(v.Changes, ch)
		}
	}
	return v, nil
}

func (p *reviews) mergeTwins(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	v, err := p.twinsView(c, form)
	if err != nil {
		return err
	}
	if v.Kept == nil {
		for name, value := range map[string]string{"keep": v.Keep, "drop": v.Drop} {
			if value == "" {
				v.Errors[name] = "This is needed. Expected: a number as m000123."
			}
		}
		return p.showTwins(c, http.StatusUnprocessableEntity, v)
	}
	seen, _ := strconv.ParseInt(form.Get("revision"), 10, 64)
	for _, ch := range v.Changes {
		if form.Get("value."+ch.Column) == "drop" {
			v.Take = append(v.Take, ch.Column)
		}
	}
	_, err = p.store.MergeMeasurements(c.Request().Context(), p.user(c).ID, v.Keep, v.Drop, v.Take, seen, form.Get("why"))
	var e *catalogue.Error
	if errors.As(err, &e) && (e.Code == catalogue.Invalid || e.Code == catalogue.Conflict) {
		v.Why = form.Get("why")
		field, status := e.Field, http.StatusUnprocessableEntity
		if e.Code == catalogue.Conflict {
			field, status = "all", http.StatusConflict
		}
		v.Errors[field] = sentence(e.Message, e.Expected)
		return p.showTwins(c, status, v)
	}
	if err != nil {
		return err
	}
	p.notice(c, v.Drop+" is withdrawn; "+v.Keep+" stands for it.")
	return c.Redirect(http.StatusSeeOther, "/systems/"+url.PathEscape(v.Kept.System))
}
