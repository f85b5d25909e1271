package main

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"net/http"
	"net/url"
	"strconv"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/stats"
	"fathombend/stats/earth"
	"fathombend/views"
)

func (a *App) routesSettings(e *echo.Echo) {
	get(e, "/settings", a.settingsPage)
	get(e, "/settings.json", a.settingsJSON)
	e.POST("/settings", a.changeSettings)
	e.POST("/settings/import", a.importSettings)
}

// maxSettingsFile is the largest settings file that is read.
const maxSettingsFile = 1 << 20

func (a *App) settingsPage(c echo.Context) error {
	if err := a.plainQuery(c); err != nil {
		return err
	}
	s, err := a.settings(c.Request().Context())
	if err != nil {
		return err
	}
	return a.showSettings(c, http.StatusOK, typedSettings(s), nil)
}

func (a *App) settingsJSON(c echo.Context) error {
	if err := a.plainQuery(c); err != nil {
		return err
	}
	s, err := a.settings(c.Request().Context())
	if err != nil {
		return err
	}
	b, err := s.document()
	if err != nil {
		return err
	}
	c.Response().Header().Set(echo.HeaderContentDisposition, `attachment; filename="settings.json"`)
	return c.JSONBlob(http.StatusOK, b)
}

// typedSettings are settings as their form would have them typed.
func typedSettings(s settings) url.Values {
	return url.Values{
		catalogue.SettingTitle: {s.Title}, catalogue.SettingLicence: {s.Licence}, settingClasses: {limitsText(s.ClassLimits)},
		settingClimate: {climateText(s.Climate)}, settingCluster: {s.Cluster}, catalogue.SettingRegistration: {s.Registration},
	}
}

// settingsTyped reads the form over the settings in force: a field that is not
// there stays, an empty one goes back to the default.
func settingsTyped(form url.Values, s settings) (settings, map[string]string) {
	def, wrong := defaultSettings(), map[string]string{}
	for name, to := range map[string]*string{catalogue.SettingTitle: &s.Title, catalogue.SettingLicence: &s.Licence, settingCluster: &s.Cluster, catalogue.SettingRegistration: &s.Registration} {
		if form.Has(name) {
			*to = strings.TrimSpace(form.Get(name))
		}
	}
	if s.Cluster == "" {
		s.Cluster = def.Cluster
	}
	if s.Registration == "" {
		s.Registration = def.Registration
	}
	if form.Has(settingClasses) {
		limits, why := readLimits(form.Get(settingClasses))
		if s.ClassLimits = limits; why != "" {
			wrong[settingClasses] = why
		} else if len(limits) == 0 {
			s.ClassLimits = def.ClassLimits
		}
	}
	if form.Has(settingClimate) {
		text := form.Get(settingClimate)
		if strings.TrimSpace(text) == "" {
			s.Climate = def.Climate
		} else if table, err := earth.ParseClimateTable(strings.NewReader(text)); err != nil {
			wrong[settingClimate] = inputMessage(err)
		} else {
			s.Climate = table
		}
	}
	for name, why := range s.wrong() {
		if wrong[name] == "" {
			wrong[name] = why
		}
	}
	return s, wrong
}

func (a *App) changeSettings(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	s, err := a.settings(c.Request().Context())
	if err != nil {
		return err
	}
	s, wrong := settingsTyped(form, s)
	if len(wrong) > 0 {
		return a.showSettings(c, http.StatusUnprocessableEntity, form, sentences(wrong))
	}
	return a.keepSettings(c, s, form)
}

func sentences(wrong map[string]string) map[string]string {
	out := map[string]string{}
	for name, why := range wrong {
		out[name] = sentence(why, "")
	}
	return out
}

// keepSettings stores s; what was typed is shown again when it is refused.
func (a *App) keepSettings(c echo.Context, s settings, form url.Values) error {
	n, err := storeSettings(c.Request().Context(), a.store, s, a.user(c).ID, form.Get("why"))
	if errs := fieldErrors(err); errs != nil {
		return a.showSettings(c, http.StatusUnprocessableEntity, form, errs)
	}
	if err != nil {
		return err
	}
	said := changedSettings(n)
	if s.Licence == "CC0-1.0" {
		rows, err := a.store.Summary(c.Request().Context(), catalogue.Filter{})
		if err != nil {
			return err
		}
		if rows.Licence != s.Licence {
			said += " Not every row is CC0 yet: freezing a release under CC0 is refused until each is."
		}
	}
	a.notice(c, said)
	return c.Redirect(http.StatusSeeOther, "/settings")
}

func storeSettings(ctx context.Context, store *catalogue.Store, s settings, by int64, why string) (int, error) {
	values, err := s.stored()
	if err != nil {
		return 0, err
	}
	return store.ChangeSettings(ctx, values, by, why)
}

