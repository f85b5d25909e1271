package catalogue

import (
	"errors"
	"slices"
	"strings"
	"testing"
)

const shortLine = `{"type":"LineString","coordinates":[[20,10],[20.1,10.1]]}`

// sound asks that the file is whole: references, places and the text index.
func sound(t *testing.T, s *Store) {
	t.Helper()
	if faults, err := s.Integrity(ctx); err != nil || len(faults) > 0 {
		t.Error(faults, err)
	}
}

// unharmed asks that a release is what was frozen.
func unharmed(t *testing.T, s *Store, r *Release) {
	t.Helper()
	if ok, err := s.VerifyRelease(ctx, r.Name); !ok || err != nil {
		t.Errorf("release %s: %v %v", r.Name, ok, err)
	}
}

func TestWithdrawalIsProposedAcceptedAndTakenBack(t *testing.T) {
	s := open(t)
	ada, cy := account(t, s, "ada", "contributor"), account(t, s, "cy", "curator")
	rows := insert(t, s, row("Gone", 10, 20, 1.5), row("Stays", 30, 20, 1.6))
	id := rows[0].Measurement
	if _, err := s.AddCentreline(ctx, Centreline{Measurement: id, Line: shortLine, Sinuosities: []float64{1.5}}, 0, ""); err != nil {
		t.Fatal(err)
	}
	release := freeze(t, s, "2030.1")
	if _, err := s.ProposeWithdrawal(ctx, ada.ID, id, "", "  "); CodeOf(err) != Invalid || err.(*Error).Field != "why" {
		t.Errorf("without a reason: %v", err)
	}
	if _, err := s.ProposeWithdrawal(ctx, ada.ID, id, "m999999", "a fault"); CodeOf(err) != Invalid || err.(*Error).Field != "instead" {
		t.Errorf("in favour of nothing: %v", err)
	}
	p, err := s.ProposeWithdrawal(ctx, ada.ID, id, "", "The line is an acquisition artefact.")
	if err != nil {
		t.Fatal(err)
	}
	if again, err := s.ProposeWithdrawal(ctx, ada.ID, id, "", "once more"); again != p || err != nil {
		t.Errorf("asked twice: %d and %d, %v", p, again, err)
	}
	if _, err := s.Submit(ctx, ada.ID, Submission{ID: p, Row: edit(rows[0], "sinuosity", "9")}); CodeOf(err) != Conflict {
		t.Errorf("a withdrawal turned into an edit by a forged form: %v", err)
	}
	sub, err := s.Submission(ctx, p)
	if err != nil || sub.Act != ActWithdraw || sub.State != "submitted" || len(sub.Messages) != 1 || len(sub.Changes) != 0 {
		t.Fatalf("%+v %v", sub, err)
	}
	if err := s.Accept(ctx, p, ada.ID, ""); CodeOf(err) != Forbidden {
		t.Errorf("a contributor withdraws: %v", err)
	}
	if err := s.Accept(ctx, p, cy.ID, "Agreed."); err != nil {
		t.Fatal(err)
	}
	if _, err := s.System(ctx, "gone"); CodeOf(err) != NotFound {
		t.Errorf("still there: %v", err)
	}
	g, err := s.Gone(ctx, "gone")
	if err != nil || g == nil || g.MovedTo != "" || len(g.Withdrawn) != 1 {
		t.Fatalf("%+v %v", g, err)
	}
	w := g.Withdrawn[0]
	if w.Row.Sinuosity != Num(1.5) || w.Who != "Ada Invented, accepted by Cy Invented" || w.Why != "The line is an acquisition artefact.; Agreed." || g.History[0].Action != "withdraw" {
		t.Errorf("%+v\n%+v", w, g.History[0])
	}
	if rows, _ := s.Rows(ctx, Filter{Text: "Gone"}); len(rows) != 0 {
		t.Error("a withdrawn record is found by its name")
	}
	sound(t, s)
	unharmed(t, s, release)

	// Neither number is given again, and the id cannot be taken by a file.
	more := insert(t, s, row("Next", 40, 20, 1.7))
	if more[0].Measurement == id {
		t.Error("the id was given again")
	}
	rep := importText(t, s, "measurement,system_name,latitude_deg,longitude_deg,sinuosity,sinuosity_kind,measured_line,source\n"+id+",Thief,1,2,1.3,peak,thalweg,Invented 1:1 (2020)\n", ImportOptions{Publish: true})
	if rep.Stored || len(rep.Problems) != 1 || !strings.Contains(rep.Problems[0].Message, "withdrawn") {
		t.Errorf("%+v", rep)
	}

	back, err := s.ProposeRestoration(ctx, ada.ID, id, "It was right after all.")
	if err != nil {
		t.Fatal(err)
	}
	if err := s.Accept(ctx, back, cy.ID, ""); err != nil {
		t.Fatal(err)
	}
	d, err := s.System(ctx, "gone")
	if err != nil || len(d.Measurements) != 1 || len(d.Centrelines) != 1 || !slices.Equal(d.Best().WindowSinuosities, []float64{1.5}) || len(d.Withdrawn) != 0 {
		t.Fatalf("%+v %v", d, err)
	}
	if h := d.History; len(h) < 6 || h[1].Action != "accept" {
		t.Errorf("%+v", h)
	}
	if _, err := s.ProposeRestoration(ctx, ada.ID, id, "again"); CodeOf(err) != NotFound {
		t.Error(err)
	}
	sound(t, s)
	unharmed(t, s, release)
}

