package main

import "github.com/labstack/echo/v4"

func (a *App) routesAccounts(e *echo.Echo) {}
