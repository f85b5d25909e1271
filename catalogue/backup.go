package catalogue

import (
	"context"
	"database/sql"
	"errors"
	"os"
	"path/filepath"
	"strconv"
)

// Backup writes a whole copy of the catalogue, as of one moment, into the new
// file at path, while others go on reading and writing. The copy is checked
// before it is given its name; an existing file is never overwritten.
func (s *Store) Backup(ctx context.Context, path string) error {
	return newFile(path, func(part string) error {
		// VACUUM INTO counts as writing, though not into this file, so a
		// connection marked query_only refuses it.
		db, err := s.alone("")
		if err != nil {
			return fault("backup", err)
		}
		defer db.Close()
		if _, err := db.ExecContext(ctx, `VACUUM INTO ?`, part); err != nil {
			return fault("backup", err)
		}
		return checkedCopy(ctx, part)
	})
}

// Restore makes the new catalogue at path from the backup at from, checking
// the backup first, also against its checksum if that lies beside it.
func Restore(ctx context.Context, from, path string) error {
	if _, err := VerifyChecksum(from); err != nil {
		return err
	}
	s, err := Open(ctx, from, Options{ReadOnly: true})
	if err != nil {
		return err
	}
	defer s.Close()
	return s.Backup(ctx, path)
}

// newFile lets fill write a file beside path and gives it the name path only
// when it is whole and the name is still free.
func newFile(path string, fill func(part string) error) error {
	taken := &Error{Code: Conflict, Field: "file", Message: path + " exists already; it is not overwritten", Expected: "the name of a new file"}
	if _, err := os.Lstat(path); err == nil {
		return taken
	}
	dir, err := os.MkdirTemp(filepath.Dir(path), ".copy-*")
	if err != nil {
		return &Error{Code: Invalid, Field: "file", Message: "the copy cannot be written to " + filepath.Dir(path), Expected: "a folder that exists and may be written", Cause: err}
	}
	defer os.RemoveAll(dir)
	part := filepath.Join(dir, "part.db")
	if err := fill(part); err != nil {
		return err
	}
	if err := syncFile(part); err != nil {
		return fault("backup", err)
	}
	// A link fails when the name was taken meanwhile; a rename would overwrite.
	switch err := os.Link(part, path); {
	case errors.Is(err, os.ErrExist):
		return taken
	case err != nil:
		return fault("backup", os.Rename(part, path))
	}
	return nil
}

func syncFile(path string) error {
	if err := os.Chmod(path, 0o600); err != nil { // it holds password hashes
		return err
	}
	f, err := os.OpenFile(path, os.O_RDWR, 0)
	if err != nil {
		return err
	}
	defer f.Close()
	return f.Sync()
}

func checkedCopy(ctx context.Context, path string) error {
	db, err := sql.Open("sqlite", fileURI(path)+"?mode=ro")
	if err != nil {
		return fault("backup", err)
	}
	defer db.Close()
	if err := checkVersion(ctx, db); err != nil {
		return err
	}
	faults, err := databaseFaults(ctx, db)
	if err != nil {
		return fault("backup", err)
	}
	if len(faults) > 0 {
		return &Error{Code: Invalid, Message: "the catalogue is damaged, so no copy was made: " + faults[0], Expected: "a sound catalogue; " + strconv.Itoa(len(faults)) + " faults were found"}
	}
	return nil
}
