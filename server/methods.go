package main

import "github.com/labstack/echo/v4"

func (a *App) routesMethods(e *echo.Echo) {}
