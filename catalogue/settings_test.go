package catalogue

import (
	"strings"
	"testing"
)

func TestSettingsAreKeptWithTheirHistory(t *testing.T) {
	s := open(t)
	keeper, err := s.AddAccount(ctx, "kit", "Kit Fathom", "keeper", "ebb and flood 42")
	if err != nil {
		t.Fatal(err)
	}
	curator, err := s.AddAccount(ctx, "cy", "", "curator", "ebb and flood 42")
	if err != nil {
		t.Fatal(err)
	}
	state, _ := s.State(ctx)
	change := func(by int64, why string, values map[string]string) (int, error) {
		return s.ChangeSettings(ctx, values, by, why)
	}
	if n, err := change(keeper.ID, "renamed", map[string]string{"title": `"Soundings"`, "cluster": ""}); n != 1 || err != nil {
		t.Fatalf("%d changed, %v", n, err)
	}
	if title, err := s.Title(ctx); title != "Soundings" || err != nil {
		t.Errorf("title %q, %v", title, err)
	}
	if now, _ := s.State(ctx); now == state {
		t.Error("what readers see keeps its old name, so their copies are not asked for again")
	}
	if n, err := change(keeper.ID, "the same again", map[string]string{"title": `"Soundings"`}); n != 0 || err != nil {
		t.Errorf("%d changed by the same value, %v", n, err)
	}
	if _, err := change(curator.ID, "mine", map[string]string{"title": `"Mine"`}); CodeOf(err) != Forbidden {
		t.Errorf("a curator: %v", err)
	}
	if _, err := change(keeper.ID, " ", map[string]string{"title": `"Mine"`}); CodeOf(err) != Invalid {
		t.Errorf("without a reason: %v", err)
	}
	if _, err := change(keeper.ID, "not JSON", map[string]string{"title": `Mine`}); err == nil {
		t.Error("a value that is not JSON is stored")
	}
	if n, err := change(0, "back", map[string]string{"title": ""}); n != 1 || err != nil {
		t.Fatalf("%d changed, %v", n, err)
	}
	if title, _ := s.Title(ctx); title != DefaultTitle {
		t.Errorf("title %q", title)
	}
	changes, err := s.SettingChanges(ctx, 10)
	if err != nil || len(changes) != 2 {
		t.Fatalf("%d changes, %v", len(changes), err)
	}
	last, first := changes[0], changes[1]
	if first.Record != "title" || first.Before != "" || first.After != `"Soundings"` || first.Who != "Kit Fathom" || first.Why != "renamed" {
		t.Errorf("%+v", first)
	}
	if last.Before != `"Soundings"` || last.After != "" || last.Who != "command line" {
		t.Errorf("%+v", last)
	}
	activity, err := s.Activity(ctx, 10)
	if err != nil || len(activity) != 2 || activity[1].Why != "renamed" {
		t.Errorf("%+v, %v", activity, err)
	}
}

func TestReleaseAndAnalysisKeepTheirSettings(t *testing.T) {
	s := open(t)
	insert(t, s, row("Loom", 10, 20, 1.5))
	const then = `{"class_limits":[1.1,1.3]}`
	if _, err := s.Freeze(ctx, NewRelease{Name: "2031.1", Program: "test", Settings: then}); err != nil {
		t.Fatal(err)
	}
	if _, err := s.Freeze(ctx, NewRelease{Name: "2031.2", Program: "test"}); err != nil {
		t.Fatal(err)
	}
	for name, want := range map[string]string{"2031.1": then, "2031.2": "", "none": ""} {
		if got, err := s.SettingsOf(ctx, name); got != want || err != nil {
			t.Errorf("%s: %q, want %q, %v", name, got, want, err)
		}
	}
	if _, err := s.w.ExecContext(ctx, `UPDATE release_settings SET settings = '{}'`); err == nil || !strings.Contains(err.Error(), "never changed") {
		t.Errorf("the settings of a release were changed: %v", err)
	}
	name, err := s.FreezeAnalysis(ctx, Analysis{Title: "Slope", Digest: strings.Repeat("0", 64), Program: "test", Settings: then}, 0)
	if err != nil {
		t.Fatal(err)
	}
	if a, err := s.Analysis(ctx, name); err != nil || a.Settings != then {
		t.Errorf("%+v, %v", a, err)
	}
}
