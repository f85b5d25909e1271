package catalogue

import (
	"errors"
	"strings"
	"sync"
	"sync/atomic"
	"testing"
)

func submit(t testing.TB, s *Store, by int64, sub Submission) int64 {
	t.Helper()
	id, err := s.Submit(ctx, by, sub)
	if err != nil {
		t.Fatal(err)
	}
	return id
}

func TestLifeOfAContribution(t *testing.T) {
	s := open(t)
	ada, cy, bob := account(t, s, "ada", "contributor"), account(t, s, "cy", "curator"), account(t, s, "bob", "contributor")
	draft := Submission{Row: row("Draft", 10, 20, 1.5), Typed: map[string]string{"channel_width_m": "about 300"}}
	draft.Row.Source = ""
	id, err := s.SaveDraft(ctx, ada.ID, draft)
	if err != nil {
		t.Fatal(err)
	}
	got, err := s.Submission(ctx, id)
	if err != nil || got.State != "draft" || got.Typed["channel_width_m"] != "about 300" || got.By.ID != ada.ID || got.Row.SystemName != "Draft" {
		t.Fatalf("%+v %v", got, err)
	}
	draft.ID = id
	if _, err := s.SaveDraft(ctx, bob.ID, draft); CodeOf(err) != Forbidden {
		t.Errorf("another person's draft: %v", err)
	}
	if _, err := s.Submit(ctx, ada.ID, draft); CodeOf(err) != Invalid || err.(*Error).Field != "channel_width_m" {
		t.Error(err)
	}
	draft.Typed = nil
	if _, err := s.Submit(ctx, ada.ID, draft); CodeOf(err) != Invalid || err.(*Error).Field != "source" {
		t.Error(err)
	}
	draft.Row.Source = "Survey 1:1 (2020)"
	draft.Row.ValleySlope = Num(3)
	_, err = s.Submit(ctx, ada.ID, draft)
	var open Findings
	if CodeOf(err) != Invalid || !errors.As(err, &open) || len(open) != 1 || open[0].Key != "valley_slope_range" {
		t.Fatalf("a warning asks for a reason: %v", err)
	}
	draft.Overrides = map[string]string{"valley_slope_range": "a cliff"}
	draft.Centreline = `{"type":"LineString","coordinates":[[20,10],[20.1,10.1]]}`
	draft.CentrelineSinuosities = []float64{1.4, 1.5}
	if got := submit(t, s, ada.ID, draft); got != id {
		t.Errorf("the draft became %d", got)
	}
	if err := s.Accept(ctx, id, ada.ID, ""); CodeOf(err) != Forbidden {
		t.Errorf("a contributor accepts: %v", err)
	}
	if err := s.Return(ctx, id, cy.ID, " "); CodeOf(err) != Invalid {
		t.Errorf("returned without a word: %v", err)
	}
	if err := s.Return(ctx, id, cy.ID, "Which survey?"); err != nil {
		t.Fatal(err)
	}
	if err := s.Comment(ctx, id, bob.ID, "me too"); CodeOf(err) != Forbidden {
		t.Errorf("an outsider comments: %v", err)
	}
	if err := s.Comment(ctx, id, ada.ID, "The first."); err != nil {
		t.Fatal(err)
	}
	if err := s.Accept(ctx, id, cy.ID, ""); CodeOf(err) != Conflict {
		t.Errorf("accepted while with its author: %v", err)
	}
	submit(t, s, ada.ID, draft)
	got, _ = s.Submission(ctx, id)
	if got.State != "submitted" || got.Comment != "Which survey?" || len(got.Messages) != 2 || got.Messages[1].Who != "Ada Invented" {
		t.Errorf("%+v", got)
	}
	if n, _ := s.CountSubmissions(ctx, "submitted", 0); n != 1 {
		t.Error(n)
	}
	if err := s.Accept(ctx, id, cy.ID, "Good."); err != nil {
		t.Fatal(err)
	}
	d, err := s.System(ctx, "draft")
	if err != nil {
		t.Fatal(err)
	}
	best := d.Best()
	if best.Contributor != "Ada Invented" || len(best.WindowSinuosities) != 2 || len(d.Centrelines) != 1 {
		t.Errorf("%+v", best)
	}
	h := d.History[len(d.History)-1]
	if h.Who != "Ada Invented, accepted by Cy Invented" || !strings.Contains(h.Why, "Good.") || !strings.Contains(h.Why, "a cliff") || h.Action != "create" {
		t.Errorf("%+v", h)
	}
	for name, err := range map[string]error{
		"accept twice": s.Accept(ctx, id, cy.ID, ""), "withdraw accepted": s.Withdraw(ctx, id, ada.ID),
	} {
		if CodeOf(err) != Conflict {
			t.Errorf("%s: %v", name, err)
		}
	}
	if err := s.Withdraw(ctx, id, bob.ID); CodeOf(err) != Forbidden {
		t.Error(err)
	}
	if err := s.Accept(ctx, 999, cy.ID, ""); CodeOf(err) != NotFound {
		t.Error(err)
	}
}

