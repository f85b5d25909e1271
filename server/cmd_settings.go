package main

import (
	"context"
	"fmt"
	"io"
	"os"
)

const settingsHelp = `What a keeper chose for a catalogue: title, licence of releases, class limits,
climate table, default cluster, registration.

  settings -catalogue FILE export            the settings in force, as JSON
  settings -catalogue FILE import FILE.json  reads such a file: settings it does
                                             not name stay, null is the default;
                                             FILE.json may be - for standard input
  settings -catalogue FILE log               every change with its date and reason

An import is all or nothing, and stands in the log with -why.`

func runSettings(args []string, in io.Reader, out, errOut io.Writer) int {
	c := newCall("settings", "settings -catalogue FILE export|import|log [FILE.json]", settingsHelp, in, out, errOut)
	c.withCatalogue()
	why := c.flags.String("why", "imported on the command line", "`TEXT` that says why the settings change")
	words, code, done := c.parseMixed(args)
	if done {
		return code
	}
	want := 1
	switch {
	case len(words) == 0:
		return c.bad("say what to do: export, import or log")
	case words[0] == "import":
		want = 2
	case words[0] != "export" && words[0] != "log":
		return c.bad("%q is not one of export, import, log", words[0])
	}
	if len(words) != want {
		return c.bad("%s takes %d more words, not %d", words[0], want-1, len(words)-1)
	}
	if *c.catalogue != "" {
		if err := mustBeFile(*c.catalogue); err != nil {
			return c.failed(err)
		}
	}
	ctx := context.Background()
	s, cleanup, code := c.open(ctx)
	if s == nil {
		return code
	}
	defer cleanup()
	kept, err := s.Settings(ctx)
	if err != nil {
		return c.failed(err)
	}
	now, unusable := settingsFrom(kept)
	for _, name := range unusable {
		fmt.Fprintf(errOut, "%s: this version cannot use the value kept; its default is in force.\n", name)
	}
	switch words[0] {
	case "export":
		b, err := now.document()
		if err != nil {
			return c.failed(err)
		}
		_, err = out.Write(b)
		if err != nil {
			return c.failed(err)
		}
		return exitOK
	case "log":
		changes, err := s.SettingChanges(ctx, 1000)
		if err != nil {
			return c.failed(err)
		}
		for _, v := range changes {
			fmt.Fprintf(out, "%s  %s  %s: %s -> %s  (%s)\n", v.At.UTC().Format("2006-01-02 15:04"), v.Who, v.Record, settingWords(v.Before), settingWords(v.After), v.Why)
		}
		return exitOK
	}
	b, err := readSmallFile(words[1], in)
	if err != nil {
		return c.failed(err)
	}
	next, wrong := readSettingsFile(b, now)
	if len(wrong) > 0 {
		fmt.Fprintln(errOut, "settings: nothing was changed. "+wrongInFile(wrong))
		return exitProblem
	}
	n, err := storeSettings(ctx, s, next, 0, *why)
	if err != nil {
		return c.failed(err)
	}
	fmt.Fprintln(out, changedSettings(n))
	return exitOK
}

// readSmallFile reads a file, or standard input as -, of at most the size of a
// settings file.
func readSmallFile(name string, in io.Reader) ([]byte, error) {
	if name != "-" {
		f, err := os.Open(name)
		if err != nil {
			return nil, err
		}
		defer f.Close()
		in = f
	}
	b, err := io.ReadAll(io.LimitReader(in, maxSettingsFile+1))
	if err == nil && len(b) > maxSettingsFile {
		err = fmt.Errorf("%s is larger than 1 MB, which no settings file is", name)
	}
	return b, err
}
