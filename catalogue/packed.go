package catalogue

import (
	"database/sql/driver"
	"encoding/binary"
	"errors"
	"fmt"
	"math"

	"modernc.org/sqlite"
)

// packed(a, b, ...) is one blob that holds all its arguments. Reading a cell of
// an answer costs several locks and copies whatever it holds, so that a row of
// some seventy cells is read four times as fast as one of them. Each value is a
// letter and its bytes:
//
//	n                    NULL
//	i, f  8 bytes        integer, float; little-endian
//	t     length, bytes  text; the length as an unsigned varint
//
// Blobs are refused: no column of a row is one.
const packedFunction = "packed"

func init() {
	sqlite.MustRegisterFunction(packedFunction, &sqlite.FunctionImpl{
		NArgs: -1, Deterministic: true,
		VolatileArgs: true, // pack copies what it is given
		Scalar:       func(_ *sqlite.FunctionContext, args []driver.Value) (driver.Value, error) { return pack(args) },
	})
}

func pack(args []driver.Value) ([]byte, error) {
	size := 0
	for _, a := range args {
		size += 9
		if s, ok := a.(string); ok {
			size += len(s)
		}
	}
	b := make([]byte, 0, size)
	for _, a := range args {
		switch v := a.(type) {
		case nil:
			b = append(b, 'n')
		case int64:
			b = binary.LittleEndian.AppendUint64(append(b, 'i'), uint64(v))
		case float64:
			b = binary.LittleEndian.AppendUint64(append(b, 'f'), math.Float64bits(v))
		case string:
			b = append(binary.AppendUvarint(append(b, 't'), uint64(len(v))), v...)
		default:
			return nil, fmt.Errorf("%s() takes no %T", packedFunction, a)
		}
	}
	return b, nil
}

// packedCell is one value of packed(). text is a view of the blob.
type packedCell struct {
	kind    byte
	integer int64
	number  float64
	text    []byte
}

// num is the cell as a number, NaN where it is none.
func (c *packedCell) num() float64 {
	switch c.kind {
	case 'f':
		return c.number
	case 'i':
		return float64(c.integer)
	}
	return math.NaN()
}

// packedCells reads a blob of packed() as a sql.Scanner. It is reused from row
// to row; its cells are valid until the next one.
type packedCells []packedCell

var errPacked = errors.New("a packed row is damaged")

// Scan takes a blob of as many values as there are cells.
func (p packedCells) Scan(src any) error {
	b, ok := src.([]byte)
	if !ok {
		return errPacked
	}
	for i := range p {
		c := &p[i]
		if len(b) == 0 {
			return errPacked
		}
		*c, b = packedCell{kind: b[0]}, b[1:]
		switch c.kind {
		case 'n':
		case 'i', 'f':
			if len(b) < 8 {
				return errPacked
			}
			bits := binary.LittleEndian.Uint64(b)
			c.integer, c.number, b = int64(bits), math.Float64frombits(bits), b[8:]
		case 't':
			size, n := binary.Uvarint(b)
			if n <= 0 || size > uint64(len(b)-n) {
				return errPacked
			}
			c.text, b = b[n:n+int(size)], b[n+int(size):]
		default:
			return errPacked
		}
	}
	if len(b) > 0 {
		return errPacked
	}
	return nil
}

// words keeps one copy of texts of which there are few.
type words map[string]string

func (w words) of(b []byte) string {
	if s, ok := w[string(b)]; ok {
		return s
	}
	s := string(b)
	w[s] = s
	return s
}
