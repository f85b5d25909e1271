package main

import (
	"github.com/labstack/echo/v4"

	"fathombend/views"
)

func (a *App) middleware(e *echo.Echo) {}

func requestID(c echo.Context) string { return c.Response().Header().Get(echo.HeaderXRequestID) }

// page fills the frame of a page.
func (a *App) page(c echo.Context, title, nav string) views.Page {
	return views.Page{Title: title, Nav: nav, Path: c.Request().URL.Path, RequestID: requestID(c), ReadOnly: a.readOnly}
}

func (a *App) routesStatic(e *echo.Echo) {}
