package views

import (
	"net/url"
	"strings"

	"github.com/a-h/templ"
)

// FigureKinds are the files a figure comes as.
var FigureKinds = []string{"svg", "png", "pdf"}

// FigureWidths are the widths of a figure in print.
var FigureWidths = []string{"single", "double"}

var figureWidths = []struct{ name, text string }{
	{"single", "One column, 85 mm"}, {"double", "two columns, 175 mm"},
}

// figureFile is the address of a figure as a file of one kind and width.
func figureFile(svg, kind, width string) templ.SafeURL {
	path, query, _ := strings.Cut(svg, "?")
	q, err := url.ParseQuery(query)
	if err != nil {
		q = url.Values{}
	}
	q.Set("width", width)
	return templ.SafeURL(strings.TrimSuffix(path, ".svg") + "." + kind + "?" + q.Encode())
}

func upper(kind string) string { return strings.ToUpper(kind) }

// figureAs is the address of a figure as another kind of file.
func figureAs(svg templ.SafeURL, kind string) templ.SafeURL {
	return templ.SafeURL(strings.Replace(string(svg), ".svg", "."+kind, 1))
}
