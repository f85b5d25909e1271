package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"net/url"
	"os"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/stats/expectation"
)

const expectHelp = `Answers targets: reads a CSV whose columns carry the names of the parameters of
/expectation (palaeolatitude, age, target_slope and so on) and writes the same
rows with their results to standard output. Other columns pass through. A row
that cannot be answered keeps its place with its error column filled.
TARGETS.csv may be - for standard input.

Parameters for rows that do not give them, and filters for the rows that the
explanations are fitted on, follow as name=value or -name value:

  expect targets.csv draws=2000 seed=7 kind=submarine abs_lat_max=60

Without -catalogue it uses the demo catalogue and says so. The exit code is 1
when a row could not be answered.`

func runExpect(args []string, in io.Reader, out, errOut io.Writer) int {
	c := newCall("expect", "expect [-catalogue FILE] TARGETS.csv [name=value | -name value ...]", expectHelp, in, out, errOut)
	c.withCatalogue()
	q := url.Values{}
	filterFlags(c, q)
	for _, name := range targetParameters {
		c.flags.Func(name, "as the parameter `"+name+"` of /expectation, for rows that do not give it", func(v string) error {
			q.Add(name, v)
			return nil
		})
	}
	rest, code, done := c.parseMixed(args)
	if done {
		return code
	}
	var files []string
	for _, a := range rest {
		name, value, ok := strings.Cut(a, "=")
		if ok && (allow(url.Values{name: nil}, targetParameters, catalogue.FilterParameters) == nil) {
			q.Add(name, value)
			continue
		}
		if _, err := os.Stat(a); ok && err != nil {
			return c.bad("%s", commandMessage(allow(url.Values{name: nil}, targetParameters, catalogue.FilterParameters)))
		}
		files = append(files, a)
	}
	if len(files) != 1 {
		return c.bad("name one CSV file of targets, not %d (- is standard input)", len(files))
	}
	f, err := filterOf(q)
	if err != nil {
		return c.bad("%s", commandMessage(err))
	}
	if _, err := targetOf(q); err != nil {
		return c.bad("%s", commandMessage(err))
	}
	targets, name := in, "standard input"
	if files[0] != "-" {
		file, err := os.Open(files[0])
		if err != nil {
			return c.failed(err)
		}
		defer file.Close()
		targets, name = file, files[0]
	}
	return c.expect(targets, name, f, targetValues(q))
}

// expect answers the targets of a call.
func (c *call) expect(targets io.Reader, name string, f catalogue.Filter, base url.Values) int {
	ctx := context.Background()
	s, cleanup, isDemo, err := openCatalogue(ctx, *c.catalogue, true)
	if err != nil {
		return c.failed(err)
	}
	defer cleanup()
	if isDemo {
		fmt.Fprintln(c.err, demoNote)
	}
	app := &App{store: s, fits: newCache(64)}
	fits := func(ctx context.Context, response, line string) (*expectation.Fits, error) {
		return app.expectationFits(ctx, f, response, line)
	}
	n, err := answerTargets(ctx, targets, c.out, base, fits, batchWatch{progress: func(done int) {
		if done%(4*batchChunk) == 0 {
			fmt.Fprintf(c.err, "%d rows\n", done)
		}
	}})
	if err != nil {
		var table *echo.HTTPError
		if errors.As(err, &table) {
			return c.failed(fmt.Errorf("%s: %v", name, table.Message))
		}
		return c.failed(err)
	}
	fmt.Fprintf(c.err, "%s, %d without a result (see the error column).\n", counted(n.Rows, "target", "targets"), n.Bad)
	if n.Bad > 0 {
		return exitProblem
	}
	return exitOK
}
