package main

import (
	"net/http"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

func (a *App) routesExample(e *echo.Echo) {
	get(e, "/example", a.examplePage)
}

// examplePage is the guided example. Its steps are pages of any catalogue; the
// one about a system of the invented survey stands only where that system does.
func (a *App) examplePage(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	if err := allow(q); err != nil {
		return err
	}
	p := views.ExamplePage{Page: a.page(c, "A guided example", "")}
	switch _, err := a.store.System(c.Request().Context(), views.ExampleSystem); {
	case err == nil:
		p.HasSystem = true
	case catalogue.CodeOf(err) != catalogue.NotFound:
		return err
	}
	return render(c, http.StatusOK, views.Example(p))
}
