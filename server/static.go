package main

import (
	"crypto/sha256"
	"encoding/hex"
	"io/fs"
	"mime"
	"net/http"
	"path"
	"slices"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/static"
)

// assets are the files served under /static/. The faces are put before the
// style sheet and the chart's after it: one request instead of three.
var assets = readAssets(static.Files)

func readAssets(files fs.FS) map[string][]byte {
	out := map[string][]byte{}
	_ = fs.WalkDir(files, ".", func(name string, d fs.DirEntry, err error) error {
		if err != nil || d.IsDir() || path.Ext(name) == ".go" {
			return err
		}
		b, err := fs.ReadFile(files, name)
		out[name] = b
		return err
	})
	out["fathombend.css"] = slices.Concat(out["fonts.css"], out["fathombend.css"], out["chart.css"])
	return out
}

// assetAddresses maps "fathombend.css" to "/static/fathombend.css?v=hash": an
// address that changes with the content can be kept for ever.
var assetAddresses = hashedAddresses(assets)

func hashedAddresses(files map[string][]byte) map[string]string {
	out := make(map[string]string, len(files))
	for name, b := range files {
		sum := sha256.Sum256(b)
		out[name] = "/static/" + name + "?v=" + hex.EncodeToString(sum[:6])
	}
	return out
}

func (a *App) routesStatic(e *echo.Echo) {
	get(e, "/static/*", serveStatic)
	get(e, "/favicon.ico", func(c echo.Context) error { return serveStaticName(c, "favicon.svg") })
}

func serveStatic(c echo.Context) error { return serveStaticName(c, c.Param("*")) }

// serveStaticName answers with the file, its hash as ETag. Asked with the hash
// in the address it may be kept for ever, else it is asked for again after an
// hour.
func serveStaticName(c echo.Context, name string) error {
	address, ok := assetAddresses[name]
	if !ok {
		return echo.NewHTTPError(http.StatusNotFound, "There is no such file here.")
	}
	_, hash, _ := strings.Cut(address, "?v=")
	h := c.Response().Header()
	h.Set("ETag", `W/"`+hash+`"`)
	h.Set("Cache-Control", "public, max-age=3600")
	if c.QueryParam("v") == hash || strings.HasSuffix(name, ".woff2") {
		h.Set("Cache-Control", "public, max-age=31536000, immutable")
	}
	if strings.Contains(c.Request().Header.Get("If-None-Match"), hash) {
		return c.NoContent(http.StatusNotModified)
	}
	kind := mime.TypeByExtension(path.Ext(name))
	switch path.Ext(name) {
	case ".woff2":
		kind = "font/woff2"
	case ".txt":
		kind = "text/plain; charset=utf-8"
	}
	return c.Blob(http.StatusOK, kind, assets[name])
}
