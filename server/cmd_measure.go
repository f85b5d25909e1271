package main

import (
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"math"
	"net/url"
	"os"
	"path/filepath"
	"strings"
	"text/tabwriter"

	"fathombend/catalogue/planform"
)

const measureHelp = `Measures every line of a file: lengths, sinuosity by windows and bends, slope,
and how the numbers depend on the window, the smoothing and the vertex spacing.
FILE is GeoJSON, KML, GPX, CSV, WKT or GeoPackage, plain or gzipped; - is the
standard input. The settings are those of the page /measure, as -name value:

  measure channel.kml
  measure -width_m 400 -window_widths 10 channel.geojson
  measure -epsg 32631 -z depth picks.csv
  measure -csv many.gpkg > rows.csv      one row a line, to complete and import
  measure -csv -kind river -sinuosity_kind reach rivers.geojson > rows.csv

Of the columns of such a row:
` + measuredColumns + `

Lines that cannot be measured are listed with the reason. Exit 0 when a line was
measured, 1 when none was, 2 for a bad call.`

var measureFlagHelp = map[string]string{
	"spacing_m":       "spacing of the points the line is resampled to, `metres` (default: chosen from the line)",
	"smooth":          "smoothing filter in `points`, odd; 1 is none (default 11, or two channel widths)",
	"window_widths":   "window in channel `widths` (default 20 where the width is known)",
	"window_bends":    "window in `bends` (default 10 where the width is not known)",
	"window_m":        "window in `metres`",
	"width_m":         "channel width in `metres`",
	"min_bend_widths": "shorter bends are merged, in channel `widths` (default 2)",
	"k":               "`windows` of the standardised peak (default 5)",
	"epsg":            "what the coordinates are: 4326, a UTM `zone` as 32631 or 31N, or plane",
	"z":               "what the third coordinate is: depth, elevation or time",
	"direction":       "as_given or reversed (default: down the slope that the depths show)",
	"along":           "arcs along the given vertices or the resampled points: given, resampled",
	"lines":           "what several lines are: centrelines, banks (pairs) or levels (pairs)",
}

func runMeasure(args []string, in io.Reader, out, errOut io.Writer) int {
	c := newCall("measure", "measure [-json | -csv] [-name value ...] FILE", measureHelp, in, out, errOut)
	asJSON := c.flags.Bool("json", false, "print the document of /measure.json")
	asCSV := c.flags.Bool("csv", false, "print one row a line in the columns of the measurement table")
	q, rows := url.Values{}, url.Values{}
	c.flags.Func("kind", "with -csv: what the lines are, `submarine`, river or lacustrine (default submarine)", func(v string) error {
		rows.Set("kind", v)
		return nil
	})
	c.flags.Func("sinuosity_kind", "with -csv: which sinuosity the rows hold, `peak`, p90, mean or reach (default: the peak, or the reach of a line with one window)", func(v string) error {
		rows.Set("sinuosity_kind", v)
		return nil
	})
	for _, name := range measureParameters {
		c.flags.Func(name, measureFlagHelp[name], func(v string) error {
			q.Set(name, v)
			return nil
		})
	}
	rest, code, done := c.parseMixed(args)
	switch {
	case done:
		return code
	case len(rest) != 1:
		return c.bad("expected one FILE, got %d", len(rest))
	case *asJSON && *asCSV:
		return c.bad("-json and -csv cannot both be asked for")
	case len(rows) > 0 && !*asCSV:
		return c.bad("-kind and -sinuosity_kind belong to -csv")
	}
	as, err := measuredAsOf(rows)
	if err != nil {
		return c.bad("%s", commandMessage(err))
	}
	settings, wrong := measureSettings(q)
	if err := firstWrong(wrong); err != nil {
		return c.bad("%s", err)
	}
	data, err := readFileOr(rest[0], in)
	if err != nil {
		return c.failed(err)
	}
	report, err := planform.MeasureFile(data, "", filepath.Base(rest[0]), settings)
	if err != nil {
		return c.failed(err)
	}
	switch {
	case *asJSON:
		b, err := json.Marshal(finite(report))
		if err != nil {
			return c.failed(err)
		}
		fmt.Fprintf(out, "%s\n", b)
	case *asCSV:
		if err := writeMeasuredRows(out, report, as); err != nil {
			return c.failed(err)
		}
		printRefused(errOut, report)
	default:
		printReport(out, report)
		printRefused(out, report)
	}
	if len(report.Lines) == 0 {
		return exitProblem
	}
	return exitOK
}

