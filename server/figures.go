package main

import (
	"net/http"

	"github.com/labstack/echo/v4"

	"fathombend/views"
)

// writeFigure answers with a figure as a file of its own. The file carries its
// colours in a style element, which the policy of the pages forbids; it holds
// no script and no link, so its own policy may allow that one thing.
func (a *App) writeFigure(c echo.Context, p views.Plot) error {
	h := c.Response().Header()
	h.Set("Content-Security-Policy", "default-src 'none'; style-src 'unsafe-inline'; frame-ancestors 'none'")
	return c.Blob(http.StatusOK, "image/svg+xml", p.Standalone())
}