// A record that changed after its withdrawal was proposed is shown anew first.
func TestWithdrawalMeetsAnEdit(t *testing.T) {
	s := open(t)
	rows := insert(t, s, row("Both", 10, 20, 1.5))
	p, err := s.ProposeWithdrawal(ctx, 0, rows[0].Measurement, "", "doubtful")
	if err != nil {
		t.Fatal(err)
	}
	e := submit(t, s, 0, Submission{Row: edit(rows[0], "sinuosity", "1.6")})
	late := submit(t, s, 0, Submission{Row: edit(rows[0], "notes", "late")})
	if err := s.Accept(ctx, e, 0, ""); err != nil {
		t.Fatal(err)
	}
	err = s.Accept(ctx, p, 0, "")
	var v *VersionConflict
	if CodeOf(err) != Conflict || !errors.As(err, &v) || len(v.Since) != 1 {
		t.Fatalf("%v", err)
	}
	if err := s.AcceptSeen(ctx, p, 0, v.Revision, ""); err != nil {
		t.Fatal(err)
	}
	if err := s.Accept(ctx, late, 0, ""); CodeOf(err) != Conflict || !strings.Contains(err.Error(), "withdrawn") {
		t.Errorf("an edit of a withdrawn record: %v", err)
	}
	if sub, err := s.Submission(ctx, late); err != nil || sub.State != "submitted" {
		t.Errorf("it is not lost: %+v %v", sub, err)
	}
}

