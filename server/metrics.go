package main

import (
	"context"
	"net/http"
	"strconv"
	"time"

	"github.com/labstack/echo/v4"
	"github.com/prometheus/client_golang/prometheus"
	"github.com/prometheus/client_golang/prometheus/collectors"
	"github.com/prometheus/client_golang/prometheus/promhttp"
)

// metrics counts what the program does. Labels are route patterns, never
// addresses: an address may hold a target.
type metrics struct {
	registry *prometheus.Registry
	handler  http.Handler
	requests *prometheus.CounterVec
	latency  *prometheus.HistogramVec
	fits     *prometheus.HistogramVec
}

// latencyBuckets are seconds; 0.25 and 2 are the bounds the program is held to
// for pages and for fits.
var latencyBuckets = []float64{0.001, 0.0025, 0.005, 0.01, 0.025, 0.05, 0.1, 0.25, 0.5, 1, 2, 5, 15, 60}

func newMetrics(a *App) *metrics {
	m := &metrics{
		registry: prometheus.NewRegistry(),
		requests: prometheus.NewCounterVec(prometheus.CounterOpts{Name: "fathombend_requests_total", Help: "Requests answered, by route pattern, method and status."}, []string{"route", "method", "status"}),
		latency:  prometheus.NewHistogramVec(prometheus.HistogramOpts{Name: "fathombend_request_seconds", Help: "Time to answer, by route pattern.", Buckets: latencyBuckets}, []string{"route"}),
		fits:     prometheus.NewHistogramVec(prometheus.HistogramOpts{Name: "fathombend_fit_seconds", Help: "Time of a computed fit with its resampling; answers from memory are not counted.", Buckets: latencyBuckets}, []string{"of"}),
	}
	m.registry.MustRegister(m.requests, m.latency, m.fits, collectors.NewGoCollector(),
		collectors.NewProcessCollector(collectors.ProcessCollectorOpts{}), &catalogueCollector{a})
	m.handler = promhttp.HandlerFor(m.registry, promhttp.HandlerOpts{MaxRequestsInFlight: 4, Timeout: 20 * time.Second, DisableCompression: true})
	return m
}

// observe counts one answered request.
func (m *metrics) observe(c echo.Context, took time.Duration) {
	route, method := routeOf(c), c.Request().Method
	switch method {
	case "GET", "HEAD", "POST", "PUT", "PATCH", "DELETE", "OPTIONS":
	default:
		method = "other" // a label must not grow with what clients make up
	}
	m.requests.WithLabelValues(route, method, strconv.Itoa(c.Response().Status)).Inc()
	m.latency.WithLabelValues(route).Observe(took.Seconds())
}

// fitted notes how long a computed fit took.
func (m *metrics) fitted(of string, began time.Time) {
	if m != nil {
		m.fits.WithLabelValues(of).Observe(time.Since(began).Seconds())
	}
}

// catalogueCollector asks the catalogue when somebody asks for the metrics.
type catalogueCollector struct{ a *App }

var (
	descUp       = prometheus.NewDesc("fathombend_catalogue_up", "1 when the catalogue can be read and lies where it was opened.", nil, nil)
	descBytes    = prometheus.NewDesc("fathombend_catalogue_bytes", "Size of the catalogue on disk, by part: file, or the changes waiting beside it.", []string{"part"}, nil)
	descFree     = prometheus.NewDesc("fathombend_disk_free_bytes", "Free space on the disk of the catalogue.", nil, nil)
	descRevision = prometheus.NewDesc("fathombend_catalogue_revision", "Latest accepted change.", nil, nil)
	descQueue    = prometheus.NewDesc("fathombend_submissions_waiting", "Contributions that wait for a curator.", nil, nil)
	descBackup   = prometheus.NewDesc("fathombend_last_backup_age_seconds", "Time since the newest scheduled backup.", nil, nil)
	descFailed   = prometheus.NewDesc("fathombend_backup_failures_total", "Scheduled backups that failed since the start.", nil, nil)
)

// Describe sends the descriptions.
func (k *catalogueCollector) Describe(ch chan<- *prometheus.Desc) {
	for _, d := range []*prometheus.Desc{descUp, descBytes, descFree, descRevision, descQueue, descBackup, descFailed} {
		ch <- d
	}
}

// Collect sends the values of now.
func (k *catalogueCollector) Collect(ch chan<- prometheus.Metric) {
	ctx, cancel := context.WithTimeout(context.Background(), 5*time.Second)
	defer cancel()
	gauge := func(d *prometheus.Desc, v float64, labels ...string) {
		ch <- prometheus.MustNewConstMetric(d, prometheus.GaugeValue, v, labels...)
	}
	s := k.a.condition(ctx)
	up := 1.0
	if s.Fault != "" {
		up = 0
	}
	gauge(descUp, up)
	gauge(descBytes, float64(s.File), "file")
	gauge(descBytes, float64(s.WAL), "waiting")
	if s.Free >= 0 {
		gauge(descFree, float64(s.Free))
	}
	gauge(descRevision, float64(s.Revision))
	gauge(descQueue, float64(s.Waiting))
	if s.Backup.On {
		if !s.Backup.Last.IsZero() {
			gauge(descBackup, time.Since(s.Backup.Last).Seconds())
		}
		ch <- prometheus.MustNewConstMetric(descFailed, prometheus.CounterValue, float64(s.Backup.Failures))
	}
}
