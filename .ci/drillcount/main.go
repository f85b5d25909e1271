// Command drillcount says which acknowledged records a restored catalogue
// lacks: drillcount FILE ACKNOWLEDGED KILLED-AT SYNC-INTERVAL. A line of
// ACKNOWLEDGED is the number of a record and when it was acknowledged, Unix
// seconds. It exits 1 when one is missing that was acknowledged longer than the
// interval before the kill.
package main

import (
	"bufio"
	"context"
	"fmt"
	"os"
	"strconv"

	"fathombend/catalogue"
)

func main() {
	if len(os.Args) != 5 {
		fail("drillcount FILE ACKNOWLEDGED KILLED-AT SYNC-INTERVAL")
	}
	killed, interval := number(os.Args[3]), number(os.Args[4])
	ctx := context.Background()
	s, err := catalogue.Open(ctx, os.Args[1], catalogue.Options{ReadOnly: true})
	if err != nil {
		fail(err)
	}
	defer s.Close()
	f, err := os.Open(os.Args[2])
	if err != nil {
		fail(err)
	}
	defer f.Close()
	all, missing, tooOld := 0, 0, 0
	oldest := killed
	for lines := bufio.NewScanner(f); lines.Scan(); {
		var id int64
		var at float64
		if _, err := fmt.Sscan(lines.Text(), &id, &at); err != nil {
			fail(err)
		}
		all++
		_, err := s.Submission(ctx, id)
		if err == nil {
			continue
		}
		if catalogue.CodeOf(err) != catalogue.NotFound {
			fail(err)
		}
		missing++
		oldest = min(oldest, at)
		if killed-at > interval {
			tooOld++
		}
	}
	fmt.Printf("acknowledged writes: %d\nmissing after the restore: %d\nseconds of lost writes before the kill: %.2f (sync interval %g s)\nmissing though acknowledged before the last sync interval: %d\n",
		all, missing, killed-oldest, interval, tooOld)
	if tooOld > 0 || all == 0 {
		os.Exit(1)
	}
}

func number(s string) float64 {
	v, err := strconv.ParseFloat(s, 64)
	if err != nil {
		fail(err)
	}
	return v
}

func fail(why any) {
	fmt.Fprintln(os.Stderr, "drillcount:", why)
	os.Exit(2)
}
