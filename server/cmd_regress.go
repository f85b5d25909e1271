package main

import (
	"context"
	"fmt"
	"io"
	"net/url"
	"strings"
	"text/tabwriter"

	"fathombend/stats"
)

const regressHelp = `Fits regressions of sinuosity on the accepted measurements and prints what the
page /regression shows: coefficients with intervals over whole clusters, both
R2, scores, comparisons, influence and every warning. Parameters and filters
are those of the page, as name=value or -name value:

  regress model=linear:abs_latitude model=floor_decay:coriolis seed=7
  regress -model power:valley_slope -kind submarine -abs_lat_max 60

With -analysis NAME it runs a frozen analysis of the catalogue again, on the
rows it was frozen with; the exit code is 1 when the digits differ from those of
the day it was frozen. With -json it prints the document of /regression.json. Without -catalogue it
uses the demo catalogue and says so.`

func runRegress(args []string, in io.Reader, out, errOut io.Writer) int {
	c := newCall("regress", "regress [-catalogue FILE] [-json] [name=value | -name value ...]", regressHelp, in, out, errOut)
	c.withCatalogue()
	asJSON := c.flags.Bool("json", false, "print the JSON document instead of tables")
	frozen := c.flags.String("analysis", "", "run the frozen analysis `NAME` again")
	q := url.Values{}
	filterFlags(c, q)
	for _, name := range regressionParameters {
		c.flags.Func(name, "as the parameter `"+name+"` of /regression", func(v string) error {
			q.Add(name, v)
			return nil
		})
	}
	rest, code, done := c.parseMixed(args)
	if done {
		return code
	}
	for _, a := range rest {
		name, value, ok := strings.Cut(a, "=")
		if !ok {
			return c.bad("%q is not a parameter; write name=value, as in model=linear:abs_latitude", a)
		}
		q.Add(name, value)
	}
	f, req, err := regressionQuestion(q)
	if err != nil {
		return c.bad("%s", commandMessage(err))
	}
	ctx := context.Background()
	s, cleanup, isDemo, err := openCatalogue(ctx, *c.catalogue, true)
	if err != nil {
		return c.failed(err)
	}
	defer cleanup()
	if isDemo {
		fmt.Fprintln(errOut, demoNote)
	}
	app := &App{store: s, fits: newCache(4)}
	if *frozen != "" {
		return c.rerun(ctx, app, *frozen, *asJSON)
	}
	analysis, err := app.analyse(ctx, f, req)
	if err != nil {
		return c.failed(err)
	}
	if err := writeAnalysis(out, analysis, *asJSON); err != nil {
		return c.failed(err)
	}
	return exitOK
}

// rerun answers a frozen analysis again and says whether its digits stand.
func (c *call) rerun(ctx context.Context, app *App, name string, asJSON bool) int {
	f, err := app.frozen(ctx, name)
	if err == nil {
		err = writeAnalysis(c.out, f.analysis, asJSON)
	}
	if err != nil {
		return c.failed(err)
	}
	if !f.same() {
		fmt.Fprintf(c.err, "%s: the digits differ from those of version %s: SHA-256 %s now, %s then.\n", name, f.kept.Program, f.digest, f.kept.Digest)
		return exitProblem
	}
	fmt.Fprintf(c.err, "%s: the same digits as on %s (SHA-256 %s).\n", name, f.kept.At.Format("2006-01-02"), f.digest)
	return exitOK
}

func writeAnalysis(out io.Writer, analysis *stats.Analysis, asJSON bool) error {
	if !asJSON {
		printAnalysis(out, analysis)
		return nil
	}
	document, _, err := documentOf(analysis)
	if err != nil {
		return err
	}
	_, err = out.Write(document)
	return err
}

// printAnalysis writes an analysis as text: the sentence first, then what
// these rows cannot separate, the tables, the warnings and the method.
func printAnalysis(w io.Writer, a *stats.Analysis) {
	fmt.Fprintln(w, a.Headline)
	for _, s := range a.Separability {
		fmt.Fprintln(w, s)
	}
	fmt.Fprintf(w, "\nRows %d, systems %d, clusters %d.\n", a.Rows, a.Systems, a.Clusters)
	for _, d := range a.Dropped {
		fmt.Fprintf(w, "Left out, %s: %d\n", d.Reason, d.Rows)
	}
	if a.InventedRows > 0 {
		fmt.Fprintf(w, "%d of the rows are invented for the demo: they describe no real channel.\n", a.InventedRows)
	}
	printCoefficients(w, a)
	printScores(w, a)
	printComparisons(w, a)
	printInfluence(w, a)
	if len(a.Warnings) > 0 {
		fmt.Fprintln(w, "\nWarnings")
		for _, s := range a.Warnings {
			fmt.Fprintln(w, "* "+s)
		}
	}
	fmt.Fprintln(w, "\n"+a.MethodsText)
}

