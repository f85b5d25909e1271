package main

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"io"
	"os"
	"path/filepath"

	"fathombend/catalogue"
	"fathombend/catalogue/land"
	"fathombend/seed"
	"fathombend/stats/earth"
)

// openCatalogue opens the catalogue in the file at path, or, when path is "",
// the demo in a temporary copy, which cleanup removes. isDemo says which of
// the two it was, so that the caller can say so.
//
// readOnly refuses to make a new file: reading a catalogue that is not there
// is a slip of the pen, not a wish for an empty one.
func openCatalogue(ctx context.Context, path string, readOnly bool) (s *catalogue.Store, cleanup func(), isDemo bool, err error) {
	if path == "" {
		s, cleanup, err = openDemo(ctx, seed.Both)
		return s, cleanup, true, err
	}
	if readOnly {
		if err := mustBeFile(path); err != nil {
			return nil, nil, false, err
		}
	}
	s, err = catalogue.Open(ctx, path, openOptions(readOnly))
	if err != nil {
		return nil, nil, false, err
	}
	return s, func() { s.Close() }, false, nil
}

// openOptions are those of every catalogue this program opens.
func openOptions(readOnly bool) catalogue.Options {
	return catalogue.Options{ReadOnly: readOnly, OnLand: land.Contains, Unit: unitAges}
}

// unitAges looks a chronostratigraphic unit up in the chart.
func unitAges(name string) (top, base float64, problem string) {
	u, err := earth.UnitNamed(name)
	if err != nil {
		_, sentence := inputOf(err)
		return 0, 0, sentence
	}
	return u.TopMa, u.BaseMa, ""
}

// inputOf is the parameter and the sentence of an error about input.
func inputOf(err error) (parameter, sentence string) {
	var in interface{ Input() (string, string) }
	if errors.As(err, &in) {
		return in.Input()
	}
	return "", err.Error()
}

// openDemo fills the demo drawn from law into a temporary folder of its own.
func openDemo(ctx context.Context, law seed.Law) (*catalogue.Store, func(), error) {
	dir, err := os.MkdirTemp("", "fathombend-demo-")
	if err != nil {
		return nil, nil, fmt.Errorf("no temporary folder for the demo catalogue: %w", err)
	}
	o := openOptions(false)
	o.Throwaway = true
	s, err := catalogue.Open(ctx, filepath.Join(dir, "demo.db"), o)
	if err != nil {
		os.RemoveAll(dir)
		return nil, nil, err
	}
	cleanup := func() {
		s.Close()
		os.RemoveAll(dir)
	}
	if err := seed.Fill(ctx, s, law); err != nil {
		cleanup()
		return nil, nil, err
	}
	return s, cleanup, nil
}

func mustBeFile(path string) error {
	switch st, err := os.Stat(path); {
	case errors.Is(err, os.ErrNotExist):
		return fmt.Errorf("there is no catalogue at %s", path)
	case err != nil:
		return err
	case st.IsDir():
		return fmt.Errorf("%s is a folder, not a catalogue file", path)
	}
	return nil
}

const demoNote = "Using the demo catalogue (invented systems) from a temporary copy; give -catalogue FILE for your own."

// call is one call of a sub-command: its flags and where it reads and writes.
type call struct {
	flags     *flag.FlagSet
	in        io.Reader
	out, err  io.Writer
	catalogue *string
	name      string
}

// newCall prepares the flags of a sub-command. usage is the line after the
// program's name, text the help below it.
func newCall(name, usage, text string, in io.Reader, out, errOut io.Writer) *call {
	f := flag.NewFlagSet(name, flag.ContinueOnError)
	f.SetOutput(errOut)
	c := &call{flags: f, in: in, out: out, err: errOut, name: name}
	f.Usage = func() {
		fmt.Fprintf(f.Output(), "Usage: fathombend %s\n\n%s\n", usage, text)
		any := false
		f.VisitAll(func(*flag.Flag) { any = true })
		if any {
			fmt.Fprintln(f.Output(), "\nFlags:")
			f.PrintDefaults()
		}
	}
	return c
}

func (c *call) withCatalogue() { c.catalogue = c.flags.String("catalogue", "", "the catalogue `FILE`") }

// parse reads the flags. done says that the call is answered already: help was
// asked for (exit 0, on the output) or a flag was wrong (exit 2).
func (c *call) parse(args []string) (code int, done bool) {
	for _, a := range args {
		if a == "--" {
			break
		}
		if a == "-h" || a == "-help" || a == "--help" {
			c.flags.SetOutput(c.out)
			c.flags.Usage()
			return exitOK, true
		}
	}
	if err := c.flags.Parse(args); err != nil {
		return exitBadCall, true
	}
	return exitOK, false
}

// bad reports a bad call: exit 2, with the way to the help.
func (c *call) bad(format string, a ...any) int {
	fmt.Fprintf(c.err, "%s: %s\n", c.name, fmt.Sprintf(format, a...))
	fmt.Fprintf(c.err, "Help: fathombend %s -h\n", c.name)
	return exitBadCall
}

// failed reports a problem with the data: exit 1.
func (c *call) failed(err error) int {
	fmt.Fprintf(c.err, "%s: %s\n", c.name, commandMessage(err))
	return exitProblem
}

// commandMessage is an error as the person at the terminal reads it: the
// sentence, and the cause, which on a terminal is for the same person.
func commandMessage(err error) string {
	var e *catalogue.Error
	if !errors.As(err, &e) {
		return err.Error()
	}
	m := e.Message
	if e.Field != "" {
		m = e.Field + ": " + m
	}
	if e.Expected != "" {
		m += " Expected: " + e.Expected + "."
	}
	if e.Cause != nil {
		m += " (" + e.Cause.Error() + ")"
	}
	return m
}

// open opens the catalogue of the call for changing it. Commands that change a
// catalogue never touch the demo, so -catalogue is required.
func (c *call) open(ctx context.Context) (*catalogue.Store, func(), int) {
	if *c.catalogue == "" {
		return nil, nil, c.bad("say which catalogue to change with -catalogue FILE (the demo is never changed)")
	}
	s, cleanup, _, err := openCatalogue(ctx, *c.catalogue, false)
	if err != nil {
		return nil, nil, c.failed(err)
	}
	return s, cleanup, exitOK
}
