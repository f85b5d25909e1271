package catalogue

import (
	"errors"
	"io/fs"
	"syscall"

	sqlite3 "modernc.org/sqlite/lib"
)

// unavailable is the Error for a failure of the disk or of a lock, nil for any
// other. Each sentence says what is wrong and Expected what puts it right;
// SQLite has rolled the change back, and the next one is tried afresh, so no
// restart is needed.
func unavailable(err error) *Error {
	e := &Error{Code: Unavailable}
	switch code := sqliteCode(err); {
	case code == sqlite3.SQLITE_FULL, errors.Is(err, syscall.ENOSPC), errors.Is(err, syscall.EDQUOT):
		e.Message, e.Expected = "the disk with the catalogue is full; nothing was stored or changed", "free space on that disk, then the same again"
	case code == sqlite3.SQLITE_READONLY, errors.Is(err, syscall.EROFS):
		e.Message, e.Expected = "the catalogue may not be written at present; nothing was stored or changed", "a file and a folder that the program may write, then the same again"
	case code == sqlite3.SQLITE_BUSY, code == sqlite3.SQLITE_LOCKED:
		e.Message, e.Expected = "another program holds the catalogue locked; nothing was stored or changed", "the same again in a minute"
	case code == sqlite3.SQLITE_CANTOPEN, errors.Is(err, fs.ErrNotExist):
		e.Message, e.Expected = "the file of the catalogue cannot be opened; nothing was stored or changed", "the folder of the catalogue back in its place, then the same again"
	case code == sqlite3.SQLITE_IOERR:
		e.Message, e.Expected = "the disk with the catalogue cannot be read or written; nothing was stored or changed", "a working disk, then the same again"
	case code == sqlite3.SQLITE_CORRUPT, code == sqlite3.SQLITE_NOTADB:
		e.Message, e.Expected = "the file of the catalogue is damaged; nothing was stored or changed", "a backup put in its place with the command restore"
	default:
		return nil
	}
	return e
}
