// Command server is Fathombend: a catalogue of submarine channels, its
// regressions and its expectations, as a web application and a command line.
package main

import (
	"fmt"
	"io"
	"os"
	"slices"
)

// Version of the program; see the change log.
const Version = "0.1.0"

// Exit codes of every command.
const (
	exitOK      = 0
	exitProblem = 1 // a problem with the data
	exitBadCall = 2 // a bad call
)

// command is one sub-command. Its help text is the source of the docs.
type command struct {
	name    string
	summary string
	run     func(args []string, in io.Reader, out, errOut io.Writer) int
}

func commands() []command {
	return []command{
		{"serve", "run the web application (the default)", runServe},
		{"import", "read a CSV of measurements into a catalogue", runImport},
		{"export", "write measurements as CSV", runExport},
		{"measure", "measure the planform of centrelines", runMeasure},
		{"recompute", "measure every stored centreline again", runRecompute},
		{"regress", "fit regressions and print them", runRegress},
		{"expect", "answer a CSV of targets", runExpect},
		{"expectation", "the same as expect", runExpect},
		{"account", "add people, set their passwords and roles", runAccount},
		{"release", "freeze the accepted catalogue under a name", runRelease},
		{"settings", "show and change what is chosen for a catalogue", runSettings},
		{"backup", "copy a catalogue while it is in use", runBackup},
		{"restore", "make a catalogue from a backup", runRestore},
		{"check", "look for faults and odd values", runCheck},
		{"invent", "write a large invented catalogue, for trials of speed", runInvent},
	}
}

func main() {
	os.Exit(run(os.Args[1:], os.Stdin, os.Stdout, os.Stderr))
}

func run(args []string, in io.Reader, out, errOut io.Writer) int {
	name := "serve"
	if len(args) > 0 && len(args[0]) > 0 && args[0][0] != '-' {
		name, args = args[0], args[1:]
	} else if len(args) == 1 && slices.Contains([]string{"-h", "-help", "--help"}, args[0]) {
		listCommands(out)
		fmt.Fprintln(out, "\nWithout a command: serve, which takes")
	} else if len(args) > 0 && (args[0] == "-version" || args[0] == "--version") {
		fmt.Fprintln(out, "fathombend", Version)
		return exitOK
	}
	if name == "help" {
		listCommands(out)
		return exitOK
	}
	for _, c := range commands() {
		if c.name == name {
			return c.run(args, in, out, errOut)
		}
	}
	fmt.Fprintf(errOut, "fathombend: no command %q.\n", name)
	listCommands(errOut)
	return exitBadCall
}

// listCommands prints every command with its summary.
func listCommands(out io.Writer) {
	fmt.Fprintln(out, "Commands; each answers -h:")
	for _, c := range commands() {
		fmt.Fprintf(out, "  %-12s %s\n", c.name, c.summary)
	}
}
