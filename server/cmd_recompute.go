package main

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"math"
	"net/url"
	"os"
	"os/signal"
	"strings"
	"syscall"

	"fathombend/catalogue"
	"fathombend/catalogue/planform"
)

const recomputeHelp = `Measures every stored centreline again with one set of settings, beside what is
stored, and keeps the result under NAME; nothing stored is changed. The settings
are those of the page /recompute, as name=value or -name value:

  recompute -catalogue FILE "20 widths" window_widths=20 k=5
  recompute -catalogue FILE "10 km" -window_m 10000 -csv > levels.csv

Interrupted, it goes on where it stopped when it is called again with the same
NAME. A finished one is printed. Regressions use it with recomputed=NAME.`

func runRecompute(args []string, in io.Reader, out, errOut io.Writer) int {
	c := newCall("recompute", "recompute -catalogue FILE [-json | -csv] NAME [name=value | -name value ...]", recomputeHelp, in, out, errOut)
	c.withCatalogue()
	asJSON := c.flags.Bool("json", false, "print the document of /recompute/NAME.json")
	asCSV := c.flags.Bool("csv", false, "print one row a line")
	why := c.flags.String("why", "", "what it is for, in a `sentence`")
	q := url.Values{}
	for _, name := range recomputeParameters {
		c.flags.Func(name, measureFlagHelp[name], func(v string) error {
			q.Set(name, v)
			return nil
		})
	}
	rest, code, done := c.parseMixed(args)
	switch {
	case done:
		return code
	case len(rest) == 0:
		return c.bad("expected a NAME for the recomputation")
	case *asJSON && *asCSV:
		return c.bad("-json and -csv cannot both be asked for")
	}
	for _, a := range rest[1:] {
		name, value, ok := strings.Cut(a, "=")
		if !ok {
			return c.bad("%q is not a setting; write name=value, as in window_bends=10, and put a NAME with spaces in quotes", a)
		}
		q.Set(name, value)
	}
	if err := allow(q, recomputeParameters); err != nil {
		return c.bad("%s", err)
	}
	s, wrong := recomputeSettings(q)
	if err := firstWrong(wrong); err != nil {
		return c.bad("%s", err)
	}
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	defer stop()
	store, cleanup, code := c.open(ctx)
	if store == nil {
		return code
	}
	defer cleanup()
	name, err := c.takeUp(ctx, store, rest[0], *why, s, len(q) > 0)
	if err != nil {
		return c.failed(err)
	}
	return c.recompute(ctx, store, name, *asJSON, *asCSV)
}

// takeUp begins a recomputation, or goes on with the one of that name; asked
// says that settings were given, which must then be those it has.
func (c *call) takeUp(ctx context.Context, store *catalogue.Store, title, why string, s planform.Settings, asked bool) (string, error) {
	text, err := json.Marshal(s)
	if err != nil {
		return "", err
	}
	r, err := store.Recomputation(ctx, catalogue.Slug(title))
	switch {
	case catalogue.CodeOf(err) == catalogue.NotFound:
		return store.StartRecomputation(ctx, catalogue.Recomputation{Title: title, Why: why, Settings: string(text), Program: Version}, 0)
	case err != nil:
		return "", err
	case asked && settingsOf(r.Settings) != s:
		return "", fmt.Errorf("a recomputation named %q is kept already, with the settings %s; choose another name, or leave the settings out to go on with it", r.Name, recomputeSettingsText(settingsOf(r.Settings)))
	case r.State == "cancelled":
		return r.Name, store.ResumeRecomputation(ctx, r.Name)
	}
	return r.Name, nil
}

// recompute runs one to its end and prints what it gave.
func (c *call) recompute(ctx context.Context, store *catalogue.Store, name string, asJSON, asCSV bool) int {
	r, err := store.Recomputation(ctx, name)
	if err == nil && r.State != "done" {
		var state string
		state, err = recompute(ctx, store, name, func(reached, lines int) { fmt.Fprintf(c.err, "Measured %d of %d lines.\n", reached, lines) })
		switch {
		case errors.Is(err, context.Canceled):
			fmt.Fprintf(c.err, "Stopped. Call it again with the same name to go on.\n")
			return exitProblem
		case err == nil && state == "cancelled":
			fmt.Fprintf(c.err, "The recomputation was cancelled by someone else; call it again to go on.\n")
			return exitProblem
		}
	}
	if err == nil {
		r, err = store.Recomputation(ctx, name)
	}
	if err != nil {
		return c.failed(err)
	}
	lines, err := store.RecomputedLines(ctx, name)
	if err != nil {
		return c.failed(err)
	}
	switch {
	case asJSON:
		b, err := json.Marshal(finite(recomputationDocument(r, lines)))
		if err != nil {
			return c.failed(err)
		}
		fmt.Fprintf(c.out, "%s\n", b)
	case asCSV:
		if err := writeRecomputed(c.out, lines); err != nil {
			return c.failed(err)
		}
	default:
		printRecomputation(c.out, r, lines)
	}
	return exitOK
}

// printRecomputation writes how far the levels move, and which lines could not
// be measured.
func printRecomputation(w io.Writer, r *catalogue.Recomputation, lines []catalogue.RecomputedLine) {
	s := settingsOf(r.Settings)
	fmt.Fprintf(w, "%s: %d lines measured with %s.\n", r.Name, r.Reached, recomputeSettingsText(s))
	t := table(w, "Medians over the lines that have both", "level", "lines", "stored", "again", "difference", "least", "most")
	for _, m := range movesOf(lines) {
		level := m.Level
		if level == "Standardised peak" {
			level = fmt.Sprintf("%s, k = %d", level, s.K)
		}
		if m.Lines == 0 {
			fmt.Fprintf(t, "%s\t0\t-\t-\t-\t-\t-\n", level)
			continue
		}
		fmt.Fprintf(t, "%s\t%d\t%.3f\t%.3f\t%+.3f\t%+.3f\t%+.3f\n", level, m.Lines, m.Stored, m.Recomputed, thousandths(m.Difference), thousandths(m.Least), thousandths(m.Most))
	}
	t.Flush()
	for _, l := range lines {
		if !l.New.Peak.Valid {
			fmt.Fprintf(w, "Not measured, line %d of %s: %s\n", l.Line, l.SystemName, l.Remark)
		}
	}
	fmt.Fprintf(w, "\nLine by line: -csv. In a regression: response=standardised_peak k=%d recomputed=%s\n", s.K, r.Name)
}

// thousandths rounds to what is printed, without a negative zero.
func thousandths(x float64) float64 { return math.Round(1000*x)/1000 + 0 }
