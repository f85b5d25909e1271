package main

import (
	"bytes"
	"encoding/json"
	"errors"
	"io"
	"net/http"
	"net/url"
	"strconv"
	"strings"

	"github.com/labstack/echo/v4"
)

// targetTakes says how a target may be sent, for the answer to anything else.
const targetTakes = "Send the target in the query, or by POST as a form (application/x-www-form-urlencoded, multipart/form-data) or as a JSON object of names and values (application/json). Many targets go to /expectation.csv as CSV"

// targetParams returns the parameters of a target: the query and, by POST, the
// body beside it. Both count; a name that stands in both is given twice, and
// refused where one value is expected.
func targetParams(c echo.Context) (url.Values, error) {
	q, err := url.ParseQuery(c.Request().URL.RawQuery)
	if err != nil {
		return nil, &badInput{"query", "the address holds a broken escape (%). Expected %25 for a plain %"}
	}
	if c.Request().Method != http.MethodPost {
		return q, nil
	}
	body, err := targetForm(c)
	for name, values := range body {
		q[name] = append(q[name], values...)
	}
	return q, err
}

// targetForm reads the body of a target.
func targetForm(c echo.Context) (url.Values, error) {
	r := c.Request()
	kind, _, _ := strings.Cut(r.Header.Get(echo.HeaderContentType), ";")
	switch kind = strings.ToLower(strings.TrimSpace(kind)); kind {
	case echo.MIMEApplicationForm:
		if err := r.ParseForm(); err != nil {
			return nil, bodyError(err)
		}
		return r.PostForm, nil
	case echo.MIMEMultipartForm:
		if err := r.ParseMultipartForm(8 << 20); err != nil {
			return nil, bodyError(err)
		}
		return r.MultipartForm.Value, nil
	}
	b, err := io.ReadAll(r.Body)
	switch {
	case err != nil:
		return nil, err
	case len(bytes.TrimSpace(b)) == 0:
		return nil, nil
	case kind == echo.MIMEApplicationJSON:
		return jsonValues(b)
	}
	return nil, echo.NewHTTPError(http.StatusUnsupportedMediaType, "A body of the type "+strconv.Quote(clip(kind))+" is not read here. "+targetTakes+".")
}

// jsonValues reads a JSON object as parameters: texts, numbers and lists of
// them; null and "" are as if not given.
func jsonValues(b []byte) (url.Values, error) {
	d := json.NewDecoder(bytes.NewReader(b))
	d.UseNumber()
	var object map[string]any
	err := d.Decode(&object)
	if err == nil {
		if _, more := d.Token(); !errors.Is(more, io.EOF) {
			err = errors.New("more than one value")
		}
	}
	if err != nil || object == nil {
		return nil, &badInput{"body", `it is no JSON object. Expected names and values, such as {"palaeolatitude": 28, "age": 70}`}
	}
	q := url.Values{}
	for name, v := range object {
		list, many := v.([]any)
		if !many {
			list = []any{v}
		}
		for _, x := range list {
			switch x := x.(type) {
			case nil:
			case string:
				q.Add(name, x)
			case json.Number:
				q.Add(name, x.String())
			default:
				return nil, &badInput{name, "it is neither a text nor a number. Expected one of these, or a list of them"}
			}
		}
	}
	return q, nil
}
