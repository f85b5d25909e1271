package catalogue

import (
	"crypto/sha256"
	"encoding/json"
)

// encodeRow writes the given cells of a row as JSON, column -> text. Numbers
// come back as the same doubles. Blank choices stay blank: "not said".
func encodeRow(r *Row) (string, error) {
	cells := map[string]string{}
	for i := range Columns {
		if v := Columns[i].Get(r); v != "" {
			cells[Columns[i].Name] = v
		}
	}
	b, err := json.Marshal(cells) // keys sorted
	return string(b), err
}

// decodeRow is the way back. Cells no longer valid under newer limits are left
// blank rather than losing the rest.
func decodeRow(text string) (Row, error) {
	var r Row
	cells := map[string]string{}
	if err := json.Unmarshal([]byte(text), &cells); err != nil {
		return r, err
	}
	for i := range Columns {
		if v, ok := cells[Columns[i].Name]; ok {
			_ = Columns[i].Set(&r, v)
		}
	}
	return r, nil
}

// fingerprint identifies equal proposals.
func fingerprint(encoded string, line string) []byte {
	h := sha256.New()
	h.Write([]byte(encoded))
	h.Write([]byte{0})
	h.Write([]byte(line))
	return h.Sum(nil)
}

func encodeMap(m map[string]string) (string, error) {
	if len(m) == 0 {
		return "{}", nil
	}
	b, err := json.Marshal(m)
	return string(b), err
}

func encodeWindows(x []float64) (string, error) {
	if len(x) == 0 {
		return "[]", nil
	}
	b, err := json.Marshal(x)
	return string(b), err
}

func decodeWindows(text string) (x []float64, err error) {
	if text != "[]" {
		err = json.Unmarshal([]byte(text), &x)
	}
	return x, err
}
