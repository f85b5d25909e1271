package catalogue

import (
	"context"
	"database/sql"
	"math"
	"slices"
	"strconv"
	"strings"
)

// ranking is the place of each row in one column; equal cells share one.
type ranking struct {
	place []int32 // by row; unknown = not given
	last  int32
}

// unknown stands last, whichever way the rows are sorted.
const unknown = math.MaxInt32

// maxRankings is how many columns are remembered: four bytes a measurement each.
const maxRankings = 8

// ranked ranks the rows by a column.
func (ix *rowIndex) ranked(ctx context.Context, q querier, c *Column) (*ranking, error) {
	ix.mu.Lock()
	defer ix.mu.Unlock()
	if r := ix.rankings[c.Name]; r != nil {
		return r, nil
	}
	without, by := c.sorting()
	rows, err := q.QueryContext(ctx, "SELECT m.id, "+without+", dense_rank() OVER (ORDER BY "+by+")"+fromRows)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	r := &ranking{place: make([]int32, len(ix.ids))}
	for rows.Next() {
		var id int64
		var missing bool
		var place int32
		if err := rows.Scan(&id, &missing, &place); err != nil {
			return nil, err
		}
		row := ix.rowOf(id)
		switch {
		case row < 0:
		case missing:
			r.place[row] = unknown
		default:
			r.place[row], r.last = place, max(r.last, place)
		}
	}
	if err := rows.Err(); err != nil {
		return nil, err
	}
	if len(ix.rankings) >= maxRankings {
		clear(ix.rankings)
	}
	ix.rankings[c.Name] = r
	return r, nil
}

// sorted puts rows in the order that orderBy says in SQL.
func (ix *rowIndex) sorted(ctx context.Context, q querier, f *Filter, rows []int32) error {
	c, down, err := f.sortColumn("system")
	if err != nil {
		return err
	}
	r, err := ix.ranked(ctx, q, c)
	if err != nil {
		return err
	}
	keys := make([]uint64, len(rows))
	for i, row := range rows {
		place := r.place[row]
		if down && place != unknown {
			place = r.last - place
		}
		keys[i] = uint64(place)<<32 | uint64(ix.idPlace[row])
	}
	slices.Sort(keys)
	for i, k := range keys {
		rows[i] = ix.byID[uint32(k)]
	}
	return nil
}

// page is one page of the systems under a filter by the rows that stand for
// them, and how many systems there are.
func (ix *rowIndex) page(ctx context.Context, q querier, f *Filter, in []bool) (rows []int32, total int, err error) {
	rows = ix.bests(in)
	total = len(rows)
	limit, offset := f.paging()
	if offset >= total {
		return nil, total, nil
	}
	if err := ix.sorted(ctx, q, f, rows); err != nil {
		return nil, 0, err
	}
	return rows[offset:min(offset+limit, total)], total, nil
}

// mostIDs bounds the text of one query; a system is never split.
const mostIDs = 5000

// read reads the systems that rows stand for, in their order, with their rows
// in in.
func (ix *rowIndex) read(ctx context.Context, q querier, in []bool, rows []int32) ([]System, error) {
	systems := make([]System, len(rows))
	place := make(map[int64]int, len(rows))
	var ids []string
	flush := func() error {
		if len(ids) == 0 {
			return nil
		}
		tail := " WHERE m.id IN (" + strings.Join(ids, ", ") + ") ORDER BY m.system_id, m.grade_rank, m.id DESC"
		ids = ids[:0]
		return eachRow(ctx, q, tail, nil, func(r *Row, meta rowMeta) error {
			systems[place[meta.systemID]].take(r, meta)
			return nil
		})
	}
	for i, best := range rows {
		system := ix.systems[best]
		place[system] = i
		from := int(best)
		for from > 0 && ix.systems[from-1] == system {
			from--
		}
		for row := from; row < len(ix.ids) && ix.systems[row] == system; row++ {
			if in == nil || in[row] {
				ids = append(ids, strconv.FormatInt(ix.ids[row], 10))
			}
		}
		if len(ids) >= mostIDs {
			if err := flush(); err != nil {
				return nil, err
			}
		}
	}
	return systems, flush()
}

// indexed runs fn on one snapshot with the index of what the filter reads.
func (s *Store) indexed(ctx context.Context, f *Filter, fn func(q querier, ix *rowIndex) error) error {
	return s.read(ctx, func(tx *sql.Tx) error {
		q, err := at(ctx, tx, f.Release)
		if err != nil {
			return err
		}
		ix, err := s.index.of(ctx, q, f.Release)
		if err != nil {
			return err
		}
		return fn(q, ix)
	})
}
