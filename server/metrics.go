package server

import (
	"net/http"
	"strconv"
	"time"

	"github.com/prometheus/client_golang/prometheus"
	"github.com/prometheus/client_golang/prometheus/collectors"
	"github.com/prometheus/client_golang/prometheus/promhttp"

	"cadencewright/server/store"
)

// Metrics counts what the service does, for Prometheus. Labels are route
// patterns, never paths.
type Metrics struct {
	registry *prometheus.Registry
	requests *prometheus.HistogramVec
}

// NewMetrics makes the metrics of one copy of the program.
func NewMetrics(s *store.Store) *Metrics {
	m := &Metrics{registry: prometheus.NewRegistry()}
	m.requests = prometheus.NewHistogramVec(prometheus.HistogramOpts{
		Name: "cadencewright_request_seconds", Help: "Time to answer, by method, route and status.",
		Buckets: []float64{.002, .005, .01, .02, .05, .1, .2, .5, 1, 2, 5, 10},
	}, []string{"method", "route", "status"})
	gauge := func(name, help string, f func() float64) prometheus.Collector {
		return prometheus.NewGaugeFunc(prometheus.GaugeOpts{Name: name, Help: help}, f)
	}
	m.registry.MustRegister(m.requests, collectors.NewGoCollector(), collectors.NewProcessCollector(collectors.ProcessCollectorOpts{}),
		gauge("cadencewright_db_connections", "Connections to the database.", func() float64 { return float64(s.Stat().TotalConns()) }),
		gauge("cadencewright_db_connections_busy", "Connections in use.", func() float64 { return float64(s.Stat().AcquiredConns()) }),
		gauge("cadencewright_db_wait_seconds_total", "Time spent waiting for a connection.", func() float64 { return s.Stat().EmptyAcquireWaitTime().Seconds() }))
	return m
}

func (m *Metrics) request(method, route string, status int, took time.Duration) {
	if route == "" {
		route = "none"
	}
	m.requests.WithLabelValues(method, route, strconv.Itoa(status)).Observe(took.Seconds())
}

// Handler serves the metrics.
func (m *Metrics) Handler() http.Handler {
	return promhttp.HandlerFor(m.registry, promhttp.HandlerOpts{})
}
