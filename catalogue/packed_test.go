package catalogue

import (
	"database/sql/driver"
	"math"
	"strings"
	"testing"
)

// What goes into packed() comes out again, bit for bit, and the next row leaves
// nothing of the one before.
func TestPackedCells(t *testing.T) {
	s := open(t)
	long := strings.Repeat("ä\x00", 300)
	cells := make(packedCells, 6)
	query := "SELECT packed(?, ?, ?, ?, ?, ?)"
	if err := s.r.QueryRowContext(ctx, query, 0.1, int64(-7), long, "", nil, math.Copysign(0, -1)).Scan(cells); err != nil {
		t.Fatal(err)
	}
	if cells[0].number != 0.1 || cells[1].integer != -7 || string(cells[2].text) != long || cells[3].kind != 't' || len(cells[3].text) != 0 || cells[4].kind != 'n' {
		t.Errorf("%+v", cells)
	}
	if !math.Signbit(cells[5].number) {
		t.Error("-0 lost its sign")
	}
	if v := cells[1].num(); v != -7 || !math.IsNaN(cells[4].num()) {
		t.Errorf("num() gives %v and %v", v, cells[4].num())
	}
	if err := s.r.QueryRowContext(ctx, query, nil, nil, nil, nil, nil, nil).Scan(cells); err != nil {
		t.Fatal(err)
	}
	for i, c := range cells {
		if c.kind != 'n' || c.integer != 0 || c.number != 0 || c.text != nil {
			t.Errorf("cell %d still holds %+v", i, c)
		}
	}
	var blob []byte
	if err := s.r.QueryRowContext(ctx, "SELECT packed(x'00')").Scan(&blob); err == nil {
		t.Error("a blob was packed")
	}
}

func TestPackedCellsRefuseDamage(t *testing.T) {
	whole, err := pack([]driver.Value{1.5, "abc"})
	if err != nil {
		t.Fatal(err)
	}
	cells := make(packedCells, 2)
	if err := cells.Scan(whole); err != nil {
		t.Fatal(err)
	}
	for n := range whole {
		if cells.Scan(whole[:n]) == nil {
			t.Errorf("%d of %d bytes were taken for a row", n, len(whole))
		}
	}
	for _, bad := range []any{nil, "text", append(whole, 'n'), []byte("xx"), []byte("t\xff\xff\xff\xff\xff\xff\xff\xff\xff\x01n")} {
		if cells.Scan(bad) == nil {
			t.Errorf("%q was taken for a row", bad)
		}
	}
}
