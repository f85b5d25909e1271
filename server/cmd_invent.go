package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"slices"
	"time"

	"fathombend/catalogue"
	"fathombend/seed"
)

const inventHelp = `Writes a new catalogue of N invented systems with about three measurements each,
for trying out how a large one behaves. Every row says that it is invented.
Equal N and law give equal rows. FILE must not exist yet.`

// mostInvented bounds a slip of the finger: some 1.5 kB of disk a measurement.
const mostInvented = 1_000_000

func runInvent(args []string, in io.Reader, out, errOut io.Writer) int {
	c := newCall("invent", "invent -catalogue FILE [-systems N] [-demo-law LAW]", inventHelp, in, out, errOut)
	c.withCatalogue()
	n := c.flags.Int("systems", 100_000, "how many systems, `N`")
	law := c.flags.String("demo-law", string(seed.Both), "`LAW` the rows are drawn from: coriolis, supply, both or none")
	if code, done := c.parse(args); done {
		return code
	}
	laws := []seed.Law{seed.Coriolis, seed.Supply, seed.Both, seed.None}
	switch {
	case c.flags.NArg() > 0:
		return c.bad("unexpected %q", c.flags.Arg(0))
	case *c.catalogue == "":
		return c.bad("say which file to write with -catalogue FILE")
	case *n < 1 || *n > mostInvented:
		return c.bad("-systems %d is out of range; expected 1 to %d", *n, mostInvented)
	case !slices.Contains(laws, seed.Law(*law)):
		return c.bad("-demo-law %q is not a law; expected coriolis, supply, both or none", *law)
	}
	if _, err := os.Lstat(*c.catalogue); err == nil {
		return c.failed(fmt.Errorf("%s exists; invented rows go into a new file only", *c.catalogue))
	} else if !errors.Is(err, os.ErrNotExist) {
		return c.failed(err)
	}
	ctx, began := context.Background(), time.Now()
	o := openOptions(false)
	o.Throwaway = true // a file that broke off is made again
	s, err := catalogue.Open(ctx, *c.catalogue, o)
	if err != nil {
		return c.failed(err)
	}
	defer s.Close()
	if err := seed.FillLarge(ctx, s, *n, seed.Law(*law)); err != nil {
		return c.failed(err)
	}
	_, rows, err := s.RowsPage(ctx, catalogue.Filter{PerPage: 1})
	if err != nil {
		return c.failed(err)
	}
	fmt.Fprintf(out, "%s: %d systems with %d measurements, every one invented, in %.0f s.\n", *c.catalogue, *n, rows, time.Since(began).Seconds())
	return exitOK
}
