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

// namedFigure is one of several figures offered as files.
type namedFigure struct {
	text string // what it is
	svg  templ.SafeURL
	file string // what the file is called, without width and suffix
}

// figureFiles are the figures behind the named panels: themselves, and each
// model alone where a panel holds several.
func (p RegressionPage) figureFiles(names []string) []namedFigure {
	var out []namedFigure
	add := func(panel, text string) {
		out = append(out, namedFigure{text, p.figureHref(panel), "regression-" + strings.NewReplacer(":", "-", "_", "-").Replace(panel)})
	}
	for _, n := range names {
		predictor, fit := strings.CutPrefix(n, "fit:")
		if !fit {
			add(n, upperFirst(panelText(n)))
			continue
		}
		add(n, "Sinuosity against "+panelText(n))
		for _, on := range panels(p.Analysis) {
			if on.Predictor != predictor || len(on.Models) < 2 {
				continue
			}
			seen := map[string]bool{}
			for _, m := range on.Models {
				if !seen[m.Model] {
					seen[m.Model] = true
					m.Group = "" // the file has the fits of all kinds
					add("model:"+m.Model, upperFirst(modelText(m))+", alone")
				}
			}
		}
	}
	return out
}
