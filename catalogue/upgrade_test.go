package catalogue

import (
	"bytes"
	"compress/gzip"
	"encoding/csv"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// keptVersion unpacks the small catalogue that schema n wrote (.ci/keep-version).
func keptVersion(t *testing.T, n int) string {
	t.Helper()
	f, err := os.Open(fmt.Sprintf("testdata/versions/%04d.db.gz", n))
	if err != nil {
		t.Fatalf("no catalogue of schema %d is kept; run .ci/keep-version: %v", n, err)
	}
	defer f.Close()
	z, err := gzip.NewReader(f)
	if err != nil {
		t.Fatal(err)
	}
	b, err := io.ReadAll(z)
	if err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(t.TempDir(), "old.db")
	if err := os.WriteFile(path, b, 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

// A catalogue of every schema there ever was opens, has today's schema
// afterwards, and lost nothing: rows, people, the queue, the history.
func TestUpgradeFromEverySchema(t *testing.T) {
	wantSchema := schemaOf(t, open(t))
	for n := 1; n <= SchemaVersion(); n++ {
		t.Run(fmt.Sprint(n), func(t *testing.T) {
			path := keptVersion(t, n)
			if n < SchemaVersion() {
				if _, err := Open(ctx, path, Options{ReadOnly: true}); CodeOf(err) != Invalid || !strings.Contains(err.Error(), "open it once with write access") {
					t.Errorf("read only, before it is brought up to date: %v", err)
				}
			}
			s, err := Open(ctx, path, Options{})
			if err != nil {
				t.Fatal(err)
			}
			defer s.Close()
			if got := schemaOf(t, s); got != wantSchema {
				t.Errorf("the schema differs from a new one's:\n%s", got)
			}
			sameTable(t, s, fmt.Sprintf("testdata/versions/%04d.csv", n))
			if a, err := s.Authenticate(ctx, "ann", "ebb and flood 42"); err != nil || a.Role != "curator" || a.Credit != "A. Reef" {
				t.Errorf("the account: %+v %v", a, err)
			}
			if waiting, err := s.CountSubmissions(ctx, "submitted", 0); err != nil || waiting != 1 {
				t.Errorf("%d wait, %v", waiting, err)
			}
			d, err := s.System(ctx, "loom-channel")
			if err != nil || len(d.History) < 2 {
				t.Errorf("history: %d, %v", len(d.History), err)
			}
			if found, _, err := s.Systems(ctx, Filter{Text: "quotes"}); err != nil || len(found) != 1 {
				t.Errorf("text search: %d, %v", len(found), err)
			}
			insert(t, s, row("After the upgrade", 1, 2, 1.2))
			if faults, err := s.Integrity(ctx); err != nil || len(faults) > 0 {
				t.Error(faults, err)
			}
		})
	}
}

// sameTable compares the export with the one the old program wrote, column by
// column of the old one: a newer schema may have more.
func sameTable(t *testing.T, s *Store, file string) {
	t.Helper()
	kept, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	want, err := csv.NewReader(bytes.NewReader(kept)).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var now bytes.Buffer
	if _, err := s.Export(ctx, &now, Filter{}); err != nil {
		t.Fatal(err)
	}
	got, err := csv.NewReader(&now).ReadAll()
	if err != nil || len(got) != len(want) || len(want) < 4 {
		t.Fatalf("%d lines, want %d, %v", len(got), len(want), err)
	}
	place := map[string]int{}
	for i, name := range got[0] {
		place[name] = i
	}
	for c, name := range want[0] {
		at, ok := place[name]
		if !ok {
			t.Errorf("column %s is gone", name)
			continue
		}
		for r := range want {
			if got[r][at] != want[r][c] {
				t.Errorf("row %d, %s: %q, was %q", r, name, got[r][at], want[r][c])
			}
		}
	}
}
