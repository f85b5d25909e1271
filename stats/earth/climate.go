package earth

import (
	"fmt"
	"io"
	"math"
)

// ClimateState is an interval of geological time with its climate state.
type ClimateState struct {
	Name   string  `json:"name"`
	BaseMa float64 `json:"base_ma"`
	TopMa  float64 `json:"top_ma"`
	State  string  `json:"state"` // icehouse, greenhouse, cool greenhouse
	Note   string  `json:"note,omitempty"`
	Source string  `json:"source,omitempty"`
	Tag    string  `json:"tag,omitempty"` // published, or memory: the boundary is from memory
}

// ClimateTable is a list of climate states; users may bring their own.
type ClimateTable []ClimateState

var climate = table("climate_states.csv", climateFrom)

func climateFrom(rows []record) ClimateTable {
	var out ClimateTable
	for _, r := range rows {
		out = append(out, ClimateState{
			Name: r.text("name"), BaseMa: r.number("base_ma"), TopMa: r.number("top_ma"),
			State: r.text("state"), Note: r.text("note"), Source: r.text("source"), Tag: r.text("tag"),
		})
	}
	return out
}

// ClimateStates returns the built-in table, youngest first.
func ClimateStates() ClimateTable { return append(ClimateTable(nil), climate()...) }

// ParseClimateTable reads a user's table with the columns name, base_ma,
// top_ma, state and, if wanted, note, source, tag.
func ParseClimateTable(in io.Reader) (ClimateTable, error) {
	rows, err := readRecords(in)
	if err != nil {
		return nil, &InputError{"climate_table", "the table could not be read: expected comma-separated text with the header name,base_ma,top_ma,state"}
	}
	t := climateFrom(rows)
	if len(t) == 0 {
		return nil, &InputError{"climate_table", "the table has no rows below its header. Expected one row a state"}
	}
	for i, c := range t {
		if c.State == "" || math.IsNaN(c.BaseMa) || math.IsNaN(c.TopMa) || c.BaseMa <= c.TopMa || c.TopMa < 0 {
			return nil, &InputError{"climate_table", fmt.Sprintf("line %d: expected base_ma above top_ma, both in Ma, and a state", i+2)}
		}
	}
	return t, nil
}

// At returns the state at an age in Ma; an age on a boundary belongs to the
// older interval. false where the table has none.
func (t ClimateTable) At(ageMa float64) (ClimateState, bool) {
	for _, c := range t {
		if ageMa >= c.TopMa && ageMa < c.BaseMa {
			return c, true
		}
	}
	return ClimateState{}, false
}

// ClimateStateAt looks the age up in the built-in table.
func ClimateStateAt(ageMa float64) (ClimateState, bool) { return climate().At(ageMa) }
