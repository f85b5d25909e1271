package catalogue

import (
	"context"
	"fmt"
	"sync"
	"testing"
	"time"
)

// Writers and readers of one file, also from a second opening as a command
// line beside a server would make, never find the database locked.
func TestWritersAndReadersAtOnce(t *testing.T) {
	s := open(t)
	second, err := Open(ctx, s.Path(), Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer second.Close()
	const each = 12
	var wg sync.WaitGroup
	for w, store := range []*Store{s, second, s, second} {
		wg.Go(func() {
			for i := range each {
				rows := []Row{row(fmt.Sprintf("Writer %d", w), float64(i), float64(w), 1.5)}
				if err := store.InsertRows(ctx, rows, nil, 0, "at once"); err != nil {
					t.Errorf("writer %d: %v", w, err)
				}
			}
		})
		wg.Go(func() {
			for i := range each {
				if err := store.SessionCommit(ctx, fmt.Sprint(w, i), []byte("x"), time.Now().Add(time.Hour)); err != nil {
					t.Error(err)
				}
			}
		})
		wg.Go(func() {
			for range each {
				if _, _, err := store.Systems(ctx, Filter{Text: "writer"}); err != nil {
					t.Error(err)
				}
				if _, err := store.Rows(ctx, Filter{}); err != nil {
					t.Error(err)
				}
			}
		})
	}
	wg.Wait()
	rows, err := s.Rows(ctx, Filter{})
	if err != nil || len(rows) != 4*each {
		t.Fatalf("%d rows, %v", len(rows), err)
	}
	seen := map[string]bool{}
	for _, r := range rows {
		seen[r.Measurement] = true
	}
	if len(seen) != len(rows) {
		t.Error("an id was given twice")
	}
	if faults, err := s.Integrity(ctx); err != nil || len(faults) > 0 {
		t.Error(faults, err)
	}
}

// A reader that is half-way through a list sees one moment and stops nobody.
func TestReaderSeesOneMoment(t *testing.T) {
	s := open(t)
	insert(t, s, many(40)...)
	n := 0
	err := s.EachRow(ctx, Filter{}, func(Row) error {
		if n == 3 {
			if err := s.InsertRows(ctx, []Row{row("Late", 1, 2, 1.5)}, nil, 0, ""); err != nil {
				return err
			}
		}
		n++
		return nil
	})
	if err != nil || n != 80 {
		t.Errorf("%d rows, %v", n, err)
	}
}

// Tables that are taken slowly, more at once than there are readers of pages,
// keep nobody waiting: neither a page nor the session of whoever takes them.
func TestSlowTablesKeepNobodyWaiting(t *testing.T) {
	s := open(t)
	if err := s.InsertRows(ctx, []Row{row("Slow Channel", 1, 2, 1.5)}, nil, 0, "slow"); err != nil {
		t.Fatal(err)
	}
	if err := s.SessionCommit(ctx, "token", []byte("x"), time.Now().Add(time.Hour)); err != nil {
		t.Fatal(err)
	}
	soon, cancel := context.WithTimeout(ctx, time.Minute)
	defer cancel()
	slow := min(2*s.r.Stats().MaxOpenConnections, streams)
	begun, taken := make(chan bool, slow), make(chan bool)
	var ended sync.WaitGroup
	for range slow {
		ended.Go(func() {
			if err := s.EachRow(soon, Filter{}, func(Row) error { begun <- true; <-taken; return nil }); err != nil {
				t.Error(err)
			}
		})
	}
	for range slow {
		select {
		case <-begun:
		case <-soon.Done():
			t.Error("a table waits for others that are taken slowly")
		}
	}
	if _, found, err := s.SessionFind(soon, "token"); err != nil || !found {
		t.Errorf("the session: %v, %v", found, err)
	}
	if _, total, err := s.Systems(soon, Filter{}); err != nil || total != 1 {
		t.Errorf("a page: %d systems, %v", total, err)
	}
	close(taken)
	ended.Wait()
}
