package store

import (
	"context"
	"errors"
	"fmt"
	"io"
	"net"
	"strings"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgconn"

	"cadencewright/scheduler"
)

// FieldError is a conflict or a bad value in one field.
type FieldError struct {
	Field   string
	Message string
	kind    error
}

func (e *FieldError) Error() string { return e.Message }

// Unwrap is the error's kind.
func (e *FieldError) Unwrap() error { return e.kind }

// StaleError says that somebody else changed the thing since it was read.
type StaleError struct {
	What    string
	Current int64 // its version now
}

func (e *StaleError) Error() string {
	return fmt.Sprintf("%s has been changed by somebody else in the meantime; its version now is %d", e.What, e.Current)
}

// Unwrap is the error's kind.
func (e *StaleError) Unwrap() error { return scheduler.ErrStale }

// constraints gives people's words for a broken constraint.
var constraints = map[string]FieldError{
	"campaign_name_unique":    {"name", "a campaign of that name is already there", scheduler.ErrConflict},
	"campaign_one_live":       {"live", "another campaign is live", scheduler.ErrConflict},
	"telescope_code_unique":   {"code", "a telescope with that code is already there", scheduler.ErrConflict},
	"receiver_code_unique":    {"code", "the telescope has a receiver with that code already", scheduler.ErrConflict},
	"source_name_unique":      {"name", "a source of that name is already there", scheduler.ErrConflict},
	"ephemeris_number_unique": {"number", "another ephemeris of the source was entered at the same moment", scheduler.ErrConflict},
	"goal_code_unique":        {"id", "a goal with that id is already there", scheduler.ErrConflict},
	"block_code_unique":       {"id", "a block with that id is already there", scheduler.ErrConflict},
	"block_no_overlap":        {"start", "the block overlaps another block of its telescope", scheduler.ErrConflict},
	"scan_no_overlap":         {"start", "the scan overlaps another scan of its telescope in the issued plan", scheduler.ErrConflict},
	"plan_revision_unique":    {"revision", "another plan of this week was issued at the same moment", scheduler.ErrConflict},
	"plan_one_issued":         {"horizon", "an issued plan of another stretch of time overlaps this one", scheduler.ErrConflict},
	"plan_job_one_active":     {"week", "a planning job for this week is already under way", scheduler.ErrConflict},
	"person_name_unique":      {"name", "a person of that name is already there", scheduler.ErrConflict},
	"api_key_name_unique":     {"name", "a key of that name is already there", scheduler.ErrConflict},
	"history_scan_unique":     {"scan", "the scan is in the history already", scheduler.ErrConflict},
	"outcome_span":            {"ended_at", "the scan ends before it starts", scheduler.ErrInvalid},
	"outcome_cause":           {"cause", "a lost scan needs a cause", scheduler.ErrInvalid},
	"outcome_snr":             {"snr", "the signal-to-noise ratio must be above 0", scheduler.ErrInvalid},
	"outcome_toa":             {"toa_us", "the TOA uncertainty must be above 0", scheduler.ErrInvalid},
	"person_name_filled":      {"name", "a name is wanted", scheduler.ErrInvalid},
	"api_key_name_filled":     {"name", "a name is wanted", scheduler.ErrInvalid},
	"person_role":             {"role", "the role must be coordinator, observer or reader", scheduler.ErrInvalid},
	"block_span":              {"end", "the end is not after the start", scheduler.ErrInvalid},
	"campaign_span":           {"end", "the end is not after the start", scheduler.ErrInvalid},
	"plan_horizon":            {"to", "the end is not after the start", scheduler.ErrInvalid},
}

// missing says what it is that is not there.
func missing(err error, format string, args ...any) error {
	if errors.Is(err, pgx.ErrNoRows) {
		return scheduler.Errorf(scheduler.ErrNotFound, format, args...)
	}
	return classify(err)
}

// classify turns the database's errors into kinds that the service knows.
// Errors of no kind are faults of the program.
func classify(err error) error {
	if err == nil || scheduler.KindOf(err) != nil {
		return err
	}
	if errors.Is(err, pgx.ErrNoRows) {
		return scheduler.Errorf(scheduler.ErrNotFound, "there is no such thing")
	}
	var pg *pgconn.PgError
	if errors.As(err, &pg) {
		return answered(pg, err)
	}
	if away(err) {
		return unavailable(err)
	}
	return err
}

// answered is an error that the database itself reports.
func answered(pg *pgconn.PgError, err error) error {
	if f, ok := constraints[pg.ConstraintName]; ok {
		return &f
	}
	switch {
	case pg.Code == "40001" || pg.Code == "40P01": // serialisation, deadlock
		return scheduler.Errorf(scheduler.ErrUnavailable, "the database was busy with another change; try again")
	case pg.Code == "22021" || pg.Code == "22P05": // bytes that are no text, or a zero among them
		return scheduler.Errorf(scheduler.ErrInvalid, "a text holds a character that cannot be stored")
	case pg.Code == "57014": // statement timeout
		return scheduler.Errorf(scheduler.ErrUnavailable, "the database took too long")
	case pg.Code == "53100":
		return scheduler.Errorf(scheduler.ErrUnavailable, "the disk of the database is full: %w", err)
	case strings.HasPrefix(pg.Code, "57P"), // it stops, or starts
		strings.HasPrefix(pg.Code, "53"), // out of something
		strings.HasPrefix(pg.Code, "08"), // connection
		pg.Code == "25006":               // a standby, which only reads
		return unavailable(err)
	}
	return fmt.Errorf("database: %w", err)
}

// away tells whether an error means that the database does not answer.
func away(err error) bool {
	if errors.Is(err, context.Canceled) {
		return false
	}
	var network net.Error
	var connect *pgconn.ConnectError
	return errors.As(err, &network) || errors.As(err, &connect) || pgconn.SafeToRetry(err) ||
		errors.Is(err, io.EOF) || errors.Is(err, io.ErrUnexpectedEOF) || strings.Contains(err.Error(), "closed pool")
}

// fault is an error on the way to the database, with what was being done.
func fault(what string, err error) error {
	c := classify(err)
	if scheduler.KindOf(c) != nil || errors.Is(c, context.Canceled) {
		return c
	}
	return fmt.Errorf("%s: %w", what, c)
}

// awayError is a database that does not answer; the cause is for the log.
type awayError struct{ cause error }

func (e *awayError) Error() string   { return "the database is away; try again in a moment" }
func (e *awayError) Unwrap() []error { return []error{scheduler.ErrUnavailable, e.cause} }

func unavailable(err error) error { return &awayError{err} }