func TestMergeSystemsAndTakeItBack(t *testing.T) {
	s := open(t)
	cy, ada := account(t, s, "cy", "curator"), account(t, s, "ada", "contributor")
	a, twin := row("Loom Channel", 10, 20, 1.5), row("Lom Chanel", 10.01, 20, 1.5)
	a.Feeder, twin.Feeder, twin.OtherNames = "river", "shelf", "Weft"
	rows := insert(t, s, a, row("Loom Channel", 11, 20, 1.8), twin, row("Lom Chanel", 12, 20, 2.1))
	if _, err := s.AddCentreline(ctx, Centreline{Measurement: rows[2].Measurement, Line: shortLine}, 0, ""); err != nil {
		t.Fatal(err)
	}
	if _, err := s.AddCentreline(ctx, Centreline{System: "lom-chanel", Line: shortLine}, 0, ""); err != nil {
		t.Fatal(err)
	}
	before, _ := s.System(ctx, "lom-chanel")
	release := freeze(t, s, "2030.1")
	waiting := submit(t, s, ada.ID, Submission{Row: edit(rows[3], "notes", "sent before the merging")})

	v, err := s.MergeView(ctx, "lom-chanel", "loom-channel")
	if err != nil || len(v.Twins) != 1 || v.OtherNames != "Lom Chanel; Weft" {
		t.Fatalf("%+v %v", v, err)
	}
	m := SystemMerge{From: "lom-chanel", Into: "loom-channel", Revision: v.Revision, Values: map[string]string{"feeder": "shelf"}, Twins: [][2]string{{rows[0].Measurement, rows[2].Measurement}}, Why: "One channel, two spellings."}
	if _, err := s.MergeSystems(ctx, ada.ID, m); CodeOf(err) != Forbidden {
		t.Error(err)
	}
	old := m
	old.Revision--
	if _, err := s.MergeSystems(ctx, cy.ID, old); CodeOf(err) != Conflict {
		t.Errorf("on an older version: %v", err)
	}
	set, err := s.MergeSystems(ctx, cy.ID, m)
	if err != nil {
		t.Fatal(err)
	}
	d, err := s.System(ctx, "loom-channel")
	if err != nil || len(d.Measurements) != 3 || len(d.Centrelines) != 2 || len(d.Withdrawn) != 1 || d.Withdrawn[0].Instead != rows[0].Measurement || !slices.Equal(d.Merged, []string{"lom-chanel"}) {
		t.Fatalf("%+v %v", d, err)
	}
	if best := d.Best(); best.OtherNames != "Lom Chanel; Weft" || best.Feeder != "shelf" {
		t.Errorf("%+v", best)
	}
	if d.Centrelines[0].Measurement != rows[0].Measurement {
		t.Errorf("the line of the twin: %+v", d.Centrelines[0])
	}
	if g, err := s.Gone(ctx, "lom-chanel"); err != nil || g == nil || g.MovedTo != "loom-channel" {
		t.Errorf("%+v %v", g, err)
	}
	if n := len(d.History); n < 12 || !slices.ContainsFunc(d.History, func(r Revision) bool { return r.Record == "system:lom-chanel" && r.Action == "create" }) {
		t.Errorf("both histories: %d", n)
	}
	if found, _, _ := s.Systems(ctx, Filter{Text: "weft"}); len(found) != 1 || found[0].Slug != "loom-channel" {
		t.Errorf("found by the other name: %+v", found)
	}
	// What was sent before, and what names the old slug, goes to the new system.
	if err := s.Accept(ctx, waiting, cy.ID, ""); err != nil {
		t.Errorf("sent before the merging: %v", err)
	}
	late := row("Lom Chanel", 13, 20, 1.3)
	late.System = "lom-chanel"
	if got := insert(t, s, late); got[0].System != "loom-channel" {
		t.Errorf("a row of the old slug went to %s", got[0].System)
	}
	sound(t, s)
	unharmed(t, s, release)
	if at, err := s.SystemAt(ctx, "lom-chanel", "2030.1"); err != nil || len(at.Measurements) != 2 || len(at.Merged) != 0 {
		t.Errorf("in the release: %+v %v", at, err)
	}

	made, err := s.Undo(ctx, cy.ID, set, "Two channels after all.")
	if err != nil {
		t.Fatal(err)
	}
	after, err := s.System(ctx, "lom-chanel")
	if err != nil || len(after.Measurements) != 2 || len(after.Centrelines) != 2 || after.Best().OtherNames != before.Best().OtherNames {
		t.Fatalf("%+v %v", after, err)
	}
	for i := range before.Measurements {
		x, y := before.Measurements[i], after.Measurements[i]
		y.Notes = x.Notes // accepted in between
		if changes := Diff(&x, &y); len(changes) > 0 {
			t.Errorf("%s: %+v", x.Measurement, changes)
		}
	}
	if d, _ := s.System(ctx, "loom-channel"); len(d.Measurements) != 3 || d.Best().Feeder != "river" || len(d.Withdrawn) != 0 {
		t.Errorf("%+v", d)
	}
	if _, err := s.Undo(ctx, cy.ID, set, "twice"); CodeOf(err) != Conflict {
		t.Errorf("taken back twice: %v", err)
	}
	if _, err := s.Undo(ctx, cy.ID, made, "once more one"); err != nil {
		t.Errorf("the taking back taken back: %v", err)
	}
	if g, _ := s.Gone(ctx, "lom-chanel"); g == nil || g.MovedTo != "loom-channel" {
		t.Errorf("%+v", g)
	}
	sound(t, s)
	unharmed(t, s, release)
}

func TestMergeMeasurements(t *testing.T) {
	s := open(t)
	a, b := row("One", 10, 20, 1.5), row("One", 10.001, 20, 1.5)
	b.ChannelWidthM = Num(300)
	rows := insert(t, s, a, b)
	seen, _ := s.Revision(ctx)
	if _, err := s.MergeMeasurements(ctx, 0, rows[0].Measurement, rows[0].Measurement, nil, seen, "same"); CodeOf(err) != Invalid {
		t.Error(err)
	}
	if _, err := s.MergeMeasurements(ctx, 0, rows[0].Measurement, rows[1].Measurement, []string{"channel_width_m", "feeder", "measurement"}, seen, "The same figure."); err != nil {
		t.Fatal(err)
	}
	d, err := s.System(ctx, "one")
	if err != nil || len(d.Measurements) != 1 || d.Best().ChannelWidthM != Num(300) || d.Withdrawn[0].Instead != rows[0].Measurement {
		t.Fatalf("%+v %v", d, err)
	}
	sound(t, s)
}

