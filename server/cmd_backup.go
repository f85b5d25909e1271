package main

import (
	"context"
	"fmt"
	"io"

	"fathombend/catalogue"
)

const backupHelp = `Writes a complete copy of a catalogue into the new file OUT while the catalogue
may be in use. OUT must not exist yet. The copy is checked before it is given
its name, and its SHA-256 is written beside it as OUT.sha256.`

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
	ctx := context.Background()
	s, cleanup, _, err := openCatalogue(ctx, *c.catalogue, true)
	if err != nil {
		return c.failed(err)
	}
	defer cleanup()
	if err := s.BackupWithChecksum(ctx, rest[0]); err != nil {
		return c.failed(err)
	}
	fmt.Fprintf(out, "%s holds a checked copy of %s.\n", rest[0], *c.catalogue)
	return exitOK
}

const restoreHelp = `Makes the new catalogue FILE from the backup IN, after checking the backup, also
against its checksum if IN.sha256 lies beside it. FILE
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
	if err := mustBeFile(rest[0]); err != nil {
		return c.failed(err)
	}
	if err := catalogue.Restore(context.Background(), rest[0], rest[1]); err != nil {
		return c.failed(err)
	}
	fmt.Fprintf(out, "%s is restored from %s.\n", rest[1], rest[0])
	return exitOK
}

const checkHelp = `Checks a catalogue file: that the database is whole, that every reference leads
somewhere, that the text and place indexes agree with the records, that it fits
its checksum when FILE.sha256 lies beside it (a backup has one), that each release
is still what was frozen, and which accepted measurements the input checks find odd. Exit 0 when the file is sound,
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
	if _, err := catalogue.VerifyChecksum(s.Path()); err != nil {
		faults = append(faults, commandMessage(err))
	}
	if len(faults) == 0 {
		if faults, err = releaseFaults(ctx, s); err != nil {
			return c.failed(err)
		}
	}
	for _, f := range faults {
		fmt.Fprintln(out, "fault: "+f)
	}
	rows, odd, err := c.printOdd(ctx, s)
	if err != nil {
		return c.failed(err)
	}
	fmt.Fprintf(out, "%s, %d with a warning, %s in the file.\n", counted(rows, "measurement", "measurements"), odd, counted(len(faults), "fault", "faults"))
	if len(faults) > 0 {
		return exitProblem
	}
	return exitOK
}

// releaseFaults reads every release back and compares it with its checksum.
func releaseFaults(ctx context.Context, s *catalogue.Store) (faults []string, err error) {
	all, err := s.Releases(ctx)
	if err != nil {
		return nil, err
	}
	for _, r := range all {
		whole, err := s.VerifyRelease(ctx, r.Name)
		if err != nil {
			return faults, err
		}
		if !whole {
			faults = append(faults, "release "+r.Name+" is not what was frozen: its checksum differs")
		}
	}
	return faults, nil
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
