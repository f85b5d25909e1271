package main

import (
	"net/http"
	"path"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/views"
)

// figureKinds are the files a figure comes as.
var figureKinds = []string{"svg", "png", "pdf"}

// writeFigure answers with a figure as a file of its own, of the kind the
// address ends in. An SVG carries its colours in a style element, which the
// policy of the pages forbids; it holds no script and no link, so its own
// policy may allow that one thing.
func (a *App) writeFigure(c echo.Context, p views.Plot) error {
	kind := strings.TrimPrefix(path.Ext(c.Request().URL.Path), ".")
	width, err := oneOf(c.QueryParams(), "width", "", views.FigureWidths)
	if err != nil {
		return err
	}
	b, err := p.File(kind, width)
	if err != nil {
		return err
	}
	return writeFigureFile(c, kind, b)
}

func writeFigureFile(c echo.Context, kind string, b []byte) error {
	if kind == "svg" {
		c.Response().Header().Set("Content-Security-Policy", "default-src 'none'; style-src 'unsafe-inline'; frame-ancestors 'none'")
	}
	return c.Blob(http.StatusOK, map[string]string{"svg": "image/svg+xml", "png": "image/png", "pdf": "application/pdf"}[kind], b)
}
