package main

import (
	"encoding/csv"
	"errors"
	"fmt"
	"mime"
	"net/http"
	"net/url"
	"slices"
	"strconv"
	"strings"
	"time"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

func (p *contributions) routesUpload(e *echo.Echo) {
	p.sent = newThrottle(60, time.Hour)
	get(e, "/contribute/upload", p.uploadPage)
	e.POST("/contribute/upload", p.upload)
	get(e, "/contribute/upload/:id", p.uploadState)
	e.POST("/contribute/upload/:id", p.uploadAct)
	get(e, "/contribute/upload/:id/progress.json", p.uploadProgress)
	get(e, "/contribute/upload/:id/remarks.csv", p.uploadRemarks)
}

func (p *contributions) uploadPage(c echo.Context) error {
	return p.showUploadForm(c, http.StatusOK, views.Upload{})
}

func (p *contributions) showUploadForm(c echo.Context, status int, v views.Upload) error {
	var err error
	if v.Mine, err = p.store.Uploads(c.Request().Context(), p.user(c).ID, 20); err != nil {
		return err
	}
	return render(c, status, views.UploadPage(p.page(c, "Send a CSV file", "contribute"), v))
}

// upload stores a file; its page asks how to read it.
func (p *contributions) upload(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	u := p.user(c)
	v := views.Upload{Why: form.Get("why")}
	key := strconv.FormatInt(u.ID, 10)
	if wait := p.sent.wait(key); wait > 0 {
		c.Response().Header().Set("Retry-After", strconv.Itoa(int(wait.Seconds())+1))
		v.Errors = map[string]string{"file": "You sent many files within the hour. Wait " + strconv.Itoa(int(wait.Minutes())+1) + " minutes, or put them into one."}
		return p.showUploadForm(c, http.StatusTooManyRequests, v)
	}
	head, err := c.FormFile("file")
	if err != nil || head.Size == 0 {
		if over := (*http.MaxBytesError)(nil); errors.As(err, &over) {
			return err
		}
		v.Errors = map[string]string{"file": "No file was sent, or it is empty. Expected: a CSV file with a header row."}
		return p.showUploadForm(c, http.StatusUnprocessableEntity, v)
	}
	f, err := head.Open()
	if err != nil {
		return err
	}
	defer f.Close()
	p.sent.fail(key)
	id, err := p.store.NewUpload(c.Request().Context(), u.ID, head.Filename, v.Why, f)
	if v.Errors = fieldErrors(err); v.Errors != nil {
		return p.showUploadForm(c, http.StatusUnprocessableEntity, v)
	}
	if err != nil {
		return err
	}
	return c.Redirect(http.StatusSeeOther, uploadAddress(id))
}

func uploadAddress(id int64) string { return "/contribute/upload/" + strconv.FormatInt(id, 10) }

// ownUpload finds the file of the address.
func (p *contributions) ownUpload(c echo.Context) (*catalogue.Upload, error) {
	id, err := idOf(c)
	if err != nil {
		return nil, err
	}
	return p.store.Upload(c.Request().Context(), id, p.user(c).ID)
}

func (p *contributions) uploadState(c echo.Context) error {
	u, err := p.ownUpload(c)
	if err != nil {
		return err
	}
	return p.showUpload(c, http.StatusOK, u, nil, nil)
}

// showUpload shows a file as it stands. typed is the matching as typed, when it
// was refused.
func (p *contributions) showUpload(c echo.Context, status int, u *catalogue.Upload, typed url.Values, errs map[string]string) error {
	page := p.page(c, u.Name, "contribute")
	switch u.State {
	case "checking":
		page.Refresh = 2
		return render(c, status, views.UploadRunning(page, *u, uploadFraction(u)))
	case "checked", "sent":
		v := views.UploadResult{Upload: *u, Refusal: errs[""]}
		for kind, into := range map[string]*[]catalogue.RowProblem{"problem": &v.Problems, "warning": &v.Warnings, "conversion": &v.Conversions} {
			err := p.store.Remarks(c.Request().Context(), u.ID, kind, shownRemarks, func(r catalogue.RowProblem) error {
				*into = append(*into, r)
				return nil
			})
			if err != nil {
				return err
			}
		}
		if u.State == "checked" && u.Report.Problems > 0 && u.Report.Good() == 0 {
			status = max(status, http.StatusUnprocessableEntity)
		}
		return render(c, status, views.UploadResultPage(page, v))
	}
	if typed == nil {
		typed = typedReading(u)
	}
	return render(c, status, views.UploadMatchPage(page, matchOf(u, typed, errs)))
}

// shownRemarks is how many remarks of each sort the page shows; the file of
// them has all.
const shownRemarks = 200

// typedReading is how a file is read as its form would have it typed: as it was
// said, else as it is guessed; what a person has to say stays open.
func typedReading(u *catalogue.Upload) url.Values {
	said := u.Reading.Columns != nil
	r := u.Reading
	if !said {
		r.Encoding, r.Separator, r.Numbers = u.Look.Encoding, u.Look.Separator, u.Look.Numbers
		for _, g := range catalogue.GuessColumns(u.Look.Header) {
			r.Columns = append(r.Columns, g.Name)
		}
	}
	v := url.Values{"encoding": {r.Encoding}, "separator": {r.Separator}, "numbers": {r.Numbers}, "licence": {r.Licence}, "why": {u.Why}}
	for i, name := range r.Columns {
		v.Set(views.ColumnField(i), name)
	}
	return v
}

func matchOf(u *catalogue.Upload, typed url.Values, errs map[string]string) views.UploadMatch {
	v := views.UploadMatch{Upload: *u, Typed: typed, Errors: errs, Choices: catalogue.Readable(), Licences: licences}
	guesses := catalogue.GuessColumns(u.Look.Header)
	taken := map[string]bool{}
	for i, header := range u.Look.Header {
		col := views.MatchColumn{Field: views.ColumnField(i), Header: header, Chosen: typed.Get(views.ColumnField(i)), Sure: guesses[i].Sure, Guessed: guesses[i].Name}
		for _, row := range u.Look.Sample {
			if i < len(row) {
				col.Sample = append(col.Sample, row[i])
			}
		}
		taken[catalogue.ColumnOf(col.Chosen)] = true
		v.Columns = append(v.Columns, col)
	}
	for _, c := range catalogue.Columns {
		if c.Required && !taken[c.Name] {
			v.Missing = append(v.Missing, c.Name)
		}
	}
	if taken["measurement"] {
		v.Missing = nil // it corrects what is stored
	}
	return v
}

// readingTyped reads the form of the matching; what is wrong comes back by
// field.
func readingTyped(form url.Values, u *catalogue.Upload) (catalogue.Reading, map[string]string) {
	r := catalogue.Reading{Encoding: form.Get("encoding"), Separator: form.Get("separator"), Numbers: form.Get("numbers"), Licence: form.Get("licence")}
	wrong := map[string]string{}
	if !slices.Contains(catalogue.Encodings, r.Encoding) {
		wrong["encoding"] = "Choose one: some of its characters are not UTF-8. Look at the names in the sample."
	}
	if !slices.Contains(catalogue.Separators, r.Separator) {
		wrong["separator"] = "Choose one."
	}
	if !slices.Contains(catalogue.NumberStyles, r.Numbers) {
		wrong["numbers"] = "Choose one: some numbers can be read in two ways."
	}
	if !slices.Contains(licences, r.Licence) {
		wrong["licence"] = "Choose one: you agree that the rows are published under it."
	}
	used := map[string]int{}
	r.Columns = make([]string, len(u.Look.Header))
	for i := range u.Look.Header {
		name := form.Get(views.ColumnField(i))
		if r.Columns[i] = name; name == "" {
			continue
		}
		if catalogue.ColumnOf(name) == "" {
			wrong[views.ColumnField(i)] = "There is no column " + strconv.Quote(clip(name)) + "."
		}
		if first, twice := used[name]; twice {
			wrong[views.ColumnField(i)] = "Column " + strconv.Itoa(first+1) + " of the file is read as " + name + " already; one of the two is to be left out."
		}
		used[name] = i
	}
	return r, wrong
}

// uploadAct does what the button pressed says.
func (p *contributions) uploadAct(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	u, err := p.ownUpload(c)
	if err != nil {
		return err
	}
	action, err := oneOf(form, "action", "", []string{"check", "look", "cancel", "rematch", "send", "send_good", "drop"})
	if err != nil {
		return err
	}
	ctx, by := c.Request().Context(), p.user(c).ID
	switch action {
	case "check", "look":
		return p.match(c, u, form, action == "check")
	case "cancel":
		p.uploads.end(u.ID)
		err = p.store.StopCheck(ctx, u.ID, by)
	case "rematch":
		err = p.store.SetReading(ctx, u.ID, by, u.Reading, u.Why)
	case "drop":
		p.uploads.end(u.ID)
		if err = p.store.DropUpload(ctx, u.ID, by); err == nil {
			p.notice(c, u.Name+" is dropped; nothing of it is kept.")
			return c.Redirect(http.StatusSeeOther, "/contribute/upload")
		}
	case "send", "send_good":
		if _, err = p.store.SendUpload(ctx, u.ID, by, action == "send_good"); err == nil {
			p.notice(c, "Sent. A curator reads the rows before they join the catalogue.")
		}
	default:
		return &badInput{"action", "nothing was asked for. Expected check, cancel, rematch, send, send_good or drop"}
	}
	if code := catalogue.CodeOf(err); code == catalogue.Conflict || code == catalogue.Forbidden {
		var e *catalogue.Error
		errors.As(err, &e)
		status := map[bool]int{true: http.StatusConflict, false: http.StatusForbidden}[code == catalogue.Conflict]
		return p.showUpload(c, status, u, nil, map[string]string{"": sentence(e.Message, e.Expected)})
	}
	if err != nil {
		return err
	}
	return c.Redirect(http.StatusSeeOther, uploadAddress(u.ID))
}

// match takes the matching and starts the check; or looks at the file again,
// read as chosen.
func (p *contributions) match(c echo.Context, u *catalogue.Upload, form url.Values, start bool) error {
	ctx, by := c.Request().Context(), p.user(c).ID
	r, wrong := readingTyped(form, u)
	if !start {
		// Only what can be read in some way is looked at again.
		looked := catalogue.Reading{Encoding: form.Get("encoding"), Separator: form.Get("separator")}
		if err := p.store.SetReading(ctx, u.ID, by, looked, form.Get("why")); err != nil {
			return err
		}
		again, err := p.store.Upload(ctx, u.ID, by)
		if err != nil {
			return err
		}
		typed := typedReading(again)
		keepTyped(typed, form, u.Look.Header, again.Look.Header)
		return p.showUpload(c, http.StatusOK, again, typed, nil)
	}
	if len(wrong) > 0 {
		return p.showUpload(c, http.StatusUnprocessableEntity, u, form, wrong)
	}
	err := p.store.SetReading(ctx, u.ID, by, r, form.Get("why"))
	if errs := fieldErrors(err); errs != nil {
		return p.showUpload(c, http.StatusUnprocessableEntity, u, form, errs)
	}
	if err != nil {
		return err
	}
	if err := p.store.StartCheck(ctx, u.ID, by); err != nil {
		return err
	}
	p.uploads.run(u.ID)
	p.awaitShort(c, u.ID, by)
	return c.Redirect(http.StatusSeeOther, uploadAddress(u.ID))
}

// keepTyped puts into a matching what was typed before the file was looked at
// again. Columns keep theirs as long as there are as many: other signs between
// cells may cut the file into others, which are guessed anew.
func keepTyped(typed, form url.Values, before, now []string) {
	for _, name := range []string{"encoding", "separator", "numbers", "licence"} {
		if form.Get(name) != "" {
			typed.Set(name, form.Get(name))
		}
	}
	if len(before) != len(now) {
		return
	}
	for i := range now {
		typed.Set(views.ColumnField(i), form.Get(views.ColumnField(i)))
	}
}

// awaitShort waits as long as nobody looks at nothing: a small file is checked
// before its page is asked for.
func (p *contributions) awaitShort(c echo.Context, id, by int64) {
	end := time.After(patience)
	for {
		select {
		case <-end:
			return
		case <-c.Request().Context().Done():
			return
		case <-time.After(15 * time.Millisecond):
		}
		if u, err := p.store.Upload(c.Request().Context(), id, by); err != nil || u.State != "checking" {
			return
		}
	}
}

func uploadFraction(u *catalogue.Upload) float64 {
	if u.Bytes == 0 {
		return 0
	}
	return min(1, float64(u.BytesRead)/float64(u.Bytes))
}

// uploadProgress is how far a check has come, for the page that follows it.
func (p *contributions) uploadProgress(c echo.Context) error {
	u, err := p.ownUpload(c)
	if err != nil {
		return err
	}
	return c.JSON(http.StatusOK, struct {
		State    string  `json:"state"`
		Rows     int     `json:"rows"`
		All      int     `json:"all"`
		Fraction float64 `json:"fraction"`
	}{u.State, u.RowsRead, u.Look.Rows, uploadFraction(u)})
}

// uploadRemarks is every remark on a file as CSV; kind names one sort.
func (p *contributions) uploadRemarks(c echo.Context) error {
	u, err := p.ownUpload(c)
	if err != nil {
		return err
	}
	q, err := params(c)
	if err != nil {
		return err
	}
	if err := allow(q, []string{"kind"}); err != nil {
		return err
	}
	kinds := []string{"problem", "warning", "conversion"}
	kind, err := oneOf(q, "kind", "", kinds)
	if err != nil {
		return err
	}
	if kind != "" {
		kinds = []string{kind}
	}
	h := c.Response().Header()
	h.Set(echo.HeaderContentType, "text/csv; charset=utf-8; header=present")
	name := strings.TrimSuffix(u.Name, ".csv") + "-remarks.csv"
	h.Set(echo.HeaderContentDisposition, mime.FormatMediaType("attachment", map[string]string{"filename": name}))
	w := csv.NewWriter(c.Response())
	if err := w.Write([]string{"kind", "line", "column", "value", "message", "expected"}); err != nil {
		return err
	}
	words := map[string]string{"problem": "refused", "warning": "odd", "conversion": "converted"}
	for _, k := range kinds {
		err := p.store.Remarks(c.Request().Context(), u.ID, k, 1_000_000, func(r catalogue.RowProblem) error {
			return w.Write([]string{words[k], fmt.Sprint(r.Line), catalogue.Neutralise(r.Column), catalogue.Neutralise(r.Value), catalogue.Neutralise(r.Message), catalogue.Neutralise(r.Expected)})
		})
		if err != nil {
			return err
		}
	}
	w.Flush()
	return w.Error()
}
