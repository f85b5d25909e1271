package catalogue

import (
	"bytes"
	"encoding/csv"
	"math"
	"testing"
)

// The lines of Export are those of encoding/csv on the Records of the rows.
func TestExportWritesWhatTheCSVWriterWrites(t *testing.T) {
	texts := []string{"", "plain", "a,b", `say "so"`, "two\nlines", "cr\r\nlf", " led by a blank", "\u00a0led", `\.`, "=1+1", "'=1", "'quoted'", "-5", "+x,\"y\"", "\t", "ärger 水", "\xff", "@", "a\x00b", "''@a"}
	numbers := []float64{0, 0.1, 1e6, 1e21, 1e-7, -3.25, math.Copysign(0, -1), math.Pi, 123456789}
	cells := make(packedCells, len(Columns))
	record := make([]string, len(Columns))
	var want bytes.Buffer
	out := csv.NewWriter(&want)
	var got []byte
	for n := range len(texts) * len(numbers) {
		var r Row
		for i := range Columns {
			cells[i] = packedCell{kind: 'n'}
			switch c := &Columns[i]; {
			case (n+i)%7 == 0:
				if c.num == nil {
					cells[i].kind = 't'
				}
			case c.num != nil:
				v := numbers[(n+i)%len(numbers)]
				*c.num(&r), cells[i] = Num(v), packedCell{kind: 'f', number: v}
			default:
				v := texts[(n+i)%len(texts)]
				*c.text(&r), cells[i] = v, packedCell{kind: 't', text: []byte(v)}
			}
		}
		Record(&r, record)
		if err := out.Write(record); err != nil {
			t.Fatal(err)
		}
		got = appendRecord(got, cells)
	}
	out.Flush()
	if w, g := bytes.Split(want.Bytes(), []byte("\n")), bytes.Split(got, []byte("\n")); !bytes.Equal(want.Bytes(), got) {
		for i := range min(len(w), len(g)) {
			if !bytes.Equal(w[i], g[i]) {
				t.Fatalf("line %d\n got %q\nwant %q", i, g[i], w[i])
			}
		}
		t.Fatalf("%d lines, want %d", len(g), len(w))
	}
}