// table starts an aligned table; the caller flushes it.
func table(w io.Writer, title string, heads ...string) *tabwriter.Writer {
	fmt.Fprintln(w, "\n"+title)
	t := tabwriter.NewWriter(w, 0, 4, 2, ' ', 0)
	fmt.Fprintln(t, strings.Join(heads, "\t"))
	return t
}

func printCoefficients(w io.Writer, a *stats.Analysis) {
	t := table(w, "Coefficients", "model", "term", "estimate", "interval", "kind", "CR2 interval", "df")
	for _, m := range a.Models {
		if m.Failure != "" {
			fmt.Fprintf(t, "%s\t%s\n", m.Model, m.Failure)
			continue
		}
		for _, c := range m.Coefficients {
			cr2, df := "-", "-"
			if c.CR2 != nil {
				cr2, df = textInterval(c.CR2.Interval), textNumber(c.CR2.DF, 3)
			}
			fmt.Fprintf(t, "%s\t%s\t%s\t%s\t%s\t%s\t%s\n", m.Model, c.Name, textNumber(c.Estimate, 5), textInterval(c.Interval), c.IntervalKind, cr2, df)
		}
	}
	t.Flush()
}

func printScores(w io.Writer, a *stats.Analysis) {
	t := table(w, "Scores (AICc counts rows as independent)", "model", "R2", "interval", "R2 fitted scale", "R2 out of sample", "AICc", "weight", "p", "tau-b", "degenerate")
	for _, m := range a.Models {
		if m.Failure != "" {
			continue
		}
		fmt.Fprintf(t, "%s\t%s\t%s\t%s\t%s\t%s\t%s\t%s\t%s\t%d\n", m.Model, textNumber(m.RSquared, 3), textInterval(m.RSquaredInterval), textNumber(m.RSquaredFitted, 3),
			textNumber(m.OutOfSampleR2, 3), textNumber(m.AICc, 5), textNumber(m.AkaikeWeight, 3), textNumber(m.PermutationP, 3), textNumber(m.Kendall, 3), m.DegenerateResamples)
	}
	t.Flush()
}

func printComparisons(w io.Writer, a *stats.Analysis) {
	if len(a.Comparisons) > 0 {
		t := table(w, "R2 of a less R2 of b, from the same resamples", "a", "b", "difference", "interval")
		for _, c := range a.Comparisons {
			fmt.Fprintf(t, "%s\t%s\t%s\t%s\n", c.A, c.B, textNumber(c.Difference, 3), textInterval(c.Interval))
		}
		t.Flush()
	}
	if len(a.Shares) > 0 {
		t := table(w, "Shares of R2 in the joint model", "predictor", "share", "interval")
		for _, s := range a.Shares {
			fmt.Fprintf(t, "%s\t%s\t%s\n", s.Predictor, textNumber(s.Share, 3), textInterval(s.Interval))
		}
		t.Flush()
	}
	if b := a.Breakpoint; b != nil {
		fmt.Fprintf(w, "\nBreakpoint at %s %s, p %s\n", textNumber(b.At, 4), textInterval(b.Interval), textNumber(b.P, 3))
	}
	if o := a.Overturning; o != nil && o.Text != "" {
		fmt.Fprintln(w, "\n"+o.Text)
	}
}

func printInfluence(w io.Writer, a *stats.Analysis) {
	if len(a.Influence) == 0 {
		return
	}
	t := table(w, "Without one system (ten that move most)", "system", "model", "R2 without", "coefficient without", "Cook", "leverage")
	for i, s := range a.Influence {
		if i == 10 {
			break
		}
		fmt.Fprintf(t, "%s\t%s\t%s\t%s\t%s\t%s\n", s.SystemName, s.Model, textNumber(s.RSquaredWithout, 3), textNumber(s.CoefficientWithout, 4), textNumber(s.Cook, 3), textNumber(s.Leverage, 3))
	}
	t.Flush()
}

// textNumber writes a number with a few significant digits, a dash when it is
// not known.
func textNumber(x float64, digits int) string {
	if !isFinite(x) {
		return "-"
	}
	return fmt.Sprintf("%.*g", digits, x)
}

func textInterval(i stats.Interval) string {
	return "[" + textNumber(i[0], 4) + ", " + textNumber(i[1], 4) + "]"
}
