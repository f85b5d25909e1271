package main

import (
	"bytes"
	"context"
	"encoding/csv"
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"reflect"
	"slices"
	"strconv"
	"strings"
	"unicode/utf8"

	"fathombend/catalogue"
	"fathombend/stats"
	"fathombend/stats/earth"
	"fathombend/stats/expectation"
)

// settings are what keepers choose for their catalogue. Their JSON is the
// settings file.
type settings struct {
	Title        string             `json:"title"`         // "" = that of the latest release, else the program's
	Licence      string             `json:"licence"`       // SPDX name, "" = the widest the rows of a release allow
	ClassLimits  []float64          `json:"class_limits"`  // sinuosities, rising
	Climate      earth.ClimateTable `json:"climate_table"` // climate state by age
	Cluster      string             `json:"cluster"`       // one of stats.Clusterings
	Registration string             `json:"registration"`  // open or closed
}

const (
	settingClasses = "class_limits"
	settingClimate = "climate_table"
	settingCluster = "cluster"

	registrationClosed = "closed"
	// mostClasses bounds the class limits: more than a page can name.
	mostClasses = 8
	// mostClimates bounds the climate table.
	mostClimates = 500
)

func defaultSettings() settings {
	return settings{ClassLimits: slices.Clone(expectation.Classes), Climate: earth.ClimateStates(), Cluster: stats.DefaultRequest().Cluster, Registration: registrationClosed}
}

// setting is one of them: where it stands and what it may be.
type setting struct {
	name  string
	of    func(*settings) any // pointer to its place
	check func(*settings) string
}

// settingList is every setting in the order of the page.
var settingList = []setting{
	{catalogue.SettingTitle, func(s *settings) any { return &s.Title }, func(s *settings) string {
		if s.Title = catalogue.CleanText(s.Title); utf8.RuneCountInString(s.Title) > 200 || strings.ContainsAny(s.Title, "\n\t") {
			return "a title is one line of at most 200 characters"
		}
		return ""
	}},
	{catalogue.SettingLicence, func(s *settings) any { return &s.Licence }, func(s *settings) string {
		return among(s.Licence, append([]string{""}, catalogue.ReleaseLicences...))
	}},
	{settingClasses, func(s *settings) any { return &s.ClassLimits }, func(s *settings) string {
		if n := len(s.ClassLimits); n == 0 || n > mostClasses {
			return fmt.Sprintf("there are %d limits. Expected 1 to %d", n, mostClasses)
		}
		return inputMessage(expectation.CheckClasses(s.ClassLimits))
	}},
	{settingClimate, func(s *settings) any { return &s.Climate }, checkClimate},
	{settingCluster, func(s *settings) any { return &s.Cluster }, func(s *settings) string { return among(s.Cluster, stats.Clusterings) }},
	{catalogue.SettingRegistration, func(s *settings) any { return &s.Registration }, func(s *settings) string {
		return among(s.Registration, []string{registrationClosed, catalogue.RegistrationOpen})
	}},
}

func checkClimate(s *settings) string {
	if n := len(s.Climate); n == 0 || n > mostClimates {
		return fmt.Sprintf("the table has %d rows. Expected 1 to %d", n, mostClimates)
	}
	for i := range s.Climate {
		c := &s.Climate[i]
		for _, text := range []*string{&c.Name, &c.State, &c.Note, &c.Source, &c.Tag} {
			if *text = catalogue.CleanText(*text); utf8.RuneCountInString(*text) > 300 || strings.ContainsAny(*text, "\n\t") || !utf8.ValidString(*text) {
				return fmt.Sprintf("row %d holds a text of several lines or of more than 300 characters", i+1)
			}
		}
		if c.Name == "" {
			return fmt.Sprintf("row %d has no name", i+1)
		}
	}
	return inputMessage(expectation.CheckClimate(s.Climate))
}

func among(v string, choices []string) string {
	if slices.Contains(choices, v) {
		return ""
	}
	return strconv.Quote(clip(v)) + " is not one of the choices. Expected one of: " + strings.TrimPrefix(strings.Join(choices, ", "), ", ")
}

// inputMessage is the sentence of a refusal of the pure rooms, "" for none.
func inputMessage(err error) string {
	var in *earth.InputError
	if errors.As(err, &in) {
		return in.Message
	}
	if err != nil {
		return err.Error()
	}
	return ""
}

// wrongSettings says by name which settings cannot be.
func (s *settings) wrong() map[string]string {
	var out map[string]string
	for _, x := range settingList {
		if why := x.check(s); why != "" {
			if out == nil {
				out = map[string]string{}
			}
			out[x.name] = why
		}
	}
	return out
}

// stored is what is kept of s: JSON by name, "" where it is the default, so
// that a better default of a later version reaches who chose none.
func (s settings) stored() (map[string]string, error) {
	def, out := defaultSettings(), map[string]string{}
	for _, x := range settingList {
		mine, theirs := reflect.ValueOf(x.of(&s)).Elem().Interface(), reflect.ValueOf(x.of(&def)).Elem().Interface()
		if reflect.DeepEqual(mine, theirs) {
			out[x.name] = ""
			continue
		}
		b, err := json.Marshal(mine)
		if err != nil {
			return nil, err
		}
		out[x.name] = string(b)
	}
	return out, nil
}

