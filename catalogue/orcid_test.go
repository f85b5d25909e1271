package catalogue

import (
	"strings"
	"testing"
)

// The iDs are those of the registry's own documentation of the structure of
// the identifier (from memory); the first one worked by hand: digits
// 000000021825009 give the running total 1314, 1314 mod 11 = 5,
// (12 - 5) mod 11 = 7.
func TestParseORCID(t *testing.T) {
	for in, want := range map[string]string{
		"0000-0002-1825-0097":                    "0000-0002-1825-0097",
		" https://orcid.org/0000-0002-1825-0097": "0000-0002-1825-0097",
		"0000000151093700":                       "0000-0001-5109-3700",
		"0000-0002-1694-233x":                    "0000-0002-1694-233X",
		"":                                       "",
	} {
		if got, err := ParseORCID(in); got != want || err != nil {
			t.Errorf("%q: got %q, %v; want %q", in, got, err, want)
		}
	}
	for _, in := range []string{"0000-0002-1825-0098", "0000-0002-1285-0097", "0000-0002-1694-2330", "12", "0000-0002-1825-00977", "000X-0002-1825-0097", "0000-0002-1825-009é"} {
		if got, err := ParseORCID(in); err == nil || CodeOf(err) != Invalid {
			t.Errorf("%q: got %q, %v; want it refused", in, got, err)
		}
	}
}

// MOD 11-2 finds every single wrong digit and every swap of neighbours.
func TestORCIDCheckFindsSlips(t *testing.T) {
	const good = "0000-0002-1825-0097"
	plain := strings.ReplaceAll(good, "-", "")
	for i := range plain {
		for d := byte('0'); d <= '9'; d++ {
			b := []byte(plain)
			if b[i] == d {
				continue
			}
			b[i] = d
			if _, err := ParseORCID(string(b)); err == nil {
				t.Errorf("%s with digit %d as %c is accepted", good, i, d)
			}
		}
		if i+1 < len(plain) && plain[i] != plain[i+1] {
			b := []byte(plain)
			b[i], b[i+1] = b[i+1], b[i]
			if _, err := ParseORCID(string(b)); err == nil {
				t.Errorf("%s with digits %d and %d swapped is accepted", good, i, i+1)
			}
		}
	}
}
