package main

import (
	"context"
	"fmt"
	"io"
	"net/url"
	"os"
	"strings"

	"fathombend/catalogue"
)

const importHelp = `Reads a measurement table (CSV with a header row, UTF-8, comma and decimal
point) into a catalogue. It is all or nothing: when one row is refused, none is
stored, and every refused row is printed with its line, column, value and what
was expected. Warnings and converted units are printed and do not stop it.
Rows that carry a known measurement id propose a change to that measurement;
identical rows are skipped and counted. Without -publish the rows wait for a
curator. FILE.csv may be - for standard input.

With -match the file may have other headers, separators and number signs: they
are guessed as the page for files guesses them, and printed. What the guess
leaves open is asked for: -encoding, -numbers; -as 'HEADER=COLUMN' says what one
column is read as (nothing after = leaves it out), in the unit of COLUMN, as
valley_slope_deg or channel_width_km. -partial takes the good rows although
others are refused.`

func runImport(args []string, in io.Reader, out, errOut io.Writer) int {
	c := newCall("import", "import -catalogue FILE [-publish] [-partial] [-match] FILE.csv", importHelp, in, out, errOut)
	c.withCatalogue()
	publish := c.flags.Bool("publish", false, "accept the rows without review")
	partial := c.flags.Bool("partial", false, "take the good rows although others are refused")
	m := matchFlags(c)
	files, code, done := c.parseMixed(args)
	if done {
		return code
	}
	if msg := m.badCall(); msg != "" {
		return c.bad("%s", msg)
	}
	if len(files) != 1 {
		return c.bad("name one CSV file to import, not %d", len(files))
	}
	r, name := in, "standard input"
	if files[0] != "-" {
		f, err := os.Open(files[0])
		if err != nil {
			return c.failed(err)
		}
		defer f.Close()
		r, name = f, files[0]
	}
	ctx := context.Background()
	reading := catalogue.Reading{}
	if *m.match {
		again, cleanup, err := seekable(r)
		if err != nil {
			return c.failed(err)
		}
		defer cleanup()
		if reading, err = m.read(ctx, out, again); err != nil {
			return c.failed(err)
		}
		r = again
	}
	s, cleanup, code := c.open(ctx)
	if s == nil {
		return code
	}
	defer cleanup()
	report, err := s.Import(ctx, r, catalogue.ImportOptions{Publish: *publish, Partial: *partial, Reading: reading, Why: "imported on the command line"})
	if report == nil {
		return c.failed(err)
	}
	printImport(out, name, report, *publish)
	if err != nil {
		return c.failed(err)
	}
	if !report.Stored {
		return exitProblem
	}
	return exitOK
}

// printImport writes what an import did, problems first.
func printImport(w io.Writer, name string, r *catalogue.ImportReport, publish bool) {
	for _, p := range r.Problems {
		fmt.Fprintln(w, "refused: "+problemLine(p))
	}
	for _, p := range r.Warnings {
		fmt.Fprintln(w, "warning: "+problemLine(p))
	}
	for _, p := range r.Conversions {
		fmt.Fprintln(w, "converted: "+problemLine(p))
	}
	if len(r.UnknownColumns) > 0 {
		fmt.Fprintln(w, "not read, no such column: "+strings.Join(r.UnknownColumns, ", "))
	}
	counts := fmt.Sprintf("%d new, %d changed, %d identical (skipped), %d refused, %d with a warning",
		r.New, r.Changed, r.Identical, countLines(r.Problems), countLines(r.Warnings))
	switch {
	case !r.Stored:
		fmt.Fprintf(w, "%s: nothing stored: %s.\n", name, counts)
	case publish:
		fmt.Fprintf(w, "%s: stored and accepted: %s.\n", name, counts)
	default:
		fmt.Fprintf(w, "%s: stored, waiting for a curator on /review: %s.\n", name, counts)
	}
}

func countLines(ps []catalogue.RowProblem) int {
	seen := map[int]bool{}
	for _, p := range ps {
		seen[p.Line] = true
	}
	return len(seen)
}

// problemLine is one remark as one line of text.
func problemLine(p catalogue.RowProblem) string {
	var b strings.Builder
	if p.Line > 0 {
		fmt.Fprintf(&b, "line %d, ", p.Line)
	}
	if p.Column != "" {
		fmt.Fprintf(&b, "column %s, ", p.Column)
	}
	if p.Value != "" {
		fmt.Fprintf(&b, "value %q, ", clip(p.Value))
	}
	s := strings.TrimSuffix(b.String(), ", ")
	if s != "" {
		s += ": "
	}
	s += p.Message
	if p.Expected != "" {
		s = strings.TrimSuffix(s, ".")
		if !strings.HasSuffix(s, "?") {
			s += "."
		}
		s += " Expected: " + p.Expected
	}
	return s
}

const exportHelp = `Writes the accepted measurements as CSV with the contract's columns to standard
output. Filters narrow it, as name=value or -name value, with the names of the
page /systems: kind=submarine lat_min=30 bbox=170,-60,-170,-30 and so on.
Without -catalogue it writes the demo catalogue and says so.`

func runExport(args []string, in io.Reader, out, errOut io.Writer) int {
	c := newCall("export", "export [-catalogue FILE] [name=value | -name value ...] > FILE.csv", exportHelp, in, out, errOut)
	c.withCatalogue()
	q := url.Values{}
	filterFlags(c, q)
	rest, code, done := c.parseMixed(args)
	if done {
		return code
	}
	for _, a := range rest {
		name, value, ok := strings.Cut(a, "=")
		if !ok {
			return c.bad("%q is not a filter; write name=value, as in kind=submarine", a)
		}
		q.Add(name, value)
	}
	if err := allow(q, catalogue.FilterParameters); err != nil {
		return c.bad("%s", err)
	}
	f, err := catalogue.ParseFilter(q)
	if err != nil {
		return c.bad("%s", commandMessage(err))
	}
	f.Page, f.PerPage = 0, 0
	ctx := context.Background()
	s, cleanup, isDemo, err := openCatalogue(ctx, *c.catalogue, true)
	if err != nil {
		return c.failed(err)
	}
	defer cleanup()
	if isDemo {
		fmt.Fprintln(errOut, demoNote)
	}
	n, err := s.Export(ctx, out, f)
	if err != nil {
		return c.failed(err)
	}
	fmt.Fprintf(errOut, "%s written.\n", counted(n, "measurement", "measurements"))
	return exitOK
}

// filterFlags adds a flag for every filter parameter; their values go to q.
func filterFlags(c *call, q url.Values) {
	for _, name := range catalogue.FilterParameters {
		c.flags.Func(name, "filter, as the parameter `"+name+"` of /systems", func(v string) error {
			q.Add(name, v)
			return nil
		})
	}
}

// parseMixed reads flags that may stand before, between and after the other
// arguments, and returns the others.
func (c *call) parseMixed(args []string) (rest []string, code int, done bool) {
	if code, done = c.parse(args); done {
		return nil, code, true
	}
	for c.flags.NArg() > 0 {
		left := c.flags.Args()
		rest = append(rest, left[0])
		if err := c.flags.Parse(left[1:]); err != nil {
			return nil, exitBadCall, true
		}
	}
	return rest, exitOK, false
}
