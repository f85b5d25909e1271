package catalogue

import (
	"database/sql"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// refusedNow asks for a write that must fail for the moment, saying why, and
// leave nothing behind.
func refusedNow(t *testing.T, s *Store, want string) {
	t.Helper()
	before, _ := s.Revision(ctx)
	err := s.InsertRows(ctx, many(40), nil, 0, "")
	if CodeOf(err) != Unavailable || !strings.Contains(err.Error(), want) {
		t.Errorf("got %v (%s), want %q", err, CodeOf(err), want)
	}
	if after, err := s.Revision(ctx); err != nil || after != before {
		t.Errorf("revision %d, was %d, %v", after, before, err)
	}
	if _, err := s.Rows(ctx, Filter{}); err != nil {
		t.Errorf("reading: %v", err)
	}
}

// takesAgain asks for a write that must work without opening the file anew, and
// looks the file through.
func takesAgain(t *testing.T, s *Store) {
	t.Helper()
	if err := s.InsertRows(ctx, many(40), nil, 0, ""); err != nil {
		t.Errorf("after it was put right: %v", err)
	}
	if faults, err := s.Integrity(ctx); err != nil || len(faults) > 0 {
		t.Errorf("faults %v, %v", faults, err)
	}
}

func TestFullDiskStoresNothingAndRecovers(t *testing.T) {
	s := open(t)
	insert(t, s, row("First", 1, 2, 1.2))
	var pages int
	if err := s.w.QueryRow(`PRAGMA page_count`).Scan(&pages); err != nil {
		t.Fatal(err)
	}
	// SQLite answers as on a full disk when the file may not grow.
	if _, err := s.w.Exec(fmt.Sprintf(`PRAGMA max_page_count = %d`, pages)); err != nil {
		t.Fatal(err)
	}
	refusedNow(t, s, "disk with the catalogue is full")
	if _, err := s.w.Exec(`PRAGMA max_page_count = 1000000`); err != nil {
		t.Fatal(err)
	}
	takesAgain(t, s)
}

func TestLockedFileStoresNothingAndRecovers(t *testing.T) {
	s := open(t)
	insert(t, s, row("First", 1, 2, 1.2))
	if _, err := s.w.Exec(`PRAGMA busy_timeout = 50`); err != nil {
		t.Fatal(err)
	}
	other, err := sql.Open("sqlite", fileURI(s.path)+"?_txlock=immediate")
	if err != nil {
		t.Fatal(err)
	}
	defer other.Close()
	tx, err := other.Begin()
	if err != nil {
		t.Fatal(err)
	}
	refusedNow(t, s, "holds the catalogue locked")
	if err := tx.Rollback(); err != nil {
		t.Fatal(err)
	}
	takesAgain(t, s)
}

func TestFileThatMayNotBeWritten(t *testing.T) {
	s := open(t)
	insert(t, s, row("First", 1, 2, 1.2))
	if _, err := s.w.Exec(`PRAGMA query_only = 1`); err != nil { // the code of a read-only file
		t.Fatal(err)
	}
	refusedNow(t, s, "may not be written")
	if _, err := s.w.Exec(`PRAGMA query_only = 0`); err != nil {
		t.Fatal(err)
	}
	takesAgain(t, s)
}

func TestHealthSeesAFileMovedAway(t *testing.T) {
	s := open(t)
	if err := s.Health(ctx); err != nil {
		t.Fatal(err)
	}
	if err := os.Rename(s.path, s.path+".moved"); err != nil {
		t.Fatal(err)
	}
	if err := s.Health(ctx); CodeOf(err) != Unavailable {
		t.Errorf("moved away: %v", err)
	}
	if err := os.Rename(s.path+".moved", s.path); err != nil {
		t.Fatal(err)
	}
	if err := s.Health(ctx); err != nil {
		t.Error(err)
	}
}

func TestChecksumBesideABackup(t *testing.T) {
	s := open(t)
	insert(t, s, many(5)...)
	dir := t.TempDir()
	copied := filepath.Join(dir, "b.db")
	if err := s.BackupWithChecksum(ctx, copied); err != nil {
		t.Fatal(err)
	}
	if present, err := VerifyChecksum(copied); !present || err != nil {
		t.Fatal(present, err)
	}
	if present, err := VerifyChecksum(s.path); present || err != nil {
		t.Error(present, err)
	}
	b, err := os.ReadFile(copied)
	if err != nil {
		t.Fatal(err)
	}
	b[len(b)-1] ^= 1 // a bit in free space, which SQLite itself would not miss
	if err := os.WriteFile(copied, b, 0o600); err != nil {
		t.Fatal(err)
	}
	if _, err := VerifyChecksum(copied); CodeOf(err) != Invalid {
		t.Errorf("a changed bit: %v", err)
	}
	if err := Restore(ctx, copied, filepath.Join(dir, "r.db")); CodeOf(err) != Invalid {
		t.Errorf("restoring it: %v", err)
	}
}

// A read-only opening looks through the text index too.
func TestReadOnlyIntegrityReadsTheTextIndex(t *testing.T) {
	s := open(t)
	insert(t, s, many(3)...)
	if _, err := s.w.Exec(`DROP TRIGGER search_before; UPDATE measurements SET notes = 'unseen words' WHERE id = 1`); err != nil {
		t.Fatal(err)
	}
	r, err := Open(ctx, s.path, Options{ReadOnly: true})
	if err != nil {
		t.Fatal(err)
	}
	defer r.Close()
	faults, err := r.Integrity(ctx)
	if err != nil || !strings.Contains(strings.Join(faults, " "), "text index") {
		t.Errorf("%q %v", faults, err)
	}
}