func TestRestoreRecordAndField(t *testing.T) {
	s := open(t)
	cy := account(t, s, "cy", "curator")
	rows := insert(t, s, row("Back", 10, 20, 1.5))
	id := rows[0].Measurement
	first, _ := s.Revision(ctx)
	next := edit(edit(edit(rows[0], "sinuosity", "1.9"), "notes", "remeasured"), "basin", "Invented Basin")
	if err := s.Accept(ctx, submit(t, s, 0, Submission{Row: next}), 0, ""); err != nil {
		t.Fatal(err)
	}
	was, now, err := s.RowAt(ctx, id, first)
	if err != nil || was.Sinuosity != Num(1.5) || was.Basin != "" || now.Sinuosity != Num(1.9) {
		t.Fatalf("%+v %v", was, err)
	}
	if _, err := s.Restore(ctx, cy.ID, "measurement:"+id, "notes", first, ""); CodeOf(err) != Invalid {
		t.Error(err)
	}
	if _, err := s.Restore(ctx, cy.ID, "measurement:"+id, "notes", first, "The note was wrong."); err != nil {
		t.Fatal(err)
	}
	d, _ := s.System(ctx, "back")
	if r := d.Best(); r.Notes != "" || r.Sinuosity != Num(1.9) || r.Basin != "Invented Basin" {
		t.Errorf("one field: %+v", r)
	}
	if _, err := s.Restore(ctx, cy.ID, "measurement:"+id, "", first, "All of it."); err != nil {
		t.Fatal(err)
	}
	d, _ = s.System(ctx, "back")
	if r := d.Best(); r.Sinuosity != Num(1.5) || r.Basin != "Invented Basin" {
		t.Errorf("the measurement, not its system: %+v", r)
	}
	if h := d.History[0]; h.Action != "change" || h.Before != "1.9" || h.After != "1.5" || !strings.Contains(h.Why, "All of it.") {
		t.Errorf("a restore is a new revision: %+v", h)
	}
	if _, err := s.Restore(ctx, cy.ID, "system:back", "", first, "The basin too."); err != nil {
		t.Fatal(err)
	}
	if d, _ = s.System(ctx, "back"); d.Best().Basin != "" {
		t.Errorf("%+v", d.Best())
	}
	for record, field := range map[string]string{"measurement:m9": "", "system:none": "", "centreline:1": "", "measurement:" + id: "nonsense"} {
		if _, err := s.Restore(ctx, cy.ID, record, field, first, "x"); CodeOf(err) != NotFound && CodeOf(err) != Invalid {
			t.Errorf("%s %s: %v", record, field, err)
		}
	}
	if _, err := s.Restore(ctx, cy.ID, "measurement:"+id, "", first, "again"); CodeOf(err) != Invalid || !strings.Contains(err.Error(), "nothing would change") {
		t.Error(err)
	}
}

func TestUndoSaysWhatWasChangedSince(t *testing.T) {
	s := open(t)
	rows := insert(t, s, row("Since", 10, 20, 1.5))
	one := submit(t, s, 0, Submission{Row: edit(rows[0], "sinuosity", "1.6")})
	if err := s.Accept(ctx, one, 0, ""); err != nil {
		t.Fatal(err)
	}
	set := latestSet(t, s)
	two := submit(t, s, 0, Submission{Row: edit(edit(rows[0], "sinuosity", "1.6"), "sinuosity", "1.7")})
	if err := s.Accept(ctx, two, 0, ""); err != nil {
		t.Fatal(err)
	}
	if _, err := s.Undo(ctx, 0, set, "wrong"); CodeOf(err) != Conflict || !strings.Contains(err.Error(), "measurement "+rows[0].Measurement+" (sinuosity)") {
		t.Error(err)
	}
	if _, err := s.Undo(ctx, 0, latestSet(t, s), "wrong"); err != nil {
		t.Error(err)
	}
	if _, err := s.Undo(ctx, 0, 9999, "wrong"); CodeOf(err) != NotFound {
		t.Error(err)
	}
	if r, _ := s.Rows(ctx, Filter{}); r[0].Sinuosity != Num(1.6) {
		t.Errorf("%v", r[0].Sinuosity)
	}
}

