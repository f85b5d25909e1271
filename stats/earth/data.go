package earth

import (
	"embed"
	"encoding/csv"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"
	"sync"
)

// The built-in tables. Each file starts with "#" lines that name its source
// and licence; Credits returns them for the methods page.
//
//go:embed data/*.csv
var files embed.FS

// Credit is the head of one built-in table.
type Credit struct {
	Table string   // file name
	Lines []string // its "#" lines, without the mark
}

// Credits returns the credit lines of every built-in table.
func Credits() []Credit {
	var out []Credit
	for _, name := range []string{"ics.csv", "earthmoon_farhat2022.csv", "lod_geological.csv", "apwp_vaes2023.csv", "apwp_besse_courtillot2002.csv", "climate_states.csv"} {
		b, err := files.ReadFile("data/" + name)
		if err != nil {
			panic(err) // embedded at build time
		}
		c := Credit{Table: name}
		for line := range strings.Lines(string(b)) {
			if !strings.HasPrefix(line, "#") {
				break
			}
			c.Lines = append(c.Lines, strings.TrimSpace(strings.TrimPrefix(line, "#")))
		}
		out = append(out, c)
	}
	return out
}

// record is one line of a table by column name.
type record map[string]string

func (r record) text(name string) string { return strings.TrimSpace(r[name]) }

// number is NaN where the cell is empty or no number.
func (r record) number(name string) float64 {
	v, err := strconv.ParseFloat(r.text(name), 64)
	if err != nil {
		return math.NaN()
	}
	return v
}

// readRecords reads a table with a header row; "#" lines are comments.
func readRecords(in io.Reader) ([]record, error) {
	c := csv.NewReader(in)
	c.Comment = '#'
	head, err := c.Read()
	if err != nil {
		return nil, err
	}
	var out []record
	for {
		row, err := c.Read()
		if err == io.EOF {
			return out, nil
		}
		if err != nil {
			return nil, err
		}
		r := record{}
		for i, name := range head {
			r[strings.TrimSpace(name)] = row[i]
		}
		out = append(out, r)
	}
}

// builtIn reads an embedded table; a broken one is a fault of the build.
func builtIn(name string) []record {
	f, err := files.Open("data/" + name)
	if err != nil {
		panic(err)
	}
	defer f.Close()
	out, err := readRecords(f)
	if err != nil {
		panic(fmt.Sprintf("%s: %v", name, err))
	}
	return out
}

// table reads an embedded table once.
func table[T any](name string, build func([]record) T) func() T {
	return sync.OnceValue(func() T { return build(builtIn(name)) })
}
