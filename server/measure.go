package main

import (
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"net/http"
	"net/url"
	"slices"
	"strconv"
	"strings"
	"unicode/utf8"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue/planform"
	"fathombend/views"
)

// measureParameters are the settings of a measurement, in the order in which
// they are explained.
var measureParameters = []string{"spacing_m", "smooth", "window_widths", "window_bends", "window_m", "width_m",
	"min_bend_widths", "k", "epsg", "z", "direction", "along", "lines"}

const (
	// maxMeasureBody is a file of the largest size with what a form adds to it.
	maxMeasureBody = planform.MaxBytes + 2<<20
	// maxKeptText is how much of a text file the page carries along, so that a
	// setting can be changed without choosing the file again, bytes.
	maxKeptText = 1 << 20
	// measuringAtOnce bounds the memory that strangers can make the program
	// use: a file of the largest size takes up to 400 MB while it is measured.
	measuringAtOnce = 2
)

// measures answers /measure and its twins. Nothing of what is sent is stored.
type measures struct {
	*App
	slots chan struct{}
}

func (a *App) routesMeasure(e *echo.Echo) {
	m := &measures{a, make(chan struct{}, measuringAtOnce)}
	get(e, "/measure", m.form)
	e.POST("/measure", m.page)
	e.POST("/measure.json", m.json)
	e.POST("/measure.csv", m.csv)
}

// measureSettings reads the settings of a measurement; what is wrong comes back
// by parameter.
func measureSettings(q url.Values) (planform.Settings, map[string]string) {
	s := planform.Settings{EPSG: strings.TrimSpace(q.Get("epsg")), Z: q.Get("z"), Direction: q.Get("direction"), Along: q.Get("along"), Lines: q.Get("lines")}
	wrong := map[string]string{}
	note := func(err error) {
		var in interface{ Input() (string, string) }
		if errors.As(err, &in) {
			name, message := in.Input()
			if wrong[name] == "" {
				wrong[name] = message
			}
		}
	}
	for name, to := range map[string]*float64{"spacing_m": &s.SpacingM, "window_widths": &s.WindowWidths, "window_bends": &s.WindowBends,
		"window_m": &s.WindowM, "width_m": &s.WidthM, "min_bend_widths": &s.MinBendWidths} {
		v, err := number(q, name, 0, 0, 1e9)
		note(err)
		*to = v
	}
	for name, to := range map[string]*int{"smooth": &s.Smooth, "k": &s.K} {
		v, err := whole(q, name, 0, 0, 1_000_000)
		note(err)
		*to = v
	}
	note(s.Check())
	return s, wrong
}

// firstWrong is the first refusal in the order of the parameters, as an error.
func firstWrong(wrong map[string]string) error {
	for _, name := range measureParameters {
		if wrong[name] != "" {
			return &badInput{name, wrong[name]}
		}
	}
	return nil
}

// sent is what a request asks to be measured.
type sent struct {
	data     []byte
	name     string // of the file
	kind     string // content type
	settings url.Values
	text     string // as typed, for the page
}

// read takes the file or the pasted text of a form, or a bare body with its
// settings in the query. A body that a client calls a form although it is the
// file itself (the default of common clients) is taken as the file.
func (m *measures) read(c echo.Context) (*sent, error) {
	r := c.Request()
	q, err := url.ParseQuery(r.URL.RawQuery)
	if err != nil {
		return nil, &badInput{"query", "the address holds a broken escape (%). Expected %25 for a plain %"}
	}
	kind, _, _ := strings.Cut(r.Header.Get("Content-Type"), ";")
	switch strings.ToLower(strings.TrimSpace(kind)) {
	case "multipart/form-data":
		return m.readForm(c, q)
	case "application/x-www-form-urlencoded":
		body, err := io.ReadAll(r.Body)
		if err != nil {
			return nil, err
		}
		if form, err := url.ParseQuery(string(body)); err == nil && isMeasureForm(form) {
			return sentOf(form, q), nil
		}
		return &sent{data: body, settings: q}, nil
	}
	var body []byte
	if n := r.ContentLength; n > 0 && n <= maxMeasureBody {
		body = make([]byte, n) // in one piece: a file may be large
		_, err = io.ReadFull(r.Body, body)
	} else {
		body, err = io.ReadAll(r.Body)
	}
	if err != nil {
		return nil, err
	}
	return &sent{data: body, kind: kind, settings: q}, nil
}

