package catalogue

import (
	"context"
	"crypto/sha256"
	"database/sql"
	"encoding/hex"
	"errors"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
)

// ChecksumSuffix is added to the name of a backup for the file that holds its
// SHA-256, in the form that sha256sum -c reads.
const ChecksumSuffix = ".sha256"

// BackupWithChecksum is Backup, with the SHA-256 of the copy beside it. A copy
// whose checksum cannot be written is taken away again.
func (s *Store) BackupWithChecksum(ctx context.Context, path string) error {
	if err := s.Backup(ctx, path); err != nil {
		return err
	}
	sum, err := fileSum(path)
	if err == nil {
		err = writeSynced(path+ChecksumSuffix, sum+"  "+filepath.Base(path)+"\n")
	}
	if err != nil {
		return errors.Join(fault("backup", err), os.Remove(path))
	}
	return nil
}

// VerifyChecksum compares the file at path with the checksum beside it. There
// need not be one: present says whether there was.
func VerifyChecksum(path string) (present bool, err error) {
	text, err := os.ReadFile(path + ChecksumSuffix)
	if errors.Is(err, fs.ErrNotExist) {
		return false, nil
	}
	if err != nil {
		return true, fault("checksum", err)
	}
	want, _, _ := strings.Cut(string(text), " ")
	got, err := fileSum(path)
	if err != nil {
		return true, fault("checksum", err)
	}
	if got != strings.TrimSpace(want) {
		return true, &Error{Code: Invalid, Field: "file", Message: path + " is not the file whose checksum was written beside it: it was damaged or changed afterwards", Expected: "the backup as it was made, or another one"}
	}
	return true, nil
}

func fileSum(path string) (string, error) {
	f, err := os.Open(path)
	if err != nil {
		return "", err
	}
	defer f.Close()
	h := sha256.New()
	if _, err := io.Copy(h, f); err != nil {
		return "", err
	}
	return hex.EncodeToString(h.Sum(nil)), nil
}

func writeSynced(path, text string) error {
	f, err := os.OpenFile(path, os.O_CREATE|os.O_WRONLY|os.O_TRUNC, 0o600)
	if err != nil {
		return err
	}
	_, err = io.WriteString(f, text)
	return errors.Join(err, f.Sync(), f.Close())
}

// textFaultsOfCopy compares the text index with the records, word by word, in
// a temporary copy: the comparison is a command, which a read-only connection
// refuses.
func (s *Store) textFaultsOfCopy(ctx context.Context) ([]string, error) {
	dir, err := os.MkdirTemp("", "fathombend-check-")
	if err != nil {
		return nil, err
	}
	defer os.RemoveAll(dir)
	from, err := s.alone("")
	if err != nil {
		return nil, err
	}
	defer from.Close()
	part := filepath.Join(dir, "copy.db")
	if _, err := from.ExecContext(ctx, `VACUUM INTO ?`, part); err != nil {
		return nil, err
	}
	db, err := sql.Open("sqlite", fileURI(part)+"?_pragma=synchronous(OFF)")
	if err != nil {
		return nil, err
	}
	defer db.Close()
	return textFaults(ctx, db), nil
}

func textFaults(ctx context.Context, db querier) []string {
	if _, err := db.ExecContext(ctx, `INSERT INTO search (search, rank) VALUES ('integrity-check', 1)`); err != nil {
		return []string{"the text index does not agree with the records; rebuild it"}
	}
	return nil
}

// Health says whether the catalogue can be read, and still lies where it was
// opened: a file moved away goes on being read but not by the next start.
func (s *Store) Health(ctx context.Context) error {
	if _, err := s.Revision(ctx); err != nil {
		return err
	}
	if _, err := os.Stat(s.path); err != nil {
		return fault("health", err)
	}
	return nil
}

// Size is the size of the catalogue's file and of the changes that wait beside
// it to be taken in, bytes.
func (s *Store) Size() (file, waiting int64) {
	if st, err := os.Stat(s.path); err == nil {
		file = st.Size()
	}
	if st, err := os.Stat(s.path + "-wal"); err == nil {
		waiting = st.Size()
	}
	return file, waiting
}