// readFileOr reads a file up to the size that is measured; "-" is in.
func readFileOr(path string, in io.Reader) ([]byte, error) {
	if path != "-" {
		f, err := os.Open(path)
		if err != nil {
			if errors.Is(err, os.ErrNotExist) {
				return nil, fmt.Errorf("there is no file %s", path)
			}
			return nil, err
		}
		defer f.Close()
		if st, err := f.Stat(); err == nil && st.Mode().IsRegular() && st.Size() <= planform.MaxBytes {
			data := make([]byte, st.Size()) // in one piece: a file may be large
			_, err := io.ReadFull(f, data)
			return data, err
		}
		in = f
	}
	return io.ReadAll(io.LimitReader(in, planform.MaxBytes+1))
}

func printRefused(w io.Writer, report *planform.Report) {
	if len(report.Refused) == 0 {
		return
	}
	fmt.Fprintf(w, "\nNot measured (%d):\n", len(report.Refused))
	for _, r := range report.Refused {
		fmt.Fprintf(w, "  %s: %s\n", r.Line, r.Reason)
	}
}

// printReport writes what was measured: few lines in full, many as a table.
func printReport(w io.Writer, report *planform.Report) {
	const inFull = 3
	if len(report.Lines) > inFull {
		printLines(w, report)
	} else {
		for i := range report.Lines {
			if i > 0 {
				fmt.Fprintln(w)
			}
			printMeasured(w, &report.Lines[i])
		}
	}
	for _, m := range report.Movements {
		fmt.Fprintf(w, "\n%s to %s: %s\n", m.Older, m.Younger, m.Text)
		t := tabwriter.NewWriter(w, 2, 0, 2, ' ', tabwriter.AlignRight)
		fmt.Fprintln(t, "bend\tturns\tvalley km\tswing m\tsweep m\t")
		for _, b := range m.Bends {
			fmt.Fprintf(t, "%d\t%s\t%.2f\t%.1f\t%.1f\t\n", b.Bend, b.Side, b.ValleyM/1e3, b.SwingM, b.SweepM)
		}
		t.Flush()
	}
}

func printLines(w io.Writer, report *planform.Report) {
	t := tabwriter.NewWriter(w, 2, 0, 2, ' ', tabwriter.AlignRight)
	fmt.Fprintln(t, "line\tvertices\tlength km\treach\tmean\tP90\tpeak\t(low\thigh)\twindows\tbends\tslope\twarnings\t")
	for i := range report.Lines {
		m := &report.Lines[i]
		fmt.Fprintf(t, "%s\t%d\t%.2f\t%.3f\t%.3f\t%.3f\t%.3f\t%.3f\t%.3f\t%d\t%d\t%s\t%d\t\n", m.Name, m.Vertices, m.ChannelLengthM/1e3, m.ReachSinuosity,
			m.MeanSinuosity, m.P90Sinuosity, m.PeakSinuosity, m.Sensitivity.Low, m.Sensitivity.High, len(m.Windows), len(m.Bends), given(m.ValleySlope), len(m.Warnings))
	}
	t.Flush()
	seen := map[string]int{}
	var order []string
	for i := range report.Lines {
		for _, w := range report.Lines[i].Warnings {
			kind := w[:max(strings.IndexAny(w+":", ":,("), 0)]
			if seen[kind] == 0 {
				order = append(order, kind)
			}
			seen[kind]++
		}
	}
	fmt.Fprintf(w, "\nMeasured: %s. The peak stands with its range under half and double the window and the smoothing.\n", counted(len(report.Lines), "line", "lines"))
	common := 0
	for _, kind := range order {
		if seen[kind] > 1 && common < 6 {
			fmt.Fprintf(w, "  %d lines: %s\n", seen[kind], strings.TrimSpace(kind))
			common++
		}
	}
	fmt.Fprintln(w, "Warnings in full: -json.")
}