func TestSentTwiceWaitsOnce(t *testing.T) {
	s := open(t)
	ada := account(t, s, "ada", "contributor")
	sub := Submission{Row: row("Twice", 10, 20, 1.5)}
	first := submit(t, s, ada.ID, sub)
	if second := submit(t, s, ada.ID, sub); second != first {
		t.Errorf("%d and %d", first, second)
	}
	if err := s.Withdraw(ctx, first, ada.ID); err != nil {
		t.Fatal(err)
	}
	if third := submit(t, s, ada.ID, sub); third == first {
		t.Error("a withdrawn contribution may be sent again")
	}
}

func edit(r Row, column, text string) Row {
	c, _ := ColumnByName(column)
	if err := c.Set(&r, text); err != nil {
		panic(err)
	}
	return r
}

func TestConflict(t *testing.T) {
	s := open(t)
	ada, bob := account(t, s, "ada", "contributor"), account(t, s, "bob", "contributor")
	rows := insert(t, s, row("Shared", 10, 20, 1.5))
	a := submit(t, s, ada.ID, Submission{Row: edit(rows[0], "sinuosity", "1.6")})
	b := submit(t, s, bob.ID, Submission{Row: edit(rows[0], "sinuosity", "1.7")})
	if err := s.Accept(ctx, a, 0, ""); err != nil {
		t.Fatal(err)
	}
	err := s.Accept(ctx, b, 0, "")
	var v *VersionConflict
	if CodeOf(err) != Conflict || !errors.As(err, &v) {
		t.Fatalf("%v", err)
	}
	if v.Base.Sinuosity != Num(1.5) || v.Current.Sinuosity != Num(1.6) || v.Proposed.Sinuosity != Num(1.7) || len(v.Since) != 1 || len(v.Proposal) != 1 {
		t.Errorf("%+v", v)
	}
	sub, _ := s.Submission(ctx, b)
	if sub.State != "submitted" || len(sub.Since) != 1 || sub.Changes[0] != (FieldChange{"sinuosity", "1.6", "1.7"}) {
		t.Errorf("nothing is lost, and what others did is shown: %+v", sub)
	}
	if err := s.AcceptEdits(ctx, b, 0, edit(v.Current, "sinuosity", "1.65"), v.Revision-1, ""); CodeOf(err) != Conflict {
		t.Errorf("settled on an older version: %v", err)
	}
	if err := s.AcceptEdits(ctx, b, 0, edit(v.Current, "sinuosity", "1.65"), v.Revision, "the mean"); err != nil {
		t.Fatal(err)
	}
	h, _ := s.History(ctx, "measurement:"+rows[0].Measurement)
	if len(h) != 3 || h[0].Before != "1.6" || h[0].After != "1.65" || h[0].Why != "the mean" || h[0].Who != "Bob Invented" {
		t.Errorf("%+v", h)
	}
}

// A form opened before another change was accepted, and sent after it.
func TestConflictNoticedFromTheRevisionTheAuthorSaw(t *testing.T) {
	s := open(t)
	rows := insert(t, s, row("Form", 10, 20, 1.5))
	seen, _ := s.Revision(ctx)
	importText(t, s, "measurement,sinuosity,basin\n"+rows[0].Measurement+",1.9,Invented Basin\n", ImportOptions{Publish: true})
	id := submit(t, s, 0, Submission{Row: edit(rows[0], "sinuosity", "1.6"), BaseRevision: seen})
	sub, err := s.Submission(ctx, id)
	if err != nil || sub.Base.Sinuosity != Num(1.5) || sub.Base.Basin != "" || len(sub.Since) != 2 || len(sub.Changes) != 1 {
		t.Fatalf("%+v %v", sub, err)
	}
	if err := s.Accept(ctx, id, 0, ""); CodeOf(err) != Conflict {
		t.Error(err)
	}
}

// Changes of different columns of one system do not stand in each other's way.
func TestSystemColumnsMerge(t *testing.T) {
	s := open(t)
	rows := insert(t, s, row("Merged", 10, 20, 1.5), row("Merged", 11, 20, 1.6))
	one := submit(t, s, 0, Submission{Row: edit(rows[0], "feeder", "river")})
	two := submit(t, s, 0, Submission{Row: edit(rows[1], "basin", "Invented Basin")})
	three := submit(t, s, 0, Submission{Row: edit(rows[1], "feeder", "shelf")})
	for _, id := range []int64{one, two} {
		if err := s.Accept(ctx, id, 0, ""); err != nil {
			t.Fatal(err)
		}
	}
	got, _ := s.Rows(ctx, Filter{})
	for _, r := range got {
		if r.Feeder != "river" || r.Basin != "Invented Basin" {
			t.Errorf("%s: %s %s", r.Measurement, r.Feeder, r.Basin)
		}
	}
	if err := s.Accept(ctx, three, 0, ""); CodeOf(err) != Conflict {
		t.Errorf("two values for one column of the system: %v", err)
	}
}

