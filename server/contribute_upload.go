package main

import (
	"errors"
	"fmt"
	"net/http"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

func (p *contributions) uploadPage(c echo.Context) error {
	return render(c, http.StatusOK, views.UploadPage(p.page(c, "Send a CSV file", "contribute"), views.Upload{}))
}

// upload takes a measurement table; its rows wait for a curator as one batch.
func (p *contributions) upload(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	v := views.Upload{Why: form.Get("why"), Partial: form.Get("partial") == "yes"}
	head, err := c.FormFile("file")
	if err != nil || head.Size == 0 {
		if over := (*http.MaxBytesError)(nil); errors.As(err, &over) {
			return err
		}
		v.Errors = map[string]string{"file": "No file was sent, or it is empty. Expected: a CSV file with a header row."}
		return render(c, http.StatusUnprocessableEntity, views.UploadPage(p.page(c, "Send a CSV file", "contribute"), v))
	}
	f, err := head.Open()
	if err != nil {
		return err
	}
	defer f.Close()
	report, err := p.store.Import(c.Request().Context(), f, catalogue.ImportOptions{By: p.user(c).ID, Partial: v.Partial, Why: strings.TrimSpace(v.Why)})
	if err != nil {
		return err
	}
	v.File = head.Filename
	v.Report = uploadReport(report)
	status := http.StatusOK
	if !report.Stored {
		status = http.StatusUnprocessableEntity
	}
	return render(c, status, views.UploadPage(p.page(c, "Send a CSV file", "contribute"), v))
}

// mostRemarks is how many lines of each sort the report page shows.
const mostRemarks = 500

func uploadReport(r *catalogue.ImportReport) *views.UploadReport {
	v := &views.UploadReport{
		Stored: r.Stored, New: r.New, Changed: r.Changed, Identical: r.Identical,
		Refused: countLines(r.Problems), Unknown: r.UnknownColumns,
	}
	for _, list := range []struct {
		from []catalogue.RowProblem
		into *[]catalogue.RowProblem
		name string
	}{{r.Problems, &v.Problems, "refusals"}, {r.Warnings, &v.Warnings, "warnings"}, {r.Conversions, &v.Conversions, "conversions"}} {
		*list.into = list.from
		if n := len(list.from) - mostRemarks; n > 0 {
			*list.into = list.from[:mostRemarks]
			v.More = append(v.More, fmt.Sprintf("%d more %s are not shown", n, list.name))
		}
	}
	return v
}