// settingsFrom reads what is kept. A value that this version cannot use leaves
// the default, and is named.
func settingsFrom(kept map[string]string) (s settings, unusable []string) {
	s = defaultSettings()
	for _, x := range settingList {
		text, ok := kept[x.name]
		if !ok {
			continue
		}
		try := defaultSettings()
		if err := json.Unmarshal([]byte(text), clearedSlice(x.of(&try))); err != nil || x.check(&try) != "" {
			unusable = append(unusable, x.name)
			continue
		}
		reflect.ValueOf(x.of(&s)).Elem().Set(reflect.ValueOf(x.of(&try)).Elem())
	}
	return s, unusable
}

// clearedSlice empties a list before it is read over, since JSON would fill
// the elements it holds.
func clearedSlice(p any) any {
	if v := reflect.ValueOf(p).Elem(); v.Kind() == reflect.Slice {
		v.SetZero()
	}
	return p
}

// document is the settings file: all of them, defaults too, so that it says
// what was in force.
func (s settings) document() ([]byte, error) {
	b, err := json.MarshalIndent(s, "", "  ")
	return append(b, '\n'), err
}

// text is the settings as they are recorded beside a release or an analysis.
func (s settings) text() (string, error) {
	b, err := json.Marshal(s)
	return string(b), err
}

// readSettingsFile reads a settings file over s. Settings that it does not
// name stay; null goes back to the default. What is wrong comes back by name,
// "" for the file as a whole.
func readSettingsFile(b []byte, s settings) (settings, map[string]string) {
	whole := func(why string) (settings, map[string]string) { return s, map[string]string{"": why} }
	var all map[string]json.RawMessage
	if err := json.Unmarshal(bytes.TrimPrefix(b, []byte("\ufeff")), &all); err != nil || all == nil {
		return whole("the file is not a JSON object of settings. Expected a file as written by the export, {\"title\": ..., \"cluster\": ...}")
	}
	def, wrong := defaultSettings(), map[string]string{}
	for _, x := range settingList {
		raw, ok := all[x.name]
		delete(all, x.name)
		if !ok {
			continue
		}
		to := reflect.ValueOf(x.of(&s)).Elem()
		if string(raw) == "null" {
			to.Set(reflect.ValueOf(x.of(&def)).Elem())
			continue
		}
		fresh := reflect.New(to.Type())
		if err := json.Unmarshal(raw, fresh.Interface()); err != nil {
			wrong[x.name] = "cannot be read. Expected " + map[reflect.Kind]string{reflect.String: "a text in quotes", reflect.Slice: "a list in square brackets"}[to.Kind()]
			continue
		}
		to.Set(fresh.Elem())
	}
	for name := range all {
		return whole(strconv.Quote(clip(name)) + " is not a setting. Expected: " + strings.Join(settingNames(), ", "))
	}
	for name, why := range s.wrong() {
		if wrong[name] == "" {
			wrong[name] = why
		}
	}
	return s, wrong
}

func settingNames() []string {
	var out []string
	for _, x := range settingList {
		out = append(out, x.name)
	}
	return out
}

// settings are those in force now.
func (a *App) settings(ctx context.Context) (settings, error) {
	kept, err := a.store.Settings(ctx)
	if err != nil {
		return defaultSettings(), err
	}
	s, unusable := settingsFrom(kept)
	if len(unusable) > 0 {
		a.log.Warn("settings that this version cannot use have their defaults", "settings", unusable)
	}
	return s, nil
}

// settingsFor are those of a page that shows a release: the ones it was frozen
// with; "" is the catalogue as it is.
func (a *App) settingsFor(ctx context.Context, release string) (settings, error) {
	if release == "" {
		return a.settings(ctx)
	}
	name, err := a.store.ReleaseName(ctx, release)
	if err != nil {
		return defaultSettings(), err
	}
	text, err := a.store.SettingsOf(ctx, name)
	if err != nil {
		return defaultSettings(), err
	}
	return recordedSettings(text), nil
}

// recordedSettings reads the settings kept beside a release or an analysis; ""
// is of the time before there were any.
func recordedSettings(text string) settings {
	if text == "" {
		return defaultSettings()
	}
	s, wrong := readSettingsFile([]byte(text), defaultSettings())
	if len(wrong) > 0 {
		return defaultSettings()
	}
	return s
}

// limitsText is the class limits as typed.
func limitsText(limits []float64) string {
	parts := make([]string, len(limits))
	for i, l := range limits {
		parts[i] = short(l)
	}
	return strings.Join(parts, ", ")
}

// readLimits reads class limits as typed: numbers between commas, semicolons
// or spaces.
func readLimits(text string) ([]float64, string) {
	var out []float64
	for _, f := range strings.FieldsFunc(text, func(r rune) bool { return strings.ContainsRune(",; \t\n\r", r) }) {
		v, err := strconv.ParseFloat(f, 64)
		if err != nil || math.IsNaN(v) || math.IsInf(v, 0) {
			return nil, strconv.Quote(clip(f)) + " is not a number. Expected sinuosities above 1 in rising order, with a point as decimal sign, as 1.05, 1.2, 1.5"
		}
		out = append(out, v)
	}
	return out, ""
}

var climateColumns = []string{"name", "base_ma", "top_ma", "state", "note", "source", "tag"}

// climateText is a climate table as the CSV that a person edits.
func climateText(t earth.ClimateTable) string {
	var b strings.Builder
	w := csv.NewWriter(&b)
	_ = w.Write(climateColumns) // a Builder cannot fail
	for _, c := range t {
		_ = w.Write([]string{c.Name, short(c.BaseMa), short(c.TopMa), c.State, c.Note, c.Source, c.Tag})
	}
	w.Flush()
	return b.String()
}
