package views

import (
	"bytes"
	"html"
	"regexp"
	"strings"
)

// Finish puts the last hand to a page that has been rendered: what follows from
// all of it and so cannot be written while it is being made.
func Finish(page []byte) []byte { return StackTables(FillContents(page)) }

var (
	contentsPlace = []byte("<ul data-contents></ul>")
	heading       = regexp.MustCompile(`(?s)<h2 id="([^"]+)"[^>]*>(.*?)</h2>`)
	tag           = regexp.MustCompile(`<[^>]*>`)
)

// FillContents puts links to the headings that follow into the place that the
// component Contents left for them.
func FillContents(page []byte) []byte {
	i := bytes.Index(page, contentsPlace)
	if i < 0 {
		return page
	}
	var list strings.Builder
	for _, m := range heading.FindAllSubmatch(page[i:], -1) {
		text := html.UnescapeString(string(tag.ReplaceAll(m[2], nil)))
		list.WriteString(`<li><a href="#` + string(m[1]) + `">` + html.EscapeString(strings.Join(strings.Fields(text), " ")) + `</a></li>`)
	}
	out := make([]byte, 0, len(page)+list.Len())
	out = append(out, page[:i]...)
	out = append(out, "<ul>"+list.String()+"</ul>"...)
	return append(out, page[i+len(contentsPlace):]...)
}

// headID is the place of a heading on its page.
func headID(title string) string { return strings.ReplaceAll(strings.ToLower(title), " ", "-") }
