package main

import (
	"context"
	"fmt"
	"net/http"
	"path/filepath"
	"runtime"
	"slices"
	"strings"
	"time"

	"github.com/labstack/echo/v4"
	dto "github.com/prometheus/client_model/go"

	"fathombend/catalogue"
	"fathombend/views"
)

func (a *App) routesStatus(e *echo.Echo) {
	get(e, "/healthz", a.healthz)
	get(e, "/metrics", func(c echo.Context) error {
		c.Response().Header().Set("Cache-Control", "no-store")
		a.metrics.handler.ServeHTTP(c.Response(), c.Request())
		return nil
	})
	get(e, "/status", a.statusPage)
}

// condition is the state of the catalogue and its disk.
type condition struct {
	Fault     string // why the catalogue cannot be used, "" if it can
	File, WAL int64  // bytes
	Free      int64  // bytes, -1 = not known
	Revision  int64
	Waiting   int // submissions in the queue
	Backup    backupState
}

func (a *App) condition(ctx context.Context) condition {
	s := condition{Free: diskFree(a.store.Path()), Backup: a.backups.state()}
	s.File, s.WAL = a.store.Size()
	err := a.store.Health(ctx)
	if err == nil {
		s.Revision, err = a.store.Revision(ctx)
	}
	if err == nil {
		s.Waiting, err = a.store.CountSubmissions(ctx, "submitted", 0)
	}
	if err != nil {
		s.Fault = problemOf(err).Detail
	}
	return s
}

// healthz asks the catalogue; 503 with a sentence when it does not answer.
func (a *App) healthz(c echo.Context) error {
	ctx, cancel := context.WithTimeout(c.Request().Context(), 5*time.Second)
	defer cancel()
	c.Response().Header().Set("Cache-Control", "no-store")
	if err := a.store.Health(ctx); err != nil {
		a.log.Error("health", "request_id", requestID(c), "err", err)
		return c.String(http.StatusServiceUnavailable, problemOf(err).Detail+"\n")
	}
	return c.String(http.StatusOK, "ok\n")
}

// statusPage shows the keepers what the metrics tell a machine.
func (a *App) statusPage(c echo.Context) error {
	v := views.StatusPage{Page: a.page(c, "Status", "")}
	s := a.condition(c.Request().Context())
	v.Fault = s.Fault
	var m runtime.MemStats
	runtime.ReadMemStats(&m)
	add := func(name, value, note string) {
		v.Facts = append(v.Facts, views.StatusFact{Name: name, Value: value, Note: note})
	}
	add("Program", Version, runtime.Version()+", running since "+a.began.UTC().Format("2006-01-02 15:04 MST"))
	add("Catalogue", filepath.Base(a.store.Path()), fmt.Sprintf("schema %d, revision %d", catalogue.SchemaVersion(), s.Revision))
	add("Size", megabytes(s.File), megabytes(s.WAL)+" of changes wait beside the file to be taken in")
	if s.Free >= 0 {
		note := ""
		if s.Free < 2*s.File+1<<26 {
			note = "Not enough for a backup on this disk and for growing. Free some space."
		}
		add("Free on its disk", megabytes(s.Free), note)
	}
	add("Waiting for a curator", fmt.Sprint(s.Waiting), "")
	add("Last backup", backupWords(s.Backup, time.Now()), backupNote(s.Backup))
	add("Memory", megabytes(int64(m.Sys)), fmt.Sprintf("taken from the machine; %d tasks", runtime.NumGoroutine()))
	v.Routes, v.Fits = a.metrics.tables()
	return render(c, http.StatusOK, views.Status(v))
}

func megabytes(n int64) string { return fmt.Sprintf("%.1f MB", float64(n)/1e6) }

func backupWords(b backupState, now time.Time) string {
	switch {
	case !b.On:
		return "none scheduled"
	case b.Last.IsZero():
		return "none yet"
	}
	return b.Last.Format("2006-01-02 15:04 UTC") + ", " + now.Sub(b.Last).Round(time.Minute).String() + " ago"
}

func backupNote(b backupState) string {
	switch {
	case !b.On:
		return "Start the program with -backup-dir to make one every day."
	case b.Problem != "":
		return "The last try failed: " + b.Problem
	}
	return fmt.Sprintf("every %s, the newest %d are kept", b.Every, b.Keep)
}

// tables reads the counters of requests and of fits by name, the busiest first.
func (m *metrics) tables() (routes, fits []views.StatusRoute) {
	families, err := m.registry.Gather()
	if err != nil {
		return nil, nil
	}
	failed := map[string]uint64{}
	for _, f := range families {
		for _, x := range f.GetMetric() {
			switch f.GetName() {
			case "fathombend_requests_total":
				if labels := labelsOf(x); strings.HasPrefix(labels["status"], "5") {
					failed[labels["route"]] += uint64(x.GetCounter().GetValue())
				}
			case "fathombend_request_seconds":
				routes = append(routes, statusRoute(labelsOf(x)["route"], x.GetHistogram()))
			case "fathombend_fit_seconds":
				fits = append(fits, statusRoute(labelsOf(x)["of"], x.GetHistogram()))
			}
		}
	}
	for i := range routes {
		routes[i].Failed = failed[routes[i].Name]
	}
	for _, t := range [][]views.StatusRoute{routes, fits} {
		slices.SortStableFunc(t, func(x, y views.StatusRoute) int { return int(y.Requests) - int(x.Requests) })
	}
	return routes, fits
}

func labelsOf(m *dto.Metric) map[string]string {
	out := map[string]string{}
	for _, l := range m.GetLabel() {
		out[l.GetName()] = l.GetValue()
	}
	return out
}

// statusRoute gives the bounds of the buckets that hold the median and the 99th
// percentile.
func statusRoute(name string, h *dto.Histogram) views.StatusRoute {
	r := views.StatusRoute{Name: name, Requests: h.GetSampleCount()}
	bound := func(p float64) string {
		for _, b := range h.GetBucket() {
			if float64(b.GetCumulativeCount()) >= p*float64(r.Requests) {
				return fmt.Sprintf("under %g s", b.GetUpperBound())
			}
		}
		return fmt.Sprintf("over %g s", latencyBuckets[len(latencyBuckets)-1])
	}
	r.Median, r.P99 = bound(0.5), bound(0.99)
	return r
}
