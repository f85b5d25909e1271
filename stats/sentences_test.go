package stats

import (
	"context"
	"strings"
	"testing"
)

// A slope of 3 in the m/m column is 3 degrees typed in the wrong unit; it rules
// the line, and the page must say so. The limits are common practice, no source.
func TestOddSlopeIsNamed(t *testing.T) {
	rows := referenceRows(t)
	req := DefaultRequest()
	req.Resamples, req.Permutations = 199, 99
	says := func() bool {
		a, err := Analyse(context.Background(), rows, req, nil)
		if err != nil {
			t.Fatal(err)
		}
		for _, w := range a.Warnings {
			if strings.Contains(w, "is it degrees or per mille?") && strings.Contains(w, ": 3)") {
				return true
			}
		}
		return false
	}
	if says() {
		t.Error("a warning of an odd slope where none is odd")
	}
	rows[0].ValleySlope = 3
	if !says() {
		t.Error("no warning of a valley slope of 3 m/m")
	}
}