func given(v *float64) string {
	if v == nil {
		return "-"
	}
	return fmt.Sprintf("%.4g", *v)
}

// printMeasured writes one line in full.
func printMeasured(w io.Writer, m *planform.Measured) {
	fmt.Fprintf(w, "%s: %d vertices, median spacing %.4g m\n", m.Name, m.Vertices, m.MedianSpacingM)
	t := tabwriter.NewWriter(w, 2, 0, 2, ' ', 0)
	row := func(label, format string, a ...any) { fmt.Fprintf(t, "  %s\t%s\n", label, fmt.Sprintf(format, a...)) }
	row("channel length", "%.1f m", m.ChannelLengthM)
	row("valley, end to end", "%.1f m\treach sinuosity %.4g", m.ValleyLengthM.EndToEnd, m.ReachSinuosity)
	row("valley, over inflections", "%.1f m\tsinuosity %.4g", m.ValleyLengthM.Inflections, m.ChannelLengthM/m.ValleyLengthM.Inflections)
	if a := m.ValleyLengthM.Axis; a != nil {
		row("valley, along the axis", "%.1f m\tsinuosity %.4g", *a, m.ChannelLengthM / *a)
	}
	row("windows", "%d of %.4g m", len(m.Windows), m.WindowLengthM)
	level := func(label string, v float64, r planform.Range) { row(label, "%.4g [%.4g, %.4g]", v, r.Low, r.High) }
	level("mean sinuosity", m.MeanSinuosity, m.SensitivityMean)
	level("P90 sinuosity", m.P90Sinuosity, m.SensitivityP90)
	level("peak sinuosity", m.PeakSinuosity, m.Sensitivity)
	if p := m.StandardisedPeak; p != nil {
		row(fmt.Sprintf("standardised peak, k = %d", p.K), "%.4g (sd %.2g)", p.Expected, p.SD)
	}
	if m.ValleySlope != nil {
		row("valley slope", "%.4g m/m\tchannel slope %.4g", *m.ValleySlope, *m.ChannelSlope)
	}
	if s := m.StableSpacingM; s != nil {
		row("within 1 % up to a ruler of", "%.4g m", *s)
	}
	if b := m.Typical; b != nil {
		row("bends", "%d\tmedian sinuosity %.4g, wavelength %.4g m, amplitude %.4g m, radius %.4g m", b.Bends, b.Sinuosity, b.WavelengthM, b.AmplitudeM, b.RadiusM)
	}
	t.Flush()
	fmt.Fprint(w, "  settings:")
	for _, s := range settingTexts(m.Settings) {
		fmt.Fprintf(w, " %s=%s", s[0], s[1])
	}
	fmt.Fprintln(w)
	if m.Levees != nil {
		fmt.Fprintln(w, "  levees:", m.Levees.Text)
	}
	for _, n := range m.Notes {
		fmt.Fprintln(w, "  note:", n)
	}
	for _, n := range m.Warnings {
		fmt.Fprintln(w, "  warning:", n)
	}
	printBends(w, m)
}

// printBends writes the bend table; past a screen of them, the first ones.
func printBends(w io.Writer, m *planform.Measured) {
	const most = 40
	if len(m.Bends) == 0 {
		return
	}
	t := tabwriter.NewWriter(w, 2, 0, 2, ' ', tabwriter.AlignRight)
	fmt.Fprintln(t, "bend\tfrom km\tarc m\tchord m\tsinuosity\tamplitude m\twavelength m\tradius m\tturns\tasymmetry\t")
	for i, b := range m.Bends[:min(most, len(m.Bends))] {
		fmt.Fprintf(t, "%d\t%.2f\t%.1f\t%.1f\t%.3f\t%.1f\t%.1f\t%.1f\t%s\t%.2f\t\n", i+1, b.FromM/1e3, b.ArcM, b.ChordM, b.Sinuosity, b.AmplitudeM, b.WavelengthM, b.RadiusM, b.Side, math.Round(100*b.Asymmetry)/100+0)
	}
	t.Flush()
	if n := len(m.Bends) - most; n > 0 {
		fmt.Fprintf(w, "and %d more; -json has all of them.\n", n)
	}
}
