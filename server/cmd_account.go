package main

import (
	"bufio"
	"context"
	"crypto/rand"
	"errors"
	"fmt"
	"io"
	"os"
	"slices"
	"strings"
	"text/tabwriter"

	"golang.org/x/term"

	"fathombend/catalogue"
)

const accountHelp = `People who sign in to a catalogue.

  account -catalogue FILE add NAME       a new account; -role contributor (the
                                         default), curator or keeper; -credit
                                         TEXT is the public credit line
  account -catalogue FILE password NAME  a new password; signs NAME out everywhere
  account -catalogue FILE role NAME ROLE contributor, curator or keeper
  account -catalogue FILE list           all accounts

The password is asked for on a terminal; otherwise it is the first line of
standard input; when that is empty one is made up and printed once.`

func runAccount(args []string, in io.Reader, out, errOut io.Writer) int {
	c := newCall("account", "account -catalogue FILE add|password|role|list [NAME] [ROLE]", accountHelp, in, out, errOut)
	c.withCatalogue()
	role := c.flags.String("role", "contributor", "the `ROLE` of a new account: contributor, curator or keeper")
	credit := c.flags.String("credit", "", "the public credit line of a new account (default: its name)")
	words, code, done := c.parseMixed(args)
	if done {
		return code
	}
	if len(words) == 0 {
		return c.bad("say what to do: add, password, role or list")
	}
	want := map[string]int{"add": 2, "password": 2, "role": 3, "list": 1}[words[0]]
	switch {
	case want == 0:
		return c.bad("%q is not one of add, password, role, list", words[0])
	case len(words) != want:
		return c.bad("%s takes %d more words, not %d", words[0], want-1, len(words)-1)
	case !slices.Contains(catalogue.Roles, *role):
		return c.bad("%q is not a role. Expected one of: %s", *role, strings.Join(catalogue.Roles, ", "))
	case words[0] == "role" && !slices.Contains(catalogue.Roles, words[2]):
		return c.bad("%q is not a role. Expected one of: %s", words[2], strings.Join(catalogue.Roles, ", "))
	}
	ctx := context.Background()
	s, cleanup, code := c.open(ctx)
	if s == nil {
		return code
	}
	defer cleanup()
	if err := c.account(ctx, s, words, *role, *credit); err != nil {
		return c.failed(err)
	}
	return exitOK
}

func (c *call) account(ctx context.Context, s *catalogue.Store, words []string, role, credit string) error {
	switch words[0] {
	case "list":
		return c.listAccounts(ctx, s)
	case "role":
		if err := s.SetRole(ctx, words[1], words[2]); err != nil {
			return err
		}
		fmt.Fprintf(c.out, "%s is now a %s.\n", words[1], words[2])
		return nil
	}
	password, made, err := readPassword(c.in, c.err)
	if err != nil {
		return err
	}
	if words[0] == "add" {
		if credit == "" {
			credit = words[1]
		}
		if _, err := s.AddAccount(ctx, words[1], credit, role, password); err != nil {
			return err
		}
		fmt.Fprintf(c.out, "%s can sign in as a %s.\n", words[1], role)
	} else {
		if err := setPasswordOf(ctx, s, words[1], password); err != nil {
			return err
		}
		fmt.Fprintf(c.out, "%s has a new password.\n", words[1])
	}
	if made {
		fmt.Fprintf(c.out, "Password (shown this once): %s\n", password)
	}
	return nil
}

// setPasswordOf sets the password of the account named and ends its sessions.
func setPasswordOf(ctx context.Context, s *catalogue.Store, name, password string) error {
	if err := s.SetPassword(ctx, name, password); err != nil {
		return err
	}
	people, err := s.Accounts(ctx)
	if err != nil {
		return err
	}
	for _, p := range people {
		if strings.EqualFold(p.Name, strings.TrimSpace(name)) {
			return endSessions(ctx, s, p.ID)
		}
	}
	return nil
}

func (c *call) listAccounts(ctx context.Context, s *catalogue.Store) error {
	people, err := s.Accounts(ctx)
	if err != nil {
		return err
	}
	w := tabwriter.NewWriter(c.out, 0, 0, 2, ' ', 0)
	fmt.Fprintln(w, "NAME\tROLE\tCREDIT\tORCID\tSTATE")
	for _, p := range people {
		state := "active"
		if p.Disabled {
			state = "disabled"
		}
		fmt.Fprintf(w, "%s\t%s\t%s\t%s\t%s\n", p.Name, p.Role, p.Credit, p.ORCID, state)
	}
	return w.Flush()
}

// readPassword asks for a password twice on a terminal, else takes the first
// line of in. An empty line makes one up.
func readPassword(in io.Reader, prompt io.Writer) (password string, made bool, err error) {
	if f, ok := in.(*os.File); ok && term.IsTerminal(int(f.Fd())) {
		password, err = askTwice(f, prompt)
	} else {
		password, err = bufio.NewReader(io.LimitReader(in, 4096)).ReadString('\n')
		if errors.Is(err, io.EOF) {
			err = nil
		}
		password = strings.TrimRight(password, "\r\n")
	}
	if err != nil || password != "" {
		return password, false, err
	}
	return madePassword(), true, nil
}

// madePassword is a password nobody chose: 26 letters and digits, 130 bits.
func madePassword() string { return rand.Text() }

func askTwice(f *os.File, prompt io.Writer) (string, error) {
	fmt.Fprint(prompt, "Password (empty: one is made up): ")
	first, err := term.ReadPassword(int(f.Fd()))
	fmt.Fprintln(prompt)
	if err != nil || len(first) == 0 {
		return "", err
	}
	fmt.Fprint(prompt, "Once more: ")
	second, err := term.ReadPassword(int(f.Fd()))
	fmt.Fprintln(prompt)
	if err != nil {
		return "", err
	}
	if string(first) != string(second) {
		return "", errors.New("the two passwords differ; nothing was changed")
	}
	return string(first), nil
}