func isMeasureForm(form url.Values) bool {
	for name := range form {
		if name != "line" && name != "show" && !slices.Contains(measureParameters, name) {
			return false
		}
	}
	return form.Has("line")
}

// sentOf reads a form without a file; what it does not set, the query may.
func sentOf(form, q url.Values) *sent {
	for name, v := range q {
		if !form.Has(name) {
			form[name] = v
		}
	}
	s := &sent{text: form.Get("line"), settings: form}
	s.data = []byte(s.text)
	form.Del("line")
	return s
}

func (m *measures) readForm(c echo.Context, q url.Values) (*sent, error) {
	form, err := formOf(c)
	if err != nil {
		return nil, err
	}
	// A browser without scripts sends a file that nobody chose, which is read
	// as an empty field.
	if strings.Join(form["file"], "") == "" {
		form.Del("file")
	}
	s := sentOf(form, q)
	head, err := c.FormFile("file")
	if err != nil || head.Size == 0 {
		var over *http.MaxBytesError
		if errors.As(err, &over) {
			return nil, err
		}
		return s, nil
	}
	f, err := head.Open()
	if err != nil {
		return nil, err
	}
	defer f.Close()
	s.data = make([]byte, head.Size)
	if _, err := io.ReadFull(f, s.data); err != nil {
		return nil, err
	}
	s.name, s.kind, s.text = head.Filename, head.Header.Get("Content-Type"), ""
	if len(s.data) <= maxKeptText && utf8.Valid(s.data) {
		s.text = string(s.data)
	}
	return s, nil
}

// measure runs the measurement when there is a free slot.
func (m *measures) measure(c echo.Context, s *sent, settings planform.Settings) (*planform.Report, error) {
	select {
	case m.slots <- struct{}{}:
		defer func() { <-m.slots }()
	case <-c.Request().Context().Done():
		return nil, c.Request().Context().Err()
	}
	return planform.MeasureFile(s.data, s.kind, s.name, settings)
}

func (m *measures) form(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	if err := allow(q, measureParameters); err != nil {
		return err
	}
	_, wrong := measureSettings(q)
	return m.render(c, views.MeasurePage{Values: q, Errors: wrong})
}

func (m *measures) render(c echo.Context, v views.MeasurePage) error {
	status := http.StatusOK
	if c.Request().Method == http.MethodPost {
		c.Response().Header().Set("Cache-Control", "no-store")
	}
	if len(v.Errors) > 0 && (v.Report == nil || len(v.Report.Lines) == 0) {
		status = http.StatusUnprocessableEntity
		if c.Request().Method == http.MethodGet {
			status = http.StatusBadRequest
		}
	}
	v.Page = m.App.page(c, "Measure a channel", "measure")
	return render(c, status, views.Measure(v))
}

// page measures what was sent and shows it, above the form with everything
// that was typed.
func (m *measures) page(c echo.Context) error {
	s, err := m.read(c)
	if err != nil {
		return err
	}
	show, err := whole(s.settings, "show", 1, 1, planform.MaxVertices)
	if err != nil {
		return err
	}
	s.settings.Del("show")
	if err := allow(s.settings, measureParameters); err != nil {
		return err
	}
	v := views.MeasurePage{Values: s.settings, Text: s.text, File: s.name}
	settings, wrong := measureSettings(s.settings)
	if v.Errors = wrong; len(wrong) > 0 {
		return m.render(c, v)
	}
	if strings.TrimSpace(string(s.data[:min(len(s.data), 64)])) == "" && s.name == "" && len(s.data) < 64 {
		v.Errors["line"] = "No line was sent. Choose a file, or paste the line into the box."
		return m.render(c, v)
	}
	report, err := m.measure(c, s, settings)
	if err != nil {
		if !noteRefusal(v.Errors, err) {
			return err
		}
		return m.render(c, v)
	}
	v.Report, v.Show = report, min(show, len(report.Lines))-1
	if len(report.Lines) == 0 {
		v.Errors["line"] = "No line could be measured; the reasons stand below."
		return m.render(c, v)
	}
	v.Save(contribution(&report.Lines[v.Show]))
	return m.render(c, v)
}

