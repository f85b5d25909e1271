package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"

	"fathombend/catalogue"
)

const backupHelp = `Writes a complete copy of a catalogue into the new file OUT while the catalogue
may be in use. OUT must not exist yet. The copy is checked before it is given
its name.`

func runBackup(args []string, in io.Reader, out, errOut io.Writer) int {
	c := newCall("backup", "backup -catalogue FILE OUT", backupHelp, in, out, errOut)
	c.withCatalogue()
	rest, code, done := c.parseMixed(args)
	if done {
		return code
	}
	if *c.catalogue == "" {
		return c.bad("say which catalogue to copy with -catalogue FILE (the demo is made anew at every start)")
	}
	if len(rest) != 1 {
		return c.bad("name one new file for the copy, not %d", len(rest))
	}
	if err := copyCatalogue(context.Background(), *c.catalogue, rest[0]); err != nil {
		return c.failed(err)
	}
	fmt.Fprintf(out, "%s holds a checked copy of %s.\n", rest[0], *c.catalogue)
	return exitOK
}

const restoreHelp = `Makes the new catalogue FILE from the backup IN, after checking the backup. FILE
must not exist yet: an existing catalogue is never overwritten; move it away
first.`

func runRestore(args []string, in io.Reader, out, errOut io.Writer) int {
	c := newCall("restore", "restore IN FILE", restoreHelp, in, out, errOut)
	rest, code, done := c.parseMixed(args)
	if done {
		return code
	}
	if len(rest) != 2 {
		return c.bad("name the backup and the new catalogue file: restore IN FILE")
	}
	if err := copyCatalogue(context.Background(), rest[0], rest[1]); err != nil {
		return c.failed(err)
	}
	fmt.Fprintf(out, "%s is restored from %s.\n", rest[1], rest[0])
	return exitOK
}

// copyCatalogue copies the catalogue at from into the new file at to: first to
// a name beside it, checked there, so that a file called to is always whole.
func copyCatalogue(ctx context.Context, from, to string) error {
	if err := mustBeFile(from); err != nil {
		return err
	}
	if _, err := os.Lstat(to); !errors.Is(err, os.ErrNotExist) {
		if err != nil {
			return err
		}
		return fmt.Errorf("%s exists already; give a new name", to)
	}
	dir, err := os.MkdirTemp(filepath.Dir(to), ".fathombend-copy-")
	if err != nil {
		return err
	}
	defer os.RemoveAll(dir)
	src, err := catalogue.Open(ctx, from, catalogue.Options{ReadOnly: true})
	if err != nil {
		return err
	}
	defer src.Close()
	part := filepath.Join(dir, "copy.db")
	if err := src.Backup(ctx, part); err != nil {
		return err
	}
	if err := checkFile(ctx, part); err != nil {
		return err
	}
	// A hard link fails where the name has been taken in the meantime, which a
	// rename would overwrite; file systems without hard links get the rename.
	if err := os.Link(part, to); err != nil {
		if errors.Is(err, os.ErrExist) {
			return fmt.Errorf("%s exists already; give a new name", to)
		}
		return os.Rename(part, to)
	}
	return nil
}

// checkFile opens the catalogue at path and fails when it is not sound.
func checkFile(ctx context.Context, path string) error {
	s, err := catalogue.Open(ctx, path, catalogue.Options{ReadOnly: true})
	if err != nil {
		return err
	}
	defer s.Close()
	faults, err := s.Integrity(ctx)
	if err != nil {
		return err
	}
	if len(faults) > 0 {
		return fmt.Errorf("the copy is not sound: %s", faults[0])
	}
	return nil
}

const checkHelp = `Checks a catalogue file: that the database is whole, that every reference leads
somewhere, that the text and place indexes agree with the records, and which
accepted measurements the input checks find odd. Exit 0 when the file is sound,
1 when it is not; odd measurements are printed and do not change the exit code.`

func runCheck(args []string, in io.Reader, out, errOut io.Writer) int {
	c := newCall("check", "check -catalogue FILE", checkHelp, in, out, errOut)
	c.withCatalogue()
	rest, code, done := c.parseMixed(args)
	if done {
		return code
	}
	if len(rest) > 0 {
		return c.bad("takes no more words, not %q", rest[0])
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
	faults, err := s.Integrity(ctx)
	if err != nil {
		return c.failed(err)
	}
	for _, f := range faults {
		fmt.Fprintln(out, "fault: "+f)
	}
	rows, odd, err := c.printOdd(ctx, s)
	if err != nil {
		return c.failed(err)
	}
	fmt.Fprintf(out, "%d measurements, %d with a warning, %d faults in the file.\n", rows, odd, len(faults))
	if len(faults) > 0 {
		return exitProblem
	}
	return exitOK
}

// printOdd prints what the input checks find on every accepted measurement.
func (c *call) printOdd(ctx context.Context, s *catalogue.Store) (rows, odd int, err error) {
	all, err := s.Rows(ctx, catalogue.Filter{})
	if err != nil {
		return 0, 0, err
	}
	for _, r := range all {
		findings, err := s.Check(ctx, r)
		if err != nil {
			return 0, 0, err
		}
		for _, f := range findings {
			fmt.Fprintf(c.out, "warning: %s of %s, column %s: %s\n", r.Measurement, r.System, f.Column, f.Message)
		}
		if len(findings) > 0 {
			odd++
		}
	}
	return len(all), odd, nil
}
