package main

import (
	"net/http"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/catalogue/land"
	"fathombend/stats"
	"fathombend/stats/earth"
	"fathombend/stats/expectation"
	"fathombend/views"
)

func (a *App) routesMethods(e *echo.Echo) {
	get(e, "/methods", a.methods)
}

// methods states every equation, setting and source in use.
func (a *App) methods(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	if err := allow(q); err != nil {
		return err
	}
	chosen, err := a.settings(c.Request().Context())
	if err != nil {
		return err
	}
	p := views.MethodsPage{
		Page: a.page(c, "Methods", "methods"), Request: stats.DefaultRequest(), Classes: chosen.ClassLimits,
		Explanations: expectation.Explanations(), Cautions: expectation.Cautions(), Histories: earth.Histories(),
		Poles: earth.PoleTables(), Climate: chosen.Climate, Observations: earth.Observations(),
		Credits: earth.Credits(), LandCredit: land.Credit, Filters: catalogue.FilterParameters,
	}
	return render(c, http.StatusOK, views.Methods(p))
}
