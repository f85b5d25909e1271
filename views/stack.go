package views

import (
	"bytes"
	"strconv"
	"strings"

	"golang.org/x/net/html"
)

// StackTables prepares the data tables of a page for a narrow window, where the
// style sheet sets each row as a block: every cell gets the heading of its
// column as data-label, and the table the class "stacks". The headings are so
// written once, in the head. Tables of one or two columns fit a phone as they
// are; a table whose head has several rows or joined cells stays a table that
// is moved sideways, and so does a matrix (class grid), which is read both ways.
func StackTables(page []byte) []byte {
	open, shut := []byte(`<table class="data`), []byte("</table>")
	if !bytes.Contains(page, open) {
		return page
	}
	out := make([]byte, 0, len(page)+len(page)/8)
	for {
		i := bytes.Index(page, open)
		if i < 0 {
			return append(out, page...)
		}
		n := bytes.Index(page[i:], shut)
		if n < 0 {
			return append(out, page...)
		}
		out = append(out, page[:i]...)
		out = append(out, stackTable(page[i:i+n])...)
		page = page[i+n:]
	}
}

// stackTable is one table, from its start tag to before its end tag.
func stackTable(table []byte) []byte {
	heads, ok := columnHeads(table)
	if end := bytes.IndexByte(table, '>'); !ok || len(heads) < 3 || end > 0 && bytes.Contains(table[:end], []byte(" grid")) {
		return table
	}
	var out bytes.Buffer
	z := html.NewTokenizer(bytes.NewReader(table))
	body := false
	var taken []int // rows below that a cell of each column still covers
	column := 0
	cellEnd := -1 // where the start tag of the cell at hand ends, less its >
	for {
		kind := z.Next()
		if kind == html.ErrorToken {
			return out.Bytes()
		}
		raw := append([]byte(nil), z.Raw()...)
		if kind != html.StartTagToken {
			if cellEnd >= 0 && kind == html.EndTagToken && string(raw) == "</td>" {
				markUnknown(&out, cellEnd)
				cellEnd = -1
			}
			out.Write(raw)
			continue
		}
		switch t := z.Token(); {
		case t.Data == "table":
			raw = bytes.Replace(raw, []byte(`class="data`), []byte(`class="data stacks`), 1)
		case t.Data == "tbody":
			body = true
		case body && t.Data == "tr":
			column = 0
		case body && (t.Data == "td" || t.Data == "th"):
			for column < len(taken) && taken[column] > 0 {
				taken[column]--
				column++
			}
			if t.Data == "td" && column < len(heads) && heads[column] != "" && spans(t, "colspan") == 1 {
				raw = append(raw[:len(raw)-1], ` data-label="`+html.EscapeString(heads[column])+`">`...)
				cellEnd = out.Len() + len(raw) - 1
			}
			taken = cover(taken, column, spans(t, "rowspan")-1)
			column += spans(t, "colspan")
		}
		out.Write(raw)
	}
}

// markUnknown gives a cell that holds nothing but the mark for "not known" the
// attribute data-unknown: beside its heading such a cell says nothing.
func markUnknown(out *bytes.Buffer, at int) {
	if text := bytes.TrimSpace(out.Bytes()[at+1:]); string(text) == unknownMark {
		rest := string(out.Bytes()[at:])
		out.Truncate(at)
		out.WriteString(" data-unknown" + rest)
	}
}

func cover(taken []int, column, rows int) []int {
	if rows < 1 {
		return taken
	}
	for len(taken) <= column {
		taken = append(taken, 0)
	}
	taken[column] = rows
	return taken
}

// columnHeads are the headings of the columns, each with its unit; ok is false
// when the head is not one row of single cells.
func columnHeads(table []byte) (heads []string, ok bool) {
	z := html.NewTokenizer(bytes.NewReader(table))
	head, rows, text, unit, hidden := false, 0, "", "", 0
	span1 := ""
	for {
		kind := z.Next()
		if kind == html.ErrorToken {
			return nil, false
		}
		t := z.Token()
		switch {
		case kind == html.StartTagToken && t.Data == "thead":
			head = true
		case kind == html.EndTagToken && t.Data == "thead":
			return heads, rows == 1
		case !head:
		case kind == html.StartTagToken && t.Data == "tr":
			rows++
		case kind == html.StartTagToken && (t.Data == "th" || t.Data == "td"):
			if spans(t, "colspan") > 1 || spans(t, "rowspan") > 1 {
				return nil, false
			}
			text, unit = "", ""
		case kind == html.EndTagToken && (t.Data == "th" || t.Data == "td"):
			heads = append(heads, headText(text, unit))
		case kind == html.StartTagToken && t.Data == "span":
			span1 = attribute(t, "class")
			if attribute(t, "aria-hidden") == "true" || strings.Contains(span1, "visually-hidden") {
				hidden++
			}
		case kind == html.EndTagToken && t.Data == "span":
			span1, hidden = "", 0
		case kind == html.TextToken && hidden == 0:
			if span1 == "unit" {
				unit += t.Data
			} else {
				text += t.Data
			}
		}
	}
}

func headText(text, unit string) string {
	text, unit = strings.Join(strings.Fields(text), " "), strings.Join(strings.Fields(unit), " ")
	if unit != "" && text != "" {
		return text + " (" + strings.Trim(unit, "()") + ")"
	}
	return text
}

func attribute(t html.Token, name string) string {
	for _, a := range t.Attr {
		if a.Key == name {
			return a.Val
		}
	}
	return ""
}

func spans(t html.Token, name string) int {
	if n, err := strconv.Atoi(attribute(t, name)); err == nil && n > 0 {
		return n
	}
	return 1
}
