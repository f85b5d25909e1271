package catalogue

import (
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"sync"
	"testing"
)

func TestBackupAndRestore(t *testing.T) {
	s := open(t)
	account(t, s, "ada", "keeper")
	insert(t, s, many(20)...)
	dir := t.TempDir()
	copied := filepath.Join(dir, "backup.db")
	stop := make(chan struct{})
	var wg sync.WaitGroup
	wg.Go(func() { // backing up while someone writes
		for i := 0; ; i++ {
			select {
			case <-stop:
				return
			default:
				if err := s.InsertRows(ctx, []Row{row(fmt.Sprintf("During %d", i), 1, 2, 1.5)}, nil, 0, ""); err != nil {
					t.Error(err)
					return
				}
			}
		}
	})
	err := s.Backup(ctx, copied)
	close(stop)
	wg.Wait()
	if err != nil {
		t.Fatal(err)
	}
	if info, err := os.Stat(copied); err != nil || info.Mode().Perm() != 0o600 {
		t.Errorf("%v %v", info.Mode(), err)
	}
	if err := s.Backup(ctx, copied); CodeOf(err) != Conflict {
		t.Errorf("an existing file: %v", err)
	}
	if err := s.Backup(ctx, filepath.Join(dir, "none", "x.db")); CodeOf(err) != Invalid {
		t.Errorf("a missing folder: %v", err)
	}
	restored := filepath.Join(dir, "restored.db")
	if err := Restore(ctx, copied, restored); err != nil {
		t.Fatal(err)
	}
	r, err := Open(ctx, restored, Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer r.Close()
	rows, err := r.Rows(ctx, Filter{})
	if err != nil || len(rows) < 40 {
		t.Errorf("%d rows, %v", len(rows), err)
	}
	if _, err := r.Authenticate(ctx, "ada", "correct horse ada"); err != nil {
		t.Error(err)
	}
	if faults, err := r.CheckIntegrity(ctx); err != nil || len(faults) > 0 {
		t.Error(faults, err)
	}
	left, _ := filepath.Glob(filepath.Join(dir, ".copy-*"))
	if len(left) > 0 {
		t.Errorf("left behind: %v", left)
	}
	text := filepath.Join(dir, "text.db")
	if err := os.WriteFile(text, []byte(strings.Repeat("no catalogue ", 500)), 0o644); err != nil {
		t.Fatal(err)
	}
	if err := Restore(ctx, text, filepath.Join(dir, "y.db")); CodeOf(err) != Invalid {
		t.Error(err)
	}
	if _, err := os.Stat(filepath.Join(dir, "y.db")); err == nil {
		t.Error("a refused restore made a file")
	}
}

func TestIntegrityFindsFaults(t *testing.T) {
	for want, harm := range map[string]string{
		"refers to nothing in systems": `PRAGMA foreign_keys = 0; UPDATE measurements SET system_id = 999 WHERE id = 1`,
		"place index, or another one":  `UPDATE places SET west = 5, east = 5 WHERE id = 1`,
		"belong to no measurement":     `INSERT INTO places VALUES (999, 0, 0, 0, 0)`,
		"not in the text index":        `DELETE FROM search_docsize WHERE id = 1`,
		"text index does not agree":    `DROP TRIGGER search_before; UPDATE measurements SET notes = 'unseen words' WHERE id = 1`,
	} {
		s := open(t)
		insert(t, s, many(3)...)
		if faults, err := s.Integrity(ctx); err != nil || len(faults) > 0 {
			t.Fatal(faults, err)
		}
		if _, err := s.w.ExecContext(ctx, harm); err != nil {
			t.Fatal(err)
		}
		faults, err := s.Integrity(ctx)
		if err != nil || !strings.Contains(strings.Join(faults, "\n"), want) {
			t.Errorf("%s: %q %v", harm, faults, err)
		}
	}
}
