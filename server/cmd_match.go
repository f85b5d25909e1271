package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"slices"
	"strings"

	"fathombend/catalogue"
)

// matching are the flags of an import that say how a file is read.
type matching struct {
	match                        *bool
	encoding, separator, numbers string
	as                           map[string]string // folded header -> name of the cell
}

func matchFlags(c *call) *matching {
	m := &matching{as: map[string]string{}}
	m.match = c.flags.Bool("match", false, "match headers, separator and number signs instead of asking for the contract's")
	c.flags.StringVar(&m.encoding, "encoding", "", "with -match, `ENCODING` of the file: "+strings.Join(catalogue.Encodings, ", "))
	c.flags.StringVar(&m.separator, "separator", "", "with -match, the `SIGN` between cells: , ; | or tab")
	c.flags.StringVar(&m.numbers, "numbers", "", "with -match, the `STYLE` of its numbers: "+strings.Join(catalogue.NumberStyles, ", "))
	c.flags.Func("as", "with -match, `HEADER=COLUMN`: what one column is read as; may be repeated", func(v string) error {
		i := strings.LastIndexByte(v, '=')
		if i < 0 {
			return errors.New("expected HEADER=COLUMN")
		}
		header, name := strings.TrimSpace(v[:i]), strings.TrimSpace(v[i+1:])
		if name != "" && catalogue.ColumnOf(name) == "" {
			return fmt.Errorf("there is no column %q", clip(name))
		}
		m.as[strings.ToLower(header)] = name
		return nil
	})
	return m
}

func (m *matching) badCall() string {
	if m.separator == "tab" {
		m.separator = "\t"
	}
	switch {
	case !*m.match && (m.encoding+m.separator+m.numbers != "" || len(m.as) > 0):
		return "-encoding, -separator, -numbers and -as go with -match"
	case m.encoding != "" && !slices.Contains(catalogue.Encodings, m.encoding):
		return fmt.Sprintf("-encoding %q is not one of %s", m.encoding, strings.Join(catalogue.Encodings, ", "))
	case m.separator != "" && !slices.Contains(catalogue.Separators, m.separator):
		return fmt.Sprintf("-separator %q is not one of , ; | tab", m.separator)
	case m.numbers != "" && !slices.Contains(catalogue.NumberStyles, m.numbers):
		return fmt.Sprintf("-numbers %q is not one of %s", m.numbers, strings.Join(catalogue.NumberStyles, ", "))
	}
	return ""
}

// read looks at the file and says how it is read; what only a person can say is
// an error that names the flag.
func (m *matching) read(ctx context.Context, out io.Writer, f io.ReadSeeker) (catalogue.Reading, error) {
	r := catalogue.Reading{Encoding: m.encoding, Separator: m.separator, Numbers: m.numbers}
	look, err := catalogue.LookAt(ctx, f, r)
	if err != nil {
		return r, err
	}
	if look.Fault != "" {
		return r, fmt.Errorf("%s", sentence(look.Fault, look.Fit))
	}
	if r.Separator = look.Separator; r.Encoding == "" {
		if r.Encoding = look.Encoding; r.Encoding == "" {
			return r, errors.New("some characters of the file are not UTF-8; say -encoding windows-1252 when it is Latin-1")
		}
	}
	if r.Numbers == "" {
		if r.Numbers = look.Numbers; r.Numbers == "" {
			return r, fmt.Errorf("some numbers can be read in two ways (%s); say -numbers %s", strings.Join(look.Doubtful, "; "), strings.Join(catalogue.NumberStyles, ", "))
		}
	}
	known := map[string]bool{}
	for i, g := range catalogue.GuessColumns(look.Header) {
		header := look.Header[i]
		name, said := m.as[strings.ToLower(header)]
		if known[strings.ToLower(header)] = true; !said {
			name = g.Name
		}
		r.Columns = append(r.Columns, name)
		switch {
		case name == "":
			fmt.Fprintf(out, "matched: column %d, %s, is not read\n", i+1, header)
		case !g.Sure || said:
			fmt.Fprintf(out, "matched: column %d, %s, is read as %s\n", i+1, header, name)
		}
	}
	for header := range m.as {
		if !known[header] {
			return r, fmt.Errorf("-as names the header %q, which the file does not have", clip(header))
		}
	}
	_, err = f.Seek(0, io.SeekStart)
	return r, err
}

// seekable is a file that can be read twice; what comes through a pipe is kept
// in a temporary one.
func seekable(r io.Reader) (io.ReadSeeker, func(), error) {
	if f, ok := r.(*os.File); ok {
		if _, err := f.Seek(0, io.SeekStart); err == nil {
			return f, func() {}, nil
		}
	}
	f, err := os.CreateTemp("", "fathombend-import-*")
	if err != nil {
		return nil, nil, err
	}
	cleanup := func() {
		f.Close()
		os.Remove(f.Name())
	}
	if _, err = io.Copy(f, r); err == nil {
		_, err = f.Seek(0, io.SeekStart)
	}
	if err != nil {
		cleanup()
		return nil, nil, err
	}
	return f, cleanup, nil
}
