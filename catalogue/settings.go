package catalogue

import (
	"context"
	"database/sql"
	"encoding/json"
	"errors"
	"maps"
	"slices"
	"strconv"
)

// Names of the settings that the catalogue itself acts on. What the others
// mean is for the program to say: here they are JSON under a name.
const (
	SettingTitle        = "title"        // what the catalogue is called, a string
	SettingLicence      = "licence"      // of releases, one of ReleaseLicences or "" = the widest its rows allow
	SettingRegistration = "registration" // RegistrationOpen or closed
)

// RegistrationOpen lets anyone make an account, which sends nothing until it
// is approved.
const RegistrationOpen = "open"

// Settings returns what was chosen for this catalogue, JSON by name; a setting
// that is not there has the program's default.
func (s *Store) Settings(ctx context.Context) (map[string]string, error) {
	out, err := settingsIn(ctx, s.r)
	return out, fault("settings", err)
}

func settingsIn(ctx context.Context, q querier) (map[string]string, error) {
	rows, err := q.QueryContext(ctx, `SELECT name, value FROM settings ORDER BY name`)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	out := map[string]string{}
	for rows.Next() {
		var name, value string
		if err := rows.Scan(&name, &value); err != nil {
			return nil, err
		}
		out[name] = value
	}
	return out, rows.Err()
}

// textSetting is a setting that is a string, "" where it was not chosen.
func textSetting(ctx context.Context, q querier, name string) (string, error) {
	var value, text string
	err := q.QueryRowContext(ctx, `SELECT value FROM settings WHERE name = ?`, name).Scan(&value)
	if errors.Is(err, sql.ErrNoRows) {
		return "", nil
	}
	if err == nil {
		err = json.Unmarshal([]byte(value), &text)
	}
	return text, err
}

// Title is what the catalogue is called: as a keeper chose, else as its latest
// release is.
func (s *Store) Title(ctx context.Context) (string, error) {
	t, err := textSetting(ctx, s.r, SettingTitle)
	if t != "" || err != nil {
		return t, fault("title", err)
	}
	err = s.r.QueryRowContext(ctx, `SELECT title FROM releases ORDER BY id DESC LIMIT 1`).Scan(&t)
	if errors.Is(err, sql.ErrNoRows) {
		return DefaultTitle, nil
	}
	return t, fault("title", err)
}

// ChangeSettings stores values, JSON by name; "" goes back to the default.
// What is changed becomes one change set with its reason, so that it stands in
// the activity and the catalogue has a new revision. It returns how many
// settings it changed. Only a keeper may, or the command line.
func (s *Store) ChangeSettings(ctx context.Context, values map[string]string, by int64, why string) (changed int, err error) {
	why = CleanText(why)
	switch {
	case why == "":
		return 0, &Error{Code: Invalid, Field: "why", Message: "the reason is missing", Expected: "a few words on why the settings change; everyone who curates can read them"}
	case len([]rune(why)) > 2000:
		return 0, &Error{Code: Invalid, Field: "why", Message: "the reason is " + strconv.Itoa(len([]rune(why))) + " characters long", Expected: "at most 2000"}
	}
	err = s.write(ctx, func(tx *sql.Tx) error {
		if err := mayKeep(ctx, tx, by); err != nil {
			return err
		}
		before, err := settingsIn(ctx, tx)
		if err != nil {
			return err
		}
		a := s.applier(tx, by, why)
		for _, name := range slices.Sorted(maps.Keys(values)) {
			if values[name] == before[name] {
				continue
			}
			changed++
			if err := a.setting(ctx, name, before[name], values[name]); err != nil {
				return err
			}
		}
		return nil
	})
	return changed, err
}

func (a *applier) setting(ctx context.Context, name, before, after string) error {
	var err error
	if after == "" {
		_, err = a.exec(ctx, `DELETE FROM settings WHERE name = ?`, name)
	} else {
		_, err = a.exec(ctx, `INSERT INTO settings (name, value) VALUES (?, ?) ON CONFLICT (name) DO UPDATE SET value = excluded.value`, name, after)
	}
	if err != nil {
		return err
	}
	_, err = a.revise(ctx, settingRecord+name, "change", "value", before, after)
	return err
}

// settingRecord begins the name of a setting as a record of revisions.
const settingRecord = "setting:"

// mayKeep refuses who may not change settings; 0 is the command line, which
// may.
func mayKeep(ctx context.Context, q querier, by int64) error {
	if by == 0 {
		return nil
	}
	a, err := accountByID(ctx, q, by)
	if err != nil {
		return err
	}
	if a.Role != "keeper" || a.Disabled {
		return &Error{Code: Forbidden, Message: "only keepers change the settings"}
	}
	return nil
}

// SettingChanges lists the changes of settings, newest first: Record names the
// setting, Before and After are its JSON, "" for the default.
func (s *Store) SettingChanges(ctx context.Context, limit int) ([]Revision, error) {
	rows, err := s.r.QueryContext(ctx, `SELECT v.id, t.at, `+whoExpr+`, t.why, substr(v.record, ?), v.before, v.after
		FROM revisions v JOIN change_sets t ON t.id = v.change_set_id LEFT JOIN accounts a ON a.id = t.account_id
		WHERE v.record >= ? AND v.record < ? ORDER BY v.id DESC LIMIT ?`, len(settingRecord)+1, settingRecord, "setting;", limit)
	if err != nil {
		return nil, fault("changes of settings", err)
	}
	defer rows.Close()
	var out []Revision
	for rows.Next() {
		v := Revision{Action: "change", Field: "value"}
		var at string
		if err := rows.Scan(&v.ID, &at, &v.Who, &v.Why, &v.Record, &v.Before, &v.After); err != nil {
			return nil, fault("changes of settings", err)
		}
		v.At = parseTime(at)
		out = append(out, v)
	}
	return out, fault("changes of settings", rows.Err())
}

// SettingsOf returns the settings a release was frozen with, as the program
// wrote them then; "" for one frozen before there were any.
func (s *Store) SettingsOf(ctx context.Context, release string) (string, error) {
	var text string
	err := s.r.QueryRowContext(ctx, `SELECT settings FROM release_settings WHERE release_id = (SELECT id FROM releases WHERE name = ?)`, release).Scan(&text)
	if errors.Is(err, sql.ErrNoRows) {
		return "", nil
	}
	return text, fault("settings of a release", err)
}
