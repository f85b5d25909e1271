package main

import (
	"cmp"
	"encoding/csv"
	"encoding/json"
	"errors"
	"io"
	"math"
	"net/http"
	"net/url"
	"slices"
	"strconv"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

func (a *App) routesRecompute(e *echo.Echo) {
	get(e, "/recompute", a.recomputePage)
	get(e, "/recompute.json", a.recomputeListJSON)
	e.POST("/recompute", a.recomputeStart)
	get(e, "/recompute/:name", a.recomputation)
	e.POST("/recompute/:name", a.recomputeAct)
}

// recomputePage lists the recomputations and holds the form for a new one.
func (a *App) recomputePage(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	if err := allow(q, []string{"name", "why"}, recomputeParameters); err != nil {
		return err
	}
	return a.renderRecompute(c, http.StatusOK, q, nil)
}

func (a *App) renderRecompute(c echo.Context, status int, typed url.Values, wrong map[string]string) error {
	list, err := a.store.Recomputations(c.Request().Context())
	if err != nil {
		return err
	}
	p := views.RecomputePage{Page: a.page(c, "Measure every centreline again", "review"), Values: typed, Errors: wrong}
	for _, r := range list {
		p.List = append(p.List, views.Recomputation{Recomputation: r, Asked: recomputeSettingsText(settingsOf(r.Settings))})
	}
	if len(p.List) > 0 {
		p.JSON = "/recompute.json"
	}
	return render(c, status, views.Recompute(p))
}

// recomputeStart begins one. What is wrong comes back beside its field with
// everything typed kept.
func (a *App) recomputeStart(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	if err := allow(q, []string{"name", "why"}, recomputeParameters); err != nil {
		return err
	}
	s, wrong := recomputeSettings(q)
	if strings.TrimSpace(q.Get("name")) == "" {
		wrong["name"] = "The recomputation needs a name, such as windows of 10 bends."
	}
	if len(wrong) > 0 {
		return a.renderRecompute(c, http.StatusUnprocessableEntity, q, wrong)
	}
	text, err := json.Marshal(s)
	if err != nil {
		return err
	}
	var by int64
	if u := a.user(c); u != nil {
		by = u.ID
	}
	name, err := a.store.StartRecomputation(c.Request().Context(), catalogue.Recomputation{Title: q.Get("name"), Why: q.Get("why"), Settings: string(text), Program: Version}, by)
	var refused *catalogue.Error
	if errors.As(err, &refused) && refused.Field != "" {
		status := http.StatusUnprocessableEntity
		if refused.Code == catalogue.Conflict {
			status = http.StatusConflict
		}
		return a.renderRecompute(c, status, q, map[string]string{refused.Field: sentence(refused.Message, "")})
	}
	if err != nil {
		return err
	}
	a.recomputes.run(name)
	return c.Redirect(http.StatusSeeOther, "/recompute/"+url.PathEscape(name))
}

// recomputeAct cancels, resumes or discards one.
func (a *App) recomputeAct(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	ctx, name := c.Request().Context(), c.Param("name")
	action, err := oneOf(q, "action", "", []string{"cancel", "resume", "discard"})
	if err != nil {
		return err
	}
	to := "/recompute/" + url.PathEscape(name)
	switch action {
	case "cancel":
		if err = a.store.CancelRecomputation(ctx, name); err == nil {
			a.recomputes.end(name)
			a.notice(c, "Cancelled. What was measured so far is kept, and resuming goes on from there.")
		}
	case "resume":
		if err = a.store.ResumeRecomputation(ctx, name); err == nil {
			a.recomputes.run(name)
		}
	case "discard":
		if err = a.store.DiscardRecomputation(ctx, name); err == nil {
			a.notice(c, "The recomputation was discarded.")
			to = "/recompute"
		}
	default:
		err = &badInput{"action", "expected one of: cancel, resume, discard"}
	}
	if err != nil {
		return err
	}
	return c.Redirect(http.StatusSeeOther, to)
}

// recomputation is the page of one, and its twins by suffix.
func (a *App) recomputation(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	if err := allow(q, []string{"sort"}); err != nil {
		return err
	}
	order, err := oneOf(q, "sort", "change", views.RecomputedOrders)
	if err != nil {
		return err
	}
	name, suffix := c.Param("name"), ""
	for _, s := range []string{".json", ".csv"} {
		if n, ok := strings.CutSuffix(name, s); ok {
			name, suffix = n, s
		}
	}
	ctx := c.Request().Context()
	r, err := a.store.Recomputation(ctx, name)
	if err != nil {
		return err
	}
	if r.State == "running" && suffix == "" && !a.readOnly {
		c.Response().Header().Set("Refresh", "3")
	}
	if r.State != "done" {
		c.Response().Header().Set(echo.HeaderCacheControl, "no-store")
	}
	lines, err := a.store.RecomputedLines(ctx, name)
	if err != nil {
		return err
	}
	switch suffix {
	case ".json":
		return writeJSON(c, http.StatusOK, recomputationDocument(r, lines))
	case ".csv":
		h := c.Response().Header()
		h.Set(echo.HeaderContentType, "text/csv; charset=utf-8; header=present")
		h.Set(echo.HeaderContentDisposition, `attachment; filename="recomputed-`+r.Name+`.csv"`)
		return writeRecomputed(c.Response(), lines)
	}
	p := views.RecomputationPage{Page: a.page(c, r.Title, "review"), Recomputation: views.Recomputation{Recomputation: *r, Asked: recomputeSettingsText(settingsOf(r.Settings))},
		K: settingsOf(r.Settings).K, Moves: movesOf(lines), Order: order, Here: a.recomputes.has(name)}
	sortRecomputed(lines, order)
	p.Values = lines
	p.Wide = true
	base := "/recompute/" + url.PathEscape(r.Name)
	p.JSON, p.CSV = base+".json", base+".csv"
	return render(c, http.StatusOK, views.RecomputationResult(p))
}

// movesOf says how far each level moves over the lines that have both.
func movesOf(lines []catalogue.RecomputedLine) []views.LevelMove {
	out := []views.LevelMove{{Level: "Reach"}, {Level: "Mean of windows"}, {Level: "90th percentile"}, {Level: "Peak"}, {Level: "Standardised peak"}}
	then, now, moved := make([][]float64, len(out)), make([][]float64, len(out)), make([][]float64, len(out))
	for i := range lines {
		l := &lines[i]
		for j, v := range levelPairs(l) {
			if d := difference(v[1], v[0]); isFinite(d) {
				then[j], now[j], moved[j] = append(then[j], v[0].V), append(now[j], v[1].V), append(moved[j], d)
			}
		}
	}
	for j := range out {
		for _, v := range [][]float64{then[j], now[j], moved[j]} {
			slices.Sort(v)
		}
		m := &out[j]
		m.Lines = len(moved[j])
		if m.Lines == 0 {
			continue
		}
		m.Stored, m.Recomputed, m.Difference = middle(then[j]), middle(now[j]), middle(moved[j])
		m.Least, m.Most = moved[j][0], moved[j][m.Lines-1]
	}
	return out
}

// levelPairs are the stored and the recomputed value of each level.
func levelPairs(l *catalogue.RecomputedLine) [5][2]catalogue.Number {
	return [5][2]catalogue.Number{{l.Old.Reach, l.New.Reach}, {l.Old.Mean, l.New.Mean}, {l.Old.P90, l.New.P90}, {l.Old.Peak, l.New.Peak}, {l.Old.Standardised, l.New.Standardised}}
}

// middle is the median of sorted values.
func middle(v []float64) float64 {
	n := len(v)
	return (v[(n-1)/2] + v[n/2]) / 2
}

// sortRecomputed puts the lines that move most first, or orders them by the
// recomputed peak; they come ordered by system.
func sortRecomputed(lines []catalogue.RecomputedLine, order string) {
	key := func(l catalogue.RecomputedLine) float64 { return math.Abs(difference(l.New.Peak, l.Old.Peak)) }
	switch order {
	case "system":
		return
	case "peak":
		key = func(l catalogue.RecomputedLine) float64 { return num(l.New.Peak) }
	}
	slices.SortStableFunc(lines, func(a, b catalogue.RecomputedLine) int { return cmp.Compare(key(b), key(a)) }) // NaN last
}

// recomputationJSON is the document of one recomputation.
type recomputationJSON struct {
	Name         string               `json:"name"`
	Title        string               `json:"title"`
	Why          string               `json:"why"`
	State        string               `json:"state"` // running, cancelled, done
	Lines        int                  `json:"lines"`
	Reached      int                  `json:"reached"`
	Settings     json.RawMessage      `json:"settings"`
	Revision     int64                `json:"revision"` // of the catalogue when it was asked for
	Program      string               `json:"program"`
	By           string               `json:"by"`
	InventedRows int                  `json:"invented_rows"`
	Values       []recomputedLineJSON `json:"values,omitempty"`
}

type recomputedLineJSON struct {
	Line         int64           `json:"centreline"`
	System       string          `json:"system"`
	SystemName   string          `json:"system_name"`
	Measurement  string          `json:"measurement"`
	Recorded     float64         `json:"recorded_sinuosity"`
	RecordedKind string          `json:"recorded_sinuosity_kind"`
	Stored       levelsJSON      `json:"stored"`
	New          levelsJSON      `json:"recomputed"`
	Difference   levelsJSON      `json:"difference"` // recomputed less stored
	OldWindows   int             `json:"stored_windows"`
	Windows      []float64       `json:"window_sinuosities"`
	WindowM      float64         `json:"window_length_m"`
	Sensitivity  [2]float64      `json:"peak_sensitivity"`
	Settings     json.RawMessage `json:"settings"`
	Invented     bool            `json:"invented"`
	Remark       string          `json:"remark"`
}

type levelsJSON struct {
	Reach        float64 `json:"reach"`
	Mean         float64 `json:"mean"`
	P90          float64 `json:"p90"`
	Peak         float64 `json:"peak"`
	Standardised float64 `json:"standardised_peak"`
}

func levelsOf(l catalogue.Levels) levelsJSON {
	return levelsJSON{num(l.Reach), num(l.Mean), num(l.P90), num(l.Peak), num(l.Standardised)}
}

func differences(now, then catalogue.Levels) levelsJSON {
	return levelsJSON{difference(now.Reach, then.Reach), difference(now.Mean, then.Mean), difference(now.P90, then.P90),
		difference(now.Peak, then.Peak), difference(now.Standardised, then.Standardised)}
}

func recomputationDocument(r *catalogue.Recomputation, lines []catalogue.RecomputedLine) recomputationJSON {
	out := recomputationJSON{Name: r.Name, Title: r.Title, Why: r.Why, State: r.State, Lines: r.Lines, Reached: r.Reached,
		Settings: rawJSON(r.Settings), Revision: r.Revision, Program: r.Program, By: r.By}
	for i := range lines {
		l := &lines[i]
		if l.Invented {
			out.InventedRows++
		}
		windows := l.Sinuosities
		if windows == nil {
			windows = []float64{}
		}
		out.Values = append(out.Values, recomputedLineJSON{Line: l.Line, System: l.System, SystemName: l.SystemName, Measurement: l.Measurement,
			Recorded: num(l.Recorded), RecordedKind: l.RecordedKind, Stored: levelsOf(l.Old), New: levelsOf(l.New), Difference: differences(l.New, l.Old),
			OldWindows: l.OldWindows, Windows: windows, WindowM: num(l.WindowM), Sensitivity: [2]float64{num(l.Low), num(l.High)},
			Settings: rawJSON(l.Settings), Invented: l.Invented, Remark: l.Remark})
	}
	return out
}

func (a *App) recomputeListJSON(c echo.Context) error {
	list, err := a.store.Recomputations(c.Request().Context())
	if err != nil {
		return err
	}
	out := []recomputationJSON{}
	for i := range list {
		out = append(out, recomputationDocument(&list[i], nil))
	}
	return writeJSON(c, http.StatusOK, map[string]any{"recomputations": out})
}

// writeRecomputed writes one row a line: stored, recomputed and their
// difference for each level. Unknown numbers are empty.
func writeRecomputed(w io.Writer, lines []catalogue.RecomputedLine) error {
	out := csv.NewWriter(w)
	head := []string{"centreline", "system", "system_name", "measurement", "recorded_sinuosity", "recorded_sinuosity_kind"}
	for _, level := range []string{"reach", "mean", "p90", "peak", "standardised_peak"} {
		head = append(head, "stored_"+level, "recomputed_"+level, "difference_"+level)
	}
	head = append(head, "stored_windows", "windows", "window_length_m", "peak_low", "peak_high", "settings", "invented", "remark")
	if err := out.Write(head); err != nil {
		return err
	}
	for i := range lines {
		l := &lines[i]
		row := []string{strconv.FormatInt(l.Line, 10), catalogue.Neutralise(l.System), catalogue.Neutralise(l.SystemName), l.Measurement, cellNumber(num(l.Recorded)), l.RecordedKind}
		for _, v := range levelPairs(l) {
			row = append(row, cellNumber(num(v[0])), cellNumber(num(v[1])), cellNumber(difference(v[1], v[0])))
		}
		row = append(row, strconv.Itoa(l.OldWindows), strconv.Itoa(len(l.Sinuosities)), cellNumber(num(l.WindowM)), cellNumber(num(l.Low)), cellNumber(num(l.High)),
			recomputeSettingsText(settingsOf(l.Settings)), map[bool]string{true: "yes", false: "no"}[l.Invented], catalogue.Neutralise(l.Remark))
		if err := out.Write(row); err != nil {
			return err
		}
	}
	out.Flush()
	return out.Error()
}
