package catalogue

import (
	"context"
	"slices"
	"strconv"
)

// ReadCells reads cells over the row, named as an import names its columns:
// also valley_slope_deg, channel_width_km and the like, and latitudes in
// degrees and minutes. It returns what could not be read and what was
// converted, each with the name of the cell in Column; a refused cell leaves
// the row as it was. Names that are no column are passed by.
func ReadCells(r *Row, cells map[string]string) (problems, conversions []RowProblem) {
	names := make([]string, 0, len(cells))
	for name := range cells {
		names = append(names, name)
	}
	slices.Sort(names)
	var l layout
	record := make([]string, len(names))
	for i, name := range names {
		l.cells = append(l.cells, planCell(name))
		record[i] = cells[name]
	}
	l.fill(r, record, func(kind noteKind, _ int, p RowProblem) {
		if kind == noteConversion {
			conversions = append(conversions, p)
		} else {
			problems = append(problems, p)
		}
	})
	return problems, conversions
}

// CellUnit is a unit a column can be given in: the name of the cell that takes
// it, and the unit in words.
type CellUnit struct{ Name, Unit string }

// CellUnits lists the units of a column, its own first.
func (c Column) CellUnits() []CellUnit {
	out := []CellUnit{{c.Name, c.Unit}}
	var others []CellUnit
	for name, conv := range conversions {
		if conv.column == c.Name {
			others = append(others, CellUnit{name, conv.unit})
		}
	}
	slices.SortFunc(others, func(a, b CellUnit) int {
		if a.Name < b.Name {
			return -1
		}
		return 1
	})
	return append(out, others...)
}

// Measurement returns one accepted measurement by its id, with its revision
// (for Submission.BaseRevision).
func (s *Store) Measurement(ctx context.Context, id string) (*Row, int64, error) {
	row, meta, err := rowOf(ctx, s.r, id)
	if err == nil && row == nil {
		return nil, 0, &Error{Code: NotFound, Field: "measurement", Message: "there is no measurement " + strconv.Quote(Clip(id))}
	}
	return row, meta.revision, fault("measurement", err)
}