func latestSet(t *testing.T, s *Store) int64 {
	t.Helper()
	sets, err := s.Activity(ctx, 1)
	if err != nil || len(sets) != 1 {
		t.Fatal(err)
	}
	return sets[0].ID
}

func TestSampleIsKeptWithTheChanges(t *testing.T) {
	s := open(t)
	cy := account(t, s, "cy", "curator")
	rep := importText(t, s, "system_name,latitude_deg,longitude_deg,sinuosity,sinuosity_kind,measured_line,source\nA One,10,20,1.5,peak,thalweg,Invented 1:1 (2020)\nB Two,11,20,1.5,peak,thalweg,Invented 1:1 (2020)\nC Three,12,20,1.5,peak,thalweg,Invented 1:1 (2020)\n", ImportOptions{Why: "Table 2"})
	b, err := s.Batch(ctx, rep.Batch)
	if err != nil || len(b.Waiting) != 3 || b.Why != "Table 2" {
		t.Fatalf("%+v %v", b, err)
	}
	for _, bad := range []*Sample{{Total: 2, Drawn: b.Waiting[:1]}, {Total: 3, Drawn: []int64{999}}, {Total: 3}} {
		if _, err := s.AcceptBatch(ctx, rep.Batch, cy.ID, "", bad); CodeOf(err) != Conflict {
			t.Errorf("%+v: %v", bad, err)
		}
	}
	n, err := s.AcceptBatch(ctx, rep.Batch, cy.ID, "fine", &Sample{Seed: 7, Total: 3, Drawn: b.Waiting[1:]})
	if n != 3 || err != nil {
		t.Fatal(n, err)
	}
	x, err := s.SampleOf(ctx, latestSet(t, s))
	if err != nil || x == nil || x.Seed != 7 || x.Total != 3 || !slices.Equal(x.Drawn, b.Waiting[1:]) || x.Who != "Cy Invented" {
		t.Errorf("%+v %v", x, err)
	}
	if _, err := s.Batch(ctx, rep.Batch); CodeOf(err) != NotFound {
		t.Error(err)
	}
}

// What became of a contribution: the record as accepted, with the curator's
// edits told from the proposal.
func TestAcceptedWithEditsSaysSo(t *testing.T) {
	s := open(t)
	id := submit(t, s, 0, Submission{Row: row("Edited", 10, 20, 1.5)})
	changed := edit(row("Edited", 10, 20, 1.5), "notes", "page 4")
	if err := s.AcceptEdits(ctx, id, 0, changed, 0, ""); err != nil {
		t.Fatal(err)
	}
	u, err := s.Submission(ctx, id)
	if err != nil || u.Became != "m000001" || u.Accepted == nil || len(u.Edits) != 1 || u.Edits[0] != (FieldChange{"notes", "", "page 4"}) {
		t.Fatalf("%+v %v", u, err)
	}
	rows, _ := s.Rows(ctx, Filter{})
	two := submit(t, s, 0, Submission{Row: edit(rows[0], "sinuosity", "1.7")})
	if err := s.AcceptEdits(ctx, two, 0, edit(rows[0], "sinuosity", "1.65"), mustRevision(t, s, rows[0].Measurement), ""); err != nil {
		t.Fatal(err)
	}
	// A later change does not alter what was decided then.
	if err := s.Accept(ctx, submit(t, s, 0, Submission{Row: edit(edit(rows[0], "sinuosity", "1.65"), "notes", "page 5")}), 0, ""); err != nil {
		t.Fatal(err)
	}
	u, err = s.Submission(ctx, two)
	if err != nil || !slices.Equal(u.Changes, []FieldChange{{"sinuosity", "1.5", "1.65"}}) || !slices.Equal(u.Edits, []FieldChange{{"sinuosity", "1.7", "1.65"}}) {
		t.Errorf("%+v %+v %v", u.Changes, u.Edits, err)
	}
}

func mustRevision(t *testing.T, s *Store, measurement string) int64 {
	t.Helper()
	_, revision, err := s.Measurement(ctx, measurement)
	if err != nil {
		t.Fatal(err)
	}
	return revision
}
