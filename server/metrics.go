package server

import (
	"net/http"
	"net/http/pprof"
	"strconv"
	"time"

	"github.com/prometheus/client_golang/prometheus"
	"github.com/prometheus/client_golang/prometheus/collectors"
	"github.com/prometheus/client_golang/prometheus/promhttp"

	"cadencewright/server/store"
)

// Metrics counts what the service does, for Prometheus. Labels are route
// patterns, never paths, and known methods: strangers must not be able to make
// new ones.
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
	counter := func(name, help string, f func() float64) prometheus.Collector {
		return prometheus.NewCounterFunc(prometheus.CounterOpts{Name: name, Help: help}, f)
	}
	m.registry.MustRegister(m.requests, collectors.NewGoCollector(), collectors.NewProcessCollector(collectors.ProcessCollectorOpts{}),
		gauge("cadencewright_db_connections", "Connections to the database.", func() float64 { return float64(s.Stat().TotalConns()) }),
		gauge("cadencewright_db_connections_busy", "Connections in use.", func() float64 { return float64(s.Stat().AcquiredConns()) }),
		gauge("cadencewright_db_connections_max", "Connections at most.", func() float64 { return float64(s.Stat().MaxConns()) }),
		counter("cadencewright_db_wait_seconds_total", "Time spent waiting for a connection.", func() float64 { return s.Stat().EmptyAcquireWaitTime().Seconds() }))
	return m
}

// methods that have a label of their own.
var methods = map[string]bool{http.MethodGet: true, http.MethodHead: true, http.MethodPost: true, http.MethodPut: true, http.MethodPatch: true,
	http.MethodDelete: true, http.MethodOptions: true}

func (m *Metrics) request(method, route string, status int, took time.Duration) {
	if route == "" {
		route = "none"
	}
	if !methods[method] {
		method = "other"
	}
	m.requests.WithLabelValues(method, route, strconv.Itoa(status)).Observe(took.Seconds())
}

// Handler serves the metrics at /metrics and profiles of the running program
// at /debug/pprof/. It is for operators alone: serve it where nobody else
// reaches.
func (m *Metrics) Handler() http.Handler {
	mux := http.NewServeMux()
	mux.Handle("GET /metrics", promhttp.HandlerFor(m.registry, promhttp.HandlerOpts{}))
	mux.HandleFunc("GET /debug/pprof/", pprof.Index)
	mux.HandleFunc("GET /debug/pprof/profile", pprof.Profile)
	mux.HandleFunc("GET /debug/pprof/trace", pprof.Trace)
	mux.HandleFunc("GET /debug/pprof/symbol", pprof.Symbol)
	return mux
}