// noteRefusal puts a refusal beside its field; false when it is none.
func noteRefusal(errs map[string]string, err error) bool {
	var in *planform.InputError
	if !errors.As(err, &in) {
		return false
	}
	name := in.Parameter
	if !slices.Contains(measureParameters, name) {
		name = "line"
	}
	errs[name] = sentence(in.Message, "")
	return true
}

// contribution is what the form for a contribution needs of a measured line:
// the line itself and the settings that reproduce its numbers. A line without a
// place, or one too long for a form, cannot be contributed from here.
func contribution(m *planform.Measured) (line, settings string) {
	if m.Place == nil || m.Given == nil || len(m.Given.Vertices) > 20_000 {
		return "", ""
	}
	b, err := json.Marshal(finite(storedSettings(m)))
	if err != nil {
		return "", ""
	}
	return lineString(*m.Given), string(b)
}

// storedSettings are the settings with which the line, stored as GeoJSON in
// degrees with elevations, gives the same numbers again: the settings that said
// how to read the file have done their work.
func storedSettings(m *planform.Measured) planform.Settings {
	s := m.Settings
	s.EPSG, s.Lines, s.Z = "", "", "elevation"
	return s
}

// measureProblem is the problem document of a file in which nothing could be
// measured.
type measureProblem struct {
	problem
	Refused []planform.Refused `json:"refused"`
}

// answer measures for the data twins. A nil report means that the answer, a
// problem document, has been written. Parameters of the answer itself, not of
// the measurement, go to own.
func (m *measures) answer(c echo.Context, own url.Values, names ...string) (*planform.Report, error) {
	s, err := m.read(c)
	if err != nil {
		return nil, err
	}
	s.settings.Del("show")
	for _, name := range names {
		if v, ok := s.settings[name]; ok {
			own[name] = v
			s.settings.Del(name)
		}
	}
	if err := allow(s.settings, measureParameters, names); err != nil {
		return nil, err
	}
	settings, wrong := measureSettings(s.settings)
	if err := firstWrong(wrong); err != nil {
		return nil, err
	}
	report, err := m.measure(c, s, settings)
	var in *planform.InputError
	if err != nil && !errors.As(err, &in) {
		return nil, err
	}
	if err == nil && len(report.Lines) > 0 {
		return report, nil
	}
	p := measureProblem{problem{Type: "about:blank", Title: "Nothing could be measured", Status: http.StatusUnprocessableEntity,
		Detail: "No line of the file could be measured; refused gives the reason for each."}, []planform.Refused{}}
	if in != nil {
		p.Field, p.Detail = in.Parameter, sentence(in.Message, "")
	} else {
		p.Refused = report.Refused
	}
	b, err := json.Marshal(p)
	if err != nil {
		return nil, err
	}
	return nil, c.Blob(p.Status, "application/problem+json", b)
}

func (m *measures) json(c echo.Context) error {
	report, err := m.answer(c, nil)
	if report == nil {
		return err
	}
	return writeJSON(c, http.StatusOK, report)
}

// csv gives one row a line in the columns of the measurement table, ready to be
// completed and imported.
func (m *measures) csv(c echo.Context) error {
	own := url.Values{}
	report, err := m.answer(c, own, rowParameters...)
	if report == nil {
		return err
	}
	var b strings.Builder
	as, err := measuredAsOf(own)
	if err != nil {
		return err
	}
	if err := writeMeasuredRows(&b, report, as); err != nil {
		return err
	}
	c.Response().Header().Set(echo.HeaderContentDisposition, `attachment; filename="measured.csv"`)
	return c.Blob(http.StatusOK, "text/csv; charset=utf-8", []byte(b.String()))
}

// settingTexts are the settings a measurement was made with, in order, as they
// would be typed.
func settingTexts(s planform.Settings) [][2]string {
	float := func(v float64) string {
		if v == 0 {
			return ""
		}
		return strconv.FormatFloat(v, 'g', -1, 64)
	}
	var out [][2]string
	for i, v := range []string{float(s.SpacingM), fmt.Sprint(s.Smooth), float(s.WindowWidths), float(s.WindowBends), float(s.WindowM),
		float(s.WidthM), float(s.MinBendWidths), fmt.Sprint(s.K), s.EPSG, s.Z, s.Direction, s.Along, s.Lines} {
		if v != "" {
			out = append(out, [2]string{measureParameters[i], v})
		}
	}
	return out
}
