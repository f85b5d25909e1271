package main

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"io/fs"
	"log/slog"
	"os"
	"path/filepath"
	"regexp"
	"slices"
	"sync"
	"time"

	"fathombend/catalogue"
)

// backups makes a checked copy of the catalogue now and then and keeps the
// newest ones.
type backups struct {
	store *catalogue.Store
	log   *slog.Logger
	dir   string
	every time.Duration
	keep  int
	now   func() time.Time

	mu       sync.Mutex
	last     time.Time // of the newest copy in dir, zero if none
	failures int       // since the program started
	problem  string    // why the last try failed, "" if it did not
}

// Shortest time between two scheduled copies, and how long a failed one waits
// for the next try.
const (
	shortestBackup = time.Minute
	backupRetry    = 10 * time.Minute
)

// backupName is what scheduled copies are called; nothing else in the folder is
// ever deleted.
var backupName = regexp.MustCompile(`^fathombend-(\d{8}T\d{6}Z)\.db$`)

const backupStamp = "20060102T150405Z"

// newBackups looks into the folder for the copies that are there. A folder that
// does not exist is made, for its owner only: copies hold password hashes.
func newBackups(store *catalogue.Store, log *slog.Logger, dir string, every time.Duration, keep int) (*backups, error) {
	b := &backups{store: store, log: log, dir: dir, every: every, keep: keep, now: time.Now}
	if err := os.MkdirAll(dir, 0o700); err != nil {
		return nil, fmt.Errorf("the folder for backups cannot be made: %w", err)
	}
	held, err := b.held()
	if err != nil {
		return nil, fmt.Errorf("the folder for backups cannot be read: %w", err)
	}
	if len(held) > 0 {
		b.last = held[len(held)-1].at
	}
	return b, nil
}

type heldBackup struct {
	path string
	at   time.Time
}

// held lists the scheduled copies in the folder, oldest first.
func (b *backups) held() ([]heldBackup, error) {
	entries, err := os.ReadDir(b.dir)
	if err != nil {
		return nil, err
	}
	var out []heldBackup
	for _, e := range entries {
		if m := backupName.FindStringSubmatch(e.Name()); m != nil {
			if at, err := time.Parse(backupStamp, m[1]); err == nil {
				out = append(out, heldBackup{filepath.Join(b.dir, e.Name()), at})
			}
		}
	}
	slices.SortFunc(out, func(x, y heldBackup) int { return cmp.Compare(x.path, y.path) })
	return out, nil
}

// run makes copies until ctx ends. A copy that is due at the start is made at
// once.
func (b *backups) run(ctx context.Context) {
	for {
		wait := time.NewTimer(b.wait())
		select {
		case <-ctx.Done():
			wait.Stop()
			return
		case <-wait.C:
		}
		b.once(ctx)
	}
}

func (b *backups) wait() time.Duration {
	b.mu.Lock()
	defer b.mu.Unlock()
	if b.problem != "" {
		return min(b.every, backupRetry)
	}
	if b.last.IsZero() {
		return 0
	}
	return max(0, b.last.Add(b.every).Sub(b.now()))
}

// once makes one copy and takes the oldest away. A failure is kept for the
// page of the keepers and leaves the copies that are there.
func (b *backups) once(ctx context.Context) {
	at := b.now().UTC().Truncate(time.Second)
	path := filepath.Join(b.dir, "fathombend-"+at.Format(backupStamp)+".db")
	began := time.Now()
	err := b.store.BackupWithChecksum(ctx, path)
	if ctx.Err() != nil {
		return
	}
	if err == nil {
		err = b.rotate()
	}
	b.mu.Lock()
	defer b.mu.Unlock()
	if err != nil {
		b.failures++
		b.problem = commandMessage(err)
		b.log.Error("backup failed", "err", err)
		return
	}
	b.last, b.problem = at, ""
	b.log.Info("backup made", "file", filepath.Base(path), "ms", time.Since(began).Milliseconds())
}

// rotate deletes the oldest copies beyond keep, with their checksums.
func (b *backups) rotate() error {
	held, err := b.held()
	if err != nil {
		return err
	}
	for _, old := range held[:max(0, len(held)-b.keep)] {
		if err := os.Remove(old.path); err != nil {
			return err
		}
		if err := os.Remove(old.path + catalogue.ChecksumSuffix); err != nil && !errors.Is(err, fs.ErrNotExist) {
			return err
		}
	}
	return nil
}

// backupState is what the keepers' page and the metrics show.
type backupState struct {
	On       bool
	Last     time.Time
	Every    time.Duration
	Keep     int
	Failures int
	Problem  string
}

func (b *backups) state() backupState {
	if b == nil {
		return backupState{}
	}
	b.mu.Lock()
	defer b.mu.Unlock()
	return backupState{true, b.last, b.every, b.keep, b.failures, b.problem}
}
