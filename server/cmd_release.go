package main

import (
	"context"
	"fmt"
	"io"

	"fathombend/catalogue"
)

const releaseHelp = `Freezes the accepted catalogue under NAME: numbered, checksummed and citable, and
never changed afterwards. Prints what it holds and the SHA-256 of its
measurement table, which export -release NAME writes again byte for byte.
Without NAME it lists the releases.`

func runRelease(args []string, in io.Reader, out, errOut io.Writer) int {
	c := newCall("release", "release -catalogue FILE [NAME] [-notes TEXT] [-title TEXT] [-licence SPDX] [-doi DOI]", releaseHelp, in, out, errOut)
	c.withCatalogue()
	n := catalogue.NewRelease{Program: Version}
	c.flags.StringVar(&n.Notes, "notes", "", "what is new in it, `TEXT`")
	c.flags.StringVar(&n.Title, "title", "", "`TEXT` the catalogue is cited by; without it, that of the settings, else of the release before")
	c.flags.StringVar(&n.Licence, "licence", "", "`SPDX` name, CC-BY-4.0 or CC0-1.0; without it, that of the settings, else the widest its rows allow")
	c.flags.StringVar(&n.DOI, "doi", "", "`DOI`, if one is reserved")
	rest, code, done := c.parseMixed(args)
	if done {
		return code
	}
	if len(rest) > 1 {
		return c.bad("name one release, not %d", len(rest))
	}
	ctx := context.Background()
	if len(rest) == 0 {
		return c.listReleases(ctx)
	}
	n.Name = rest[0]
	if *c.catalogue != "" {
		// A release of a file that is not there is a slip, not a wish for an
		// empty catalogue.
		if err := mustBeFile(*c.catalogue); err != nil {
			return c.failed(err)
		}
	}
	s, cleanup, code := c.open(ctx)
	if s == nil {
		return code
	}
	defer cleanup()
	kept, err := s.Settings(ctx)
	if err != nil {
		return c.failed(err)
	}
	chosen, _ := settingsFrom(kept)
	if n.Settings, err = chosen.text(); err != nil {
		return c.failed(err)
	}
	if n.Title == "" {
		if n.Title, err = s.Title(ctx); err != nil {
			return c.failed(err)
		}
	}
	if n.Licence == "" {
		n.Licence = chosen.Licence
	}
	r, err := s.Freeze(ctx, n)
	if err != nil {
		return c.failed(err)
	}
	fmt.Fprintf(out, "Release %s is frozen: %s of %s from %s, %s, licence %s.\nSHA-256 of its table: %s\n",
		r.Name, counted(r.Measurements, "measurement", "measurements"), counted(r.Systems, "system", "systems"), counted(r.Sources, "source", "sources"), counted(r.Centrelines, "centreline", "centrelines"), r.Licence, r.Checksum)
	if r.Invented > 0 {
		fmt.Fprintln(out, inventedOf(r.Invented, r.Measurements))
	}
	return exitOK
}

func (c *call) listReleases(ctx context.Context) int {
	if *c.catalogue == "" {
		return c.bad("say which catalogue with -catalogue FILE (the demo has no releases)")
	}
	s, cleanup, _, err := openCatalogue(ctx, *c.catalogue, true)
	if err != nil {
		return c.failed(err)
	}
	defer cleanup()
	list, err := s.Releases(ctx)
	if err != nil {
		return c.failed(err)
	}
	if len(list) == 0 {
		fmt.Fprintln(c.out, "No release has been made yet.")
		return exitOK
	}
	t := table(c.out, "Releases, newest first", "name", "frozen", "systems", "measurements", "licence", "sha256")
	for _, r := range list {
		fmt.Fprintf(t, "%s\t%s\t%d\t%d\t%s\t%s\n", r.Name, r.At.UTC().Format("2006-01-02"), r.Systems, r.Measurements, r.Licence, r.Checksum)
	}
	if err := t.Flush(); err != nil {
		return c.failed(err)
	}
	return exitOK
}
