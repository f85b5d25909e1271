package main

import (
	"net/http"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/views"
)

func (a *App) routesChanges(e *echo.Echo) {
	get(e, "/changes", a.changesPage)
}

// changesPage shows the change log that ships with the program.
func (a *App) changesPage(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	if err := allow(q); err != nil {
		return err
	}
	return render(c, http.StatusOK, views.Changes(a.page(c, "Changes", ""), plainBlocks(string(assets["changes.md"]))))
}

// plainBlocks reads the little of Markdown that the change log uses: headings
// with one or two marks, paragraphs and lists.
func plainBlocks(text string) []views.TextBlock {
	var out []views.TextBlock
	for _, chunk := range strings.Split(text, "\n\n") {
		chunk = strings.TrimSpace(chunk)
		switch {
		case chunk == "", strings.HasPrefix(chunk, "# "): // the page has its own heading
		case strings.HasPrefix(chunk, "## "):
			out = append(out, views.TextBlock{Heading: strings.TrimPrefix(chunk, "## ")})
		case strings.HasPrefix(chunk, "- "):
			var items []string
			for _, item := range strings.Split("\n"+chunk, "\n- ")[1:] {
				items = append(items, strings.Join(strings.Fields(item), " "))
			}
			out = append(out, views.TextBlock{Items: items})
		default:
			out = append(out, views.TextBlock{Text: strings.Join(strings.Fields(chunk), " ")})
		}
	}
	return out
}