func changedSettings(n int) string {
	switch n {
	case 0:
		return "Nothing was different, so nothing was changed."
	case 1:
		return "One setting is changed."
	}
	return strconv.Itoa(n) + " settings are changed."
}

// importSettings takes a settings file.
func (a *App) importSettings(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	now, err := a.settings(c.Request().Context())
	if err != nil {
		return err
	}
	typed := typedSettings(now)
	typed.Set("import_why", form.Get("import_why"))
	refuse := func(errs map[string]string) error {
		return a.showSettings(c, http.StatusUnprocessableEntity, typed, errs)
	}
	head, err := c.FormFile("file")
	switch {
	case err != nil || head.Size == 0:
		if over := (*http.MaxBytesError)(nil); errors.As(err, &over) {
			return err
		}
		return refuse(map[string]string{"file": "No file was sent, or it is empty. Expected: a settings file in JSON."})
	case head.Size > maxSettingsFile:
		return refuse(map[string]string{"file": "The file is larger than 1 MB, which no settings file is."})
	}
	f, err := head.Open()
	if err != nil {
		return err
	}
	defer f.Close()
	b, err := io.ReadAll(f)
	if err != nil {
		return err
	}
	s, wrong := readSettingsFile(b, now)
	if len(wrong) > 0 {
		return refuse(map[string]string{"file": "Nothing was changed. " + wrongInFile(wrong)})
	}
	n, err := storeSettings(c.Request().Context(), a.store, s, a.user(c).ID, form.Get("import_why"))
	if errs := fieldErrors(err); errs != nil {
		return refuse(map[string]string{"import_why": errs["why"]})
	}
	if err != nil {
		return err
	}
	said := changedSettings(n)
	if s.Licence == "CC0-1.0" {
		rows, err := a.store.Summary(c.Request().Context(), catalogue.Filter{})
		if err != nil {
			return err
		}
		if rows.Licence != s.Licence {
			said += " Not every row is CC0 yet: freezing a release under CC0 is refused until each is."
		}
	}
	a.notice(c, said)
	return c.Redirect(http.StatusSeeOther, "/settings")
}

// wrongInFile says in one line what is wrong with a settings file.
func wrongInFile(wrong map[string]string) string {
	var parts []string
	for _, name := range append([]string{""}, settingNames()...) {
		if why := wrong[name]; why != "" {
			parts = append(parts, sentence(strings.TrimPrefix(name+": "+why, ": "), ""))
		}
	}
	return strings.Join(parts, " ")
}

func (a *App) showSettings(c echo.Context, status int, typed url.Values, errs map[string]string) error {
	ctx := c.Request().Context()
	now, err := a.settings(ctx)
	if err != nil {
		return err
	}
	kept, err := now.stored()
	if err != nil {
		return err
	}
	changes, err := a.store.SettingChanges(ctx, 50)
	if err != nil {
		return err
	}
	p := views.SettingsPage{Page: a.page(c, "Settings", ""), Typed: typed, Errors: errs, Own: map[string]bool{}, Clusterings: stats.Clusterings, Default: typedSettings(defaultSettings())}
	p.JSON = "/settings.json"
	for name, value := range kept {
		p.Own[name] = value != ""
	}
	for _, v := range changes {
		p.Changes = append(p.Changes, views.SettingChange{At: v.At, Who: v.Who, Why: v.Why, Name: v.Record, Before: settingWords(v.Before), After: settingWords(v.After)})
	}
	return render(c, status, views.Settings(p))
}

// settingFacts are the settings kept beside something frozen, in words; none
// where none were kept.
func settingFacts(text string) ([]views.Fact, error) {
	if text == "" {
		return nil, nil
	}
	kept, err := recordedSettings(text).stored()
	if err != nil {
		return nil, err
	}
	var out []views.Fact
	for _, name := range settingNames() {
		if name != catalogue.SettingRegistration { // it says nothing of the data
			out = append(out, views.SettingFact(name, settingWords(kept[name])))
		}
	}
	return out, nil
}

// settingWords is a kept value for a person to read.
func settingWords(text string) string {
	if text == "" {
		return "default"
	}
	var word string
	if json.Unmarshal([]byte(text), &word) == nil {
		if word == "" {
			return "none"
		}
		return word
	}
	var numbers []float64
	if json.Unmarshal([]byte(text), &numbers) == nil {
		return limitsText(numbers)
	}
	var table earth.ClimateTable
	if json.Unmarshal([]byte(text), &table) == nil {
		return fmt.Sprintf("a table of %d intervals", len(table))
	}
	return clip(text)
}