func TestRenameKeepsTheSlugAndTheTextIndex(t *testing.T) {
	s := open(t)
	rows := insert(t, s, row("Old Name", 10, 20, 1.5), row("Old Name", 11, 20, 1.6))
	id := submit(t, s, 0, Submission{Row: edit(rows[0], "system_name", "New Name")})
	if err := s.Accept(ctx, id, 0, ""); err != nil {
		t.Fatal(err)
	}
	d, err := s.System(ctx, "old-name")
	if err != nil || d.Name != "New Name" {
		t.Fatal(err)
	}
	for q, want := range map[string]int{"new name": 2, "old": 2} { // the slug still says old
		if rows, err := s.Rows(ctx, Filter{Text: q}); err != nil || len(rows) != want {
			t.Errorf("%s: %d rows, %v", q, len(rows), err)
		}
	}
	if faults, err := s.Integrity(ctx); err != nil || len(faults) > 0 {
		t.Error(faults, err)
	}
	if _, err := s.Submit(ctx, 0, Submission{Row: d.Measurements[0]}); CodeOf(err) != Invalid {
		t.Errorf("nothing changed: %v", err)
	}
}

func TestSlugsAreUnique(t *testing.T) {
	s := open(t)
	a, b := row("A B", 1, 2, 1.5), row("A-B", 3, 4, 1.5)
	c := row("Third", 5, 6, 1.5)
	c.System = "a-b"
	d := row("Dimensions", 7, 8, 1.5)
	rows := insert(t, s, a, b, d)
	if rows[0].System != "a-b" || rows[1].System != "a-b-2" || rows[2].System != "dimensions-2" {
		t.Error(rows[0].System, rows[1].System, rows[2].System)
	}
	again := row("a b", 9, 9, 1.5)
	if got := insert(t, s, again); got[0].System != "a-b" || got[0].SystemName != "A B" {
		t.Errorf("an equal name joins the system: %s %s", got[0].System, got[0].SystemName)
	}
}

func TestTwoCuratorsAtOnce(t *testing.T) {
	s := open(t)
	cy := account(t, s, "cy", "curator")
	id := submit(t, s, cy.ID, Submission{Row: row("Once", 10, 20, 1.5)})
	var accepted, conflicts atomic.Int32
	var wg sync.WaitGroup
	for range 8 {
		wg.Go(func() {
			switch err := s.Accept(ctx, id, cy.ID, ""); {
			case err == nil:
				accepted.Add(1)
			case CodeOf(err) == Conflict:
				conflicts.Add(1)
			default:
				t.Error(err)
			}
		})
	}
	wg.Wait()
	if accepted.Load() != 1 || conflicts.Load() != 7 {
		t.Error(accepted.Load(), conflicts.Load())
	}
}

func TestBulkIsAllOrNothing(t *testing.T) {
	s := open(t)
	bad := row("Bad", 95, 20, 1.5)
	err := s.InsertRows(ctx, []Row{row("Good", 1, 2, 1.5), bad}, nil, 0, "")
	if CodeOf(err) != Invalid || err.(*Error).Field != "latitude_deg" || !strings.Contains(err.Error(), "row 2 (Bad)") {
		t.Error(err)
	}
	if rows, _ := s.Rows(ctx, Filter{}); len(rows) != 0 {
		t.Error("stored the good one")
	}
	line := Centreline{Measurement: "m000001", Line: `{"type":"LineString","coordinates":[[0,0],[1,1]]}`, Sinuosities: []float64{1.2, 1.4}}
	if err := s.InsertRows(ctx, []Row{row("Good", 1, 2, 1.5)}, []Centreline{line}, 0, ""); err != nil {
		t.Fatal(err)
	}
	for name, l := range map[string]Centreline{
		"point":     {System: "good", Line: `{"type":"Point","coordinates":[0,0]}`},
		"one place": {System: "good", Line: `{"type":"LineString","coordinates":[[0,0]]}`},
		"swapped":   {System: "good", Line: `{"type":"LineString","coordinates":[[0,120],[1,121]]}`},
		"not JSON":  {System: "good", Line: `LINESTRING`},
		"window":    {System: "good", Line: line.Line, Sinuosities: []float64{0.5}},
	} {
		if _, err := s.AddCentreline(ctx, l, 0, ""); CodeOf(err) != Invalid {
			t.Errorf("%s: %v", name, err)
		}
	}
	if _, err := s.AddCentreline(ctx, Centreline{System: "none", Line: line.Line}, 0, ""); CodeOf(err) != NotFound {
		t.Error(err)
	}
	rows, _ := s.Rows(ctx, Filter{})
	if len(rows[0].WindowSinuosities) != 2 {
		t.Error(rows[0].WindowSinuosities)
	}
	before, _ := s.Revision(ctx)
	if _, err := s.AddCentreline(ctx, line, 0, "again"); err != nil {
		t.Fatal(err)
	}
	if after, _ := s.Revision(ctx); after <= before {
		t.Error("a line is a change of the catalogue")
	}
}
