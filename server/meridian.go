package main

import "github.com/labstack/echo/v4"

func (a *App) routesMeridian(e *echo.Echo) {}
