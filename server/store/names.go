package store

import (
	"context"
	"fmt"

	"github.com/jackc/pgx/v5"

	"cadencewright/scheduler"
)

// names finds the rows of a campaign's things by the names that plans use.
type names struct {
	telescopes  map[string]int64
	receivers   map[[2]string]int64 // by telescope and code
	sources     map[string]int64
	ephemerides map[string]int64 // by source
	blocks      map[string]blockRef
}

// scanRefs are the rows that a scan refers to.
type scanRefs struct{ telescope, receiver, source, ephemeris, block int64 }

const qNamesTelescopes = `select code, id from telescope where campaign_id = $1`
const qNamesReceivers = `select t.code, r.code, r.id from receiver r join telescope t on t.id = r.telescope_id where t.campaign_id = $1`
const qNamesBlocks = `select b.code, b.id, t.code from block b join telescope t on t.id = b.telescope_id where b.campaign_id = $1`

// The ephemeris of a plan is the one that was in force when the campaign was
// read, not a newer one that came while the planner was at work.
const qNamesSources = `select s.name, s.id, e.id from source s
join lateral (select e.id from ephemeris e where e.source_id = s.id and (e.revision <= $2 or e.number = 1) order by e.number desc limit 1) e on true
where s.campaign_id = $1`

// namesOf reads the names of a campaign; revision is the one that the
// ephemerides are wanted of.
func (t *tx) namesOf(ctx context.Context, campaign, revision int64) (*names, error) {
	n := &names{map[string]int64{}, map[[2]string]int64{}, map[string]int64{}, map[string]int64{}, map[string]blockRef{}}
	var a, b string
	var id, other int64
	for _, x := range []struct {
		query string
		args  []any
		into  []any
		keep  func()
	}{
		{qNamesTelescopes, []any{campaign}, []any{&a, &id}, func() { n.telescopes[a] = id }},
		{qNamesReceivers, []any{campaign}, []any{&a, &b, &id}, func() { n.receivers[[2]string{a, b}] = id }},
		{qNamesBlocks, []any{campaign}, []any{&a, &id, &b}, func() { n.blocks[a] = blockRef{id, b} }},
		{qNamesSources, []any{campaign, revision}, []any{&a, &id, &other}, func() { n.sources[a], n.ephemerides[a] = id, other }},
	} {
		rows, err := t.q.Query(ctx, x.query, x.args...)
		if err != nil {
			return nil, err
		}
		if _, err := pgx.ForEachRow(rows, x.into, func() error { x.keep(); return nil }); err != nil {
			return nil, err
		}
	}
	return n, nil
}

// scan finds what a plan's i-th scan refers to.
func (n *names) scan(i int, x *scheduler.Scan) (scanRefs, error) {
	unknown := func(field, thing, name string) error {
		return &FieldError{fmt.Sprintf("scans/%d/%s", i, field), fmt.Sprintf("scan %d of the plan: the campaign has no %s %q", i, thing, name), scheduler.ErrInvalid}
	}
	b, ok := n.blocks[x.Block]
	if !ok {
		return scanRefs{}, unknown("block", "block", x.Block)
	}
	if b.telescope != x.Telescope {
		return scanRefs{}, &FieldError{fmt.Sprintf("scans/%d/telescope", i),
			fmt.Sprintf("scan %d of the plan: block %q is of telescope %q, not %q", i, x.Block, b.telescope, x.Telescope), scheduler.ErrInvalid}
	}
	source, ok := n.sources[x.Source]
	if !ok {
		return scanRefs{}, unknown("source", "source", x.Source)
	}
	receiver, ok := n.receivers[[2]string{x.Telescope, x.Receiver}]
	if !ok {
		return scanRefs{}, unknown("receiver", "receiver", x.Telescope+" "+x.Receiver)
	}
	return scanRefs{n.telescopes[x.Telescope], receiver, source, n.ephemerides[x.Source], b.id}, nil
}
